"""How a text table is laid out: its separator, its header and what its first rows hold."""

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from screener.errors import PlanError
from screener.records import Plan
from screener.tables.cells import is_number
from screener.tables.head import SEPARATORS, HeadRow, head_rows, separator_of
from screener.tables.header import Header, header_of
from screener.tables.votes import decimal_vote

_SAMPLED_ROWS = 20
_SAMPLED_CELLS = 10_000
_FEWEST_ROWS = 4
_VOTING_CELLS = 200
_TOLD_SEPARATOR = re.compile(r"""["']?sep=(?P<sign>[^\w\s"']|\t)["']?[,;\t]*\s*""", re.IGNORECASE)
"""A first line for spreadsheets that says what separates the cells."""


@dataclass(frozen=True, slots=True)
class Layout:
    """What must be known before a text table can be parsed."""

    separator: str
    names: tuple[str, ...]
    """The header's cells as written; empty names where the table has no header."""
    lines_before: int
    """Physical lines before the first row of readings."""
    decimal_comma: bool
    words: frozenset[int]
    """Columns in which a sampled cell is neither a number nor blank."""
    extra_cells: bool
    """Whether the sampled rows all have more cells than the header, and not only blank ones."""
    header: Header
    doubt: str = ""
    """A cell whose comma may stand before decimals or between thousands."""
    drop_comments: bool = False
    """Whether the plan names the sign of comment lines, which may then stand anywhere."""

    def words_of(self) -> Iterator[str]:
        """What the user is told about the lay-out, a few words each."""
        yield SEPARATORS.get(self.separator, repr(self.separator))
        if self.decimal_comma:
            yield "decimal comma"
        if count := self.header.preamble:
            yield f"{count} preamble line{'s' if count > 1 else ''}"
        if not self.header.header_line:
            yield "no header"
        elif self.header.header_line > 1:
            yield f"names in line {self.header.header_line}"
        if self.header.units_line:
            yield f"units in line {self.header.units_line}"
        if count := self.header.left_out:
            yield f"{count} more line{'s' if count > 1 else ''} above the readings left out"
        if self.header.comment:
            yield f"comments begin with {self.header.comment}"


def layout_of(lines: Sequence[str], plan: Plan | None = None, *, prefer_tab: bool = False) -> Layout:
    """The layout guessed from the first lines of a table, which hold at least one that is not blank.

    What the plan says about it is taken as said. Raises PlanError when the plan says something impossible.
    """
    plan = plan or Plan()
    told = _TOLD_SEPARATOR.fullmatch(lines[0])
    lines = ["", *lines[1:]] if told else lines
    said = plan.separator or (told["sign"] if told else "")
    separator = _given_separator(said) or separator_of(lines, prefer_tab=prefer_tab)
    rows = list(head_rows(lines, separator))
    header = header_of(rows, header_line=plan.header_line, units_line=plan.units_line, comment=plan.comment)
    sampled = list(_sample(rows, header))
    cells = (cell.strip() for row in sampled for cell in row[:: max(1, len(row) // _VOTING_CELLS)])
    vote = decimal_vote(cells, separator=separator)
    comma = vote.comma if not plan.decimal else _given_decimal(plan.decimal)
    names = header.names
    words = frozenset(_word_columns(sampled, decimal_comma=comma, separator=separator))
    extra = bool(sampled) and all(any(cell.strip() for cell in row[len(names) :]) for row in sampled)
    return Layout(
        separator=separator,
        names=names,
        lines_before=header.lines_before,
        decimal_comma=comma,
        words=words,
        extra_cells=extra,
        header=header,
        doubt="" if plan.decimal else vote.doubt,
        drop_comments=bool(plan.comment),
    )


def _given_separator(said: str) -> str:
    """The separator that the plan names, by itself or in a word."""
    by_name = {name: sign for sign, name in SEPARATORS.items()} | {"space": " ", "blank": " ", "\\t": "\t", "pipe": "|"}
    sign = by_name.get(said.lower(), said)
    if len(sign) > 1 or not sign.isascii() or sign in tuple('"\r\n'):
        known = ", ".join(SEPARATORS.values())
        raise PlanError(f"Couldn't use separator {said!r}: it must be one ASCII character or one of {known}.")
    return sign


def _given_decimal(said: str) -> bool:
    by_name = {",": True, "comma": True, ".": False, "point": False}
    if said.lower() not in by_name:
        raise PlanError(f"Couldn't use decimal sign {said!r}: it must be . or , (point or comma).")
    return by_name[said.lower()]


def _sample(rows: Sequence[HeadRow], header: Header) -> Iterator[list[str]]:
    """The first rows of readings: fewer of a wide table."""
    width = max(1, len(header.names))
    count = max(_FEWEST_ROWS, min(_SAMPLED_ROWS, _SAMPLED_CELLS // width))
    below = [row for row in rows if row.first > header.lines_before]
    kept = [row for row in below if not (header.comment and row.cells[0].lstrip().startswith(header.comment))]
    for row in kept[:count]:
        yield row.cells


def _word_columns(rows: Sequence[Sequence[str]], *, decimal_comma: bool, separator: str) -> Iterator[int]:
    for row in rows:
        if _all_plain(row):
            continue
        for at, cell in enumerate(row):
            plain = cell.replace(",", ".") if decimal_comma and separator != "," else cell
            if plain.strip() and (plain != plain.strip() or not is_number(plain)):
                yield at


def _all_plain(row: Sequence[str]) -> bool:
    """Whether every cell is a plain number, told quickly; false where a closer look is needed."""
    text = "".join(row)
    if not text.isascii() or "_" in text or len(text.split(maxsplit=1)) > 1 or text != text.strip():
        return False
    try:
        return all(map(float, row)) or True
    except ValueError:
        return False
