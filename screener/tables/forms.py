"""The less plain ways in which numbers are written, judged column by column from the cells that are no plain number."""

from collections.abc import Collection, Iterator, Mapping
from dataclasses import dataclass

import polars as pl

from screener.tables.cells import BLANKS
from screener.tables.limits import Limit
from screener.tables.names import shortlist, visible

_WIDE = "０１２３４５６７８９．，－＋％Ｅｅ−\u00a0\u2007\u202f’\0"
_PLAIN = [
    "0",
    "1",
    "2",
    "3",
    "4",
    "5",
    "6",
    "7",
    "8",
    "9",
    ".",
    ",",
    "-",
    "+",
    "%",
    "E",
    "e",
    "-",
    " ",
    " ",
    " ",
    "'",
    "",
]
_POWER = r"(?:[eEdD][+-]?\d+|\s?[x×*]\s?10\^?[+-]?\d+)?"
_SUFFIX = r"(?:[%‰°µμΩ]|[A-Za-z])[A-Za-z0-9°µμΩ/%·²³^-]{0,11}"
CELL = (
    r"^(?P<limit>[<>≤≥]=?)?\s*"
    rf"(?P<body>[+-]?(?:1\.#INF0*|(?:\d[\d.,' ]*\d|\d)[.,]?{_POWER}|[.,]\d+{_POWER}))\s*(?P<suffix>{_SUFFIX})?$"
)
"""A number with what may stand before and after it."""
_UNDEFINED = r"^[+-]?(?:1\.#(?:QNAN|SNAN|IND|NAN)0*|nan\([a-z]*\))$"
_DECIMAL = r"^[+-]?(?:\d+\.?\d*|\.\d+)" + _POWER + "$"
_DECIMAL_COMMA = r"^[+-]?(?:\d+,\d*|,\d+)" + _POWER + "$"
_GROUPS = {sign: rf"[+-]?\d{{1,3}}(?:[{sign}]\d{{3}})" for sign in ",.' "}
_MAJORITY = 2


@dataclass(frozen=True, slots=True)
class Form:
    """How the numbers of one column are written beyond the plain way."""

    decimal_comma: bool = False
    group: str = ""
    """What stands between thousands."""
    suffix: str = ""
    """What follows the numbers: their unit."""


@dataclass(frozen=True, slots=True)
class Forms:
    """The forms of the columns that have any, and what was found in them."""

    by_column: dict[str, Form]
    undefined: dict[str, int]
    """Cells of a column that mean an undefined number."""
    below: dict[str, Limit]
    above: dict[str, Limit]
    understood: pl.DataFrame
    """The cells that are numbers after all: `column`, `cell`, `cells`, `kind`."""
    words: pl.DataFrame
    """The others: `column`, `cell`, `cells`."""

    def without(self, columns: Collection[str]) -> "Forms":
        """The same but for these columns."""
        return Forms(
            {column: form for column, form in self.by_column.items() if column not in columns},
            self.undefined,
            {column: limit for column, limit in self.below.items() if column not in columns},
            {column: limit for column, limit in self.above.items() if column not in columns},
            self.understood.filter(~pl.col("column").is_in(list(columns))),
            self.words.filter(~pl.col("column").is_in(list(columns))),
        )

    def remarks(self, shown: Mapping[str, str]) -> Iterator[str]:
        """One sentence for each kind of number that is not plain; `shown` gives the name of each column."""
        for kind, how in _HOW.items():
            found = self.understood.filter(kind=kind)
            if found.is_empty():
                continue
            where = shortlist([shown[column] for column in found["column"].unique(maintain_order=True)])
            example = visible(found["cell"][0])[:40]
            count = int(found["cells"].sum())
            yield f"{count:,} cell{'s' if count > 1 else ''} such as {example!r} in {where}: {how}."


_HOW = {
    "limit": "a detection limit; the limit itself stands for the reading, which is counted as censored",
    "suffix": "the unit after the number was left out",
    "grouped": "the sign between thousands was left out",
    "comma": "the comma was read as the decimal sign",
    "other": "an unusual form, read as the number it means",
}


def forms_of(refused: pl.DataFrame, numbers: Mapping[str, int], *, decimal_comma: bool) -> Forms:
    """What the cells that no plain parser took are, from their counts: `column`, `cell`, `cells`.

    `numbers` gives how many plain numbers each column has.
    """
    undefined = refused.filter(_cleaned(pl.col("cell")).str.contains(_UNDEFINED))
    rest = refused.join(undefined, on=["column", "cell"], how="anti", maintain_order="left")
    parts = _cleaned(pl.col("cell")).str.extract_groups(CELL).struct
    split = rest.with_columns(parts.field("limit"), parts.field("body"), parts.field("suffix"))
    forms = _by_column(split.filter(pl.col("body").is_not_null()), numbers, decimal_comma=decimal_comma)
    frames = [_understood(split.filter(column=column), form) for column, form in forms.items()]
    known = pl.concat([split.clear().with_columns(value=pl.lit(0.0), kind=pl.lit("")), *frames]).select(
        "column", "cell", "cells", "kind", "limit", "value"
    )
    words = rest.join(known, on=["column", "cell"], how="anti", maintain_order="left")
    limited = known.filter(pl.col("value").is_finite())
    below, above = (limited.filter(pl.col("limit").str.contains(signs)) for signs in ("[<≤]", "[>≥]"))
    used = {column: form for column, form in forms.items() if column in set(known["column"])}
    limits = _limits(below, pl.col("value").max()), _limits(above, pl.col("value").min())
    return Forms(used, _counts(undefined), *limits, known.drop("limit", "value"), words)


def may_be_number(cell: pl.Expr) -> pl.Expr:
    """Whether text cells look like numbers in some form."""
    return _cleaned(cell).str.contains(CELL)


def unusual(cell: pl.Expr, form: Form) -> pl.Expr:
    """The text cells as numbers, null where they are none even in this form."""
    bare = _cleaned(cell).str.replace(r"^[<>≤≥]=?\s*", "")
    if form.suffix:
        bare = bare.str.strip_suffix(form.suffix).str.strip_chars_end(" ")
    return _number(bare, form)


def _number(bare: pl.Expr, form: Form) -> pl.Expr:
    if form.group:
        decimals = r"(?:,\d*)?$" if form.decimal_comma else r"(?:\.\d*)?$"
        grouped = bare.str.contains(f"^{_GROUPS[form.group]}+{decimals}")
        bare = pl.when(grouped).then(bare.str.replace_all(form.group, "", literal=True)).otherwise(bare)
    if form.decimal_comma:
        bare = bare.str.replace(",", ".", literal=True)
    bare = bare.str.replace(r"(\d\.?)(?:[dD]|\s?[x×*]\s?10\^?)([+-]?\d+)$", "${1}e${2}")
    return bare.str.replace(r"^([+-]?)1\.#INF0*$", "${1}inf").cast(pl.Float64, strict=False)


def _cleaned(cell: pl.Expr) -> pl.Expr:
    """Cells with ASCII digits and signs, without zero bytes and blanks around."""
    return cell.str.strip_chars(BLANKS).str.replace_many(list(_WIDE), _PLAIN).str.strip_chars(" ")


def _by_column(split: pl.DataFrame, numbers: Mapping[str, int], *, decimal_comma: bool) -> dict[str, Form]:
    sign = "," if decimal_comma else "."
    body, cells = pl.col("body"), pl.col("cells")
    votes = split.group_by("column", maintain_order=True).agg(
        cells.sum().alias("all"),
        pl.col("suffix").drop_nulls().unique().alias("suffixes"),
        cells.filter(pl.col("suffix").is_not_null()).sum().alias("suffixed"),
        *(body.str.contains(_sure_group(group)).any().alias(f"group {group}") for group in _GROUPS),
        (body.str.contains(_DECIMAL_COMMA) & ~body.str.contains(f"^{_GROUPS[',']}$")).any().alias("comma"),
        (body.str.contains(r"\.\d") & ~body.str.contains(f"^{_GROUPS['.']}$")).any().alias("point"),
        (body.str.contains(f"^{_GROUPS[',']}+" + r"(?:\.\d*)?$")).any().alias("maybe ,"),
    )
    return {row["column"]: _form(row, numbers.get(row["column"], 0), sign) for row in votes.iter_rows(named=True)}


def _sure_group(sign: str) -> str:
    """A number that can only be read with this sign between thousands."""
    other = {",": r"\.", ".": ","}.get(sign, "[.,]")
    one = _GROUPS[sign]
    single = rf"|^{one}+$" if sign in "' " else ""
    return rf"^{one}+{other}\d+$|^{one}{{2,}}$" + single


def _form(row: dict[str, object], plain: int, sign: str) -> Form:
    total = plain + int(str(row["all"]))
    suffixes = row["suffixes"]
    assert isinstance(suffixes, list)
    majority = _MAJORITY * int(str(row["suffixed"])) >= total
    suffix = str(suffixes[0]) if len(suffixes) == 1 and majority else ""
    comma = sign == "," or (bool(row["comma"]) and not row["point"] and not row["group ,"])
    groups = [group for group in _GROUPS if row[f"group {group}"] and group != ("," if comma else "")]
    if not groups and not comma and row["maybe ,"]:
        groups = [","]
    return Form(comma, groups[0] if len(groups) == 1 else "", suffix)


def _understood(split: pl.DataFrame, form: Form) -> pl.DataFrame:
    """The cells that are numbers in this form, and what kind of number each is."""
    value = unusual(pl.col("cell"), form)
    body = pl.col("body")
    kind = (
        pl.when(pl.col("limit").is_not_null())
        .then(pl.lit("limit"))
        .when(pl.col("suffix").is_not_null())
        .then(pl.lit("suffix"))
        .when(body.str.contains(_GROUPS[form.group]) if form.group else pl.lit(value=False))
        .then(pl.lit("grouped"))
        .when(body.str.contains(_DECIMAL_COMMA))
        .then(pl.lit("comma"))
        .otherwise(pl.lit("other"))
    )
    return split.with_columns(value=value, kind=kind).filter(pl.col("value").is_not_null() & body.is_not_null())


def _limits(known: pl.DataFrame, innermost: pl.Expr) -> dict[str, Limit]:
    """The limits of each column."""
    cells = pl.col("cells")
    at_it = cells.filter(pl.col("value") == innermost)
    limits = known.group_by("column").agg(cells.sum(), innermost, at_it.sum().alias("at"))
    return {row["column"]: Limit(row["cells"], row["value"], row["at"]) for row in limits.iter_rows(named=True)}


def _counts(frame: pl.DataFrame) -> dict[str, int]:
    return dict(frame.group_by("column").agg(pl.col("cells").sum()).rows())
