"""From a raw table to channels of numbers: text turned into numbers, missing codes blanked, the rest set aside."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace

import numpy as np
import polars as pl

from screener.records import Proposal
from screener.tables.cells import (
    TextColumn,
    count_cells,
    is_number,
    may_hold_numbers,
    meaningful,
    number,
    refused_cells,
    word_remarks,
)
from screener.tables.chosen import Choice
from screener.tables.codes import proposed_codes
from screener.tables.columns import reading, reason_for_type, unfit
from screener.tables.forms import Form, Forms, forms_of, may_be_number, unusual
from screener.tables.limits import Limit
from screener.tables.raw import RawTable

GUESSES = ("a row counter", "time stamps", "identifiers", "codes", "flags")
"""How the reasons begin that rest on a guess; a column asked for by a name or pattern is kept all the same."""


@dataclass(frozen=True, slots=True)
class Sifted:
    """The columns that are channels, as numbers, and the reasons of the others."""

    frame: pl.LazyFrame
    columns: tuple[str, ...]
    reasons: dict[str, str]
    remarks: tuple[str, ...]
    proposals: tuple[Proposal, ...] = ()
    below: Mapping[str, Limit] = field(default_factory=dict)
    """The detection limits of a column that has readings known only to lie below one."""
    above: Mapping[str, Limit] = field(default_factory=dict)
    units: Mapping[str, str] = field(default_factory=dict)
    """The unit that follows the numbers of a column."""
    whole: pl.DataFrame | None = None
    """What the frame gives, where it was computed on the way."""


@dataclass(frozen=True, slots=True)
class _Text:
    """The text columns of a table as numbers."""

    frame: pl.LazyFrame
    reasons: dict[str, str]
    remarks: tuple[str, ...] = ()
    forms: Forms | None = None


def sift(raw: RawTable, schema: pl.Schema, shown: Mapping[str, str], choice: Choice, missing: Sequence[str]) -> Sifted:
    """Every column of the table, either among the channels or with a reason; `shown` gives each column's name.

    `schema` is that of the raw frame.
    """
    reasons = {column: choice.reasons[at] for at, column in enumerate(schema) if at in choice.reasons}
    for column, dtype in schema.items():
        if column not in reasons and (reason := reason_for_type(dtype)):
            reasons[column] = reason
    wanted = [column for column in schema if column not in reasons]
    kept = raw.frame if len(wanted) == len(schema) else raw.frame.select(pl.col(wanted))
    loaded = raw.whole if kept is raw.frame else None
    raw = replace(raw, frame=_settled(kept, held=raw.held and not raw.loaded), whole=loaded)
    texts = [token for token in missing if not is_number(token)]
    mixed = any(not schema[column].is_numeric() for column in wanted)
    text = _text_as_numbers(raw, shown, texts) if mixed else _Text(raw.frame, {})
    reasons |= text.reasons
    numeric = [column for column in schema if column not in reasons]
    frame, codes = _without_codes(text.frame, numeric, missing, held=raw.held)
    whole = _whole(raw, frame)
    unfit_reasons = unfit(
        frame if whole is None else whole,
        [column for column in schema if column not in reasons],
        raw.rows,
        shown,
        raw.starts,
    )
    by_name = {column for at, column in enumerate(schema) if at in choice.by_name}
    reasons |= {c: why for c, why in unfit_reasons.items() if not (c in by_name and why.startswith(GUESSES))}
    columns = tuple(column for column in schema if column not in reasons)
    proposals = proposed_codes(frame if whole is None else whole, columns, raw.rows, _limits(text.forms))
    remarks = (*text.remarks, *codes, *(proposal.sentence() for proposal in proposals))
    if mixed or len(columns) < len(wanted):
        frame, whole = _only(frame, columns), None if whole is None else whole[list(columns)]
    sifted = Sifted(frame, columns, reasons, remarks, proposals, whole=whole)
    if text.forms is None:
        return sifted
    units = {column: form.suffix for column, form in text.forms.by_column.items()}
    return replace(sifted, below=text.forms.below, above=text.forms.above, units=units)


def _limits(forms: Forms | None) -> dict[str, set[float]]:
    """The innermost detection limits of the columns that have any."""
    limits: dict[str, set[float]] = {}
    for side in (forms.below, forms.above) if forms else ():
        for column, limit in side.items():
            limits.setdefault(column, set()).add(limit.value)
    return limits


def _whole(raw: RawTable, frame: pl.LazyFrame) -> pl.DataFrame | None:
    """What the frame gives when it is to be held; as it was loaded where nothing has changed since."""
    if not raw.held:
        return None
    return raw.whole if raw.whole is not None and frame is raw.frame else frame.collect()


def _settled(frame: pl.LazyFrame, *, held: bool) -> pl.LazyFrame:
    """The same frame, computed once and kept in memory when it is to be held."""
    return frame.collect().lazy() if held else frame


def _only(frame: pl.LazyFrame, columns: Sequence[str]) -> pl.LazyFrame:
    """The frame with these columns in this order; the same frame when it has no others."""
    return frame if frame.collect_schema().names() == list(columns) else frame.select(pl.col(columns))


def _text_as_numbers(raw: RawTable, shown: Mapping[str, str], missing: Sequence[str]) -> _Text:
    """The frame with its text columns as numbers, the reasons of those that are not, and remarks on words."""
    frame = _clean_text_as_numbers(raw)
    text = [column for column, dtype in frame.collect_schema().items() if not dtype.is_numeric()]
    if not text:
        return _Text(frame, {})
    comma = raw.decimal_comma
    numbers = _settled(frame.select(number(c, missing, decimal_comma=comma) for c in text), held=raw.held)
    counts = count_cells(frame, numbers, text, missing)
    mixed = _mixed(frame, counts, missing)
    refused = refused_cells(frame, mixed, missing, decimal_comma=comma, rows=raw.rows)
    forms = forms_of(refused, {column: counts[column].numbers for column in mixed}, decimal_comma=comma)
    counts = _recounted(counts, forms)
    reasons = {column: reason for column in text if (reason := counts[column].reason())}
    forms = forms.without(reasons)
    remarks = (*forms.remarks(shown), *word_remarks(forms.words, shown))
    kept = [column for column in text if column not in reasons]
    as_numbers = [_as_number(column, missing, forms.by_column.get(column), decimal_comma=comma) for column in kept]
    if not raw.held:
        return _Text(frame.drop(reasons).with_columns(as_numbers), reasons, remarks, forms)
    formed = frame.select(e for c, e in zip(kept, as_numbers, strict=True) if c in forms.by_column)
    plain = numbers.select(column for column in kept if column not in forms.by_column)
    parts = [frame.drop(text), plain, _settled(formed, held=True)]
    filled = [part for part in parts if part.collect_schema()]
    return _Text(pl.concat(filled, how="horizontal") if filled else formed, reasons, remarks, forms)


def _as_number(column: str, missing: Sequence[str], form: Form | None, *, decimal_comma: bool) -> pl.Expr:
    """The cells of a text column as numbers; plain ones are taken as they stand unless the column groups thousands."""
    plain = number(column, missing, decimal_comma=decimal_comma)
    if form is None:
        return plain
    formed = unusual(meaningful(column, missing), form)
    return (formed if form.group else pl.coalesce(plain, formed)).alias(column)


def _mixed(frame: pl.LazyFrame, counts: Mapping[str, TextColumn], missing: Sequence[str]) -> list[str]:
    """The columns with cells that are no plain number, but may be one in another form, or words among numbers."""
    unclear = {column: count for column, count in counts.items() if count.numbers < count.cells}
    few = [column for column, count in unclear.items() if 2 * count.numbers < count.cells and not count.dates]
    odd = set(may_hold_numbers(frame, few, missing, may_be_number))
    return [c for c, count in unclear.items() if 2 * count.numbers >= count.cells or c in odd]


def _recounted(counts: Mapping[str, TextColumn], forms: Forms) -> dict[str, TextColumn]:
    found = dict(forms.understood.group_by("column").agg(pl.col("cells").sum()).rows())
    return {
        column: replace(
            count,
            numbers=count.numbers + found.get(column, 0),
            cells=count.cells - forms.undefined.get(column, 0),
        )
        for column, count in counts.items()
    }


def _clean_text_as_numbers(raw: RawTable) -> pl.LazyFrame:
    """The frame with those text columns as numbers whose every cell is a plain number or blank: most, usually."""
    text = [column for column, dtype in raw.frame.collect_schema().items() if not dtype.is_numeric()]
    if not text:
        return raw.frame
    cells = pl.col(text).cast(pl.String)
    plain = cells.str.replace(",", ".", literal=True) if raw.decimal_comma else cells
    cast = plain.cast(pl.Float64, strict=False)
    numbers = _settled(raw.frame.select(cast), held=raw.held)
    blank, refused = pl.collect_all([f.select(pl.col(text).null_count()) for f in (raw.frame, numbers)])
    clean = [c for c in text if blank[c].item() == refused[c].item() < raw.rows]
    if clean and raw.held:
        return pl.concat([raw.frame.drop(clean), numbers.select(pl.col(clean))], how="horizontal")
    return raw.frame.with_columns(cast) if len(clean) == len(text) else raw.frame


def _without_codes(
    frame: pl.LazyFrame, columns: Sequence[str], missing: Sequence[str], *, held: bool
) -> tuple[pl.LazyFrame, tuple[str, ...]]:
    """The frame with readings that equal a numeric missing token as null, and a remark with their count."""
    codes = [float(token) for token in missing if is_number(token)]
    if not codes or not columns:
        return frame, ()
    schema = frame.collect_schema()
    rounded = [float(np.float32(code)) for code in codes]
    marked = [reading(column).is_in(rounded if schema[column] == pl.Float32 else codes) for column in columns]
    cells = sum(frame.select(mark.sum() for mark in marked).collect().row(0))
    blanked = [
        pl.when(mark).then(None).otherwise(reading(column)).alias(column)
        for column, mark in zip(columns, marked, strict=True)
    ]
    listed = " or ".join(token for token in missing if is_number(token))
    remark = f"{cells:,} cell{' is' if cells == 1 else 's are'} {listed}: read as missing, as asked."
    return _settled(frame.with_columns(blanked), held=held), (remark,) if cells else ()
