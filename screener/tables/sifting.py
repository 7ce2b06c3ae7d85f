"""From a raw table to channels of numbers: text turned into numbers, missing codes blanked, the rest set aside."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import polars as pl

from screener.tables.cells import count_cells, count_words, is_number, number, word_remarks
from screener.tables.chosen import Choice
from screener.tables.columns import reading, reason_for_type, unfit
from screener.tables.raw import RawTable

GUESSES = ("a row counter", "time stamps")
"""How the reasons begin that rest on a guess; a column asked for by its very name is kept all the same."""


@dataclass(frozen=True, slots=True)
class Sifted:
    """The columns that are channels, as numbers, and the reasons of the others."""

    frame: pl.LazyFrame
    columns: tuple[str, ...]
    reasons: dict[str, str]
    remarks: tuple[str, ...]


def sift(raw: RawTable, shown: Mapping[str, str], choice: Choice, missing: Sequence[str]) -> Sifted:
    """Every column of the table, either among the channels or with a reason; `shown` gives each column's name."""
    schema = raw.frame.collect_schema()
    reasons = {column: choice.reasons[at] for at, column in enumerate(schema) if at in choice.reasons}
    for column, dtype in schema.items():
        if column not in reasons and (reason := reason_for_type(dtype)):
            reasons[column] = reason
    wanted = [column for column in schema if column not in reasons]
    raw = replace(raw, frame=_settled(_only(raw.frame, wanted), held=raw.held and not raw.loaded))
    texts = [token for token in missing if not is_number(token)]
    frame, text_reasons, words = _text_as_numbers(raw, shown, texts)
    numeric = [column for column in schema if column not in reasons and column not in text_reasons]
    frame, codes = _without_codes(frame, numeric, missing, held=raw.held)
    reasons |= text_reasons
    unfit_reasons = unfit(frame, [column for column in schema if column not in reasons], raw.rows, shown)
    by_name = {column for at, column in enumerate(schema) if at in choice.by_name}
    reasons |= {c: why for c, why in unfit_reasons.items() if not (c in by_name and why.startswith(GUESSES))}
    columns = tuple(column for column in schema if column not in reasons)
    return Sifted(_only(frame, columns), columns, reasons, (*words, *codes))


def _settled(frame: pl.LazyFrame, *, held: bool) -> pl.LazyFrame:
    """The same frame, computed once and kept in memory when it is to be held."""
    return frame.collect().lazy() if held else frame


def _only(frame: pl.LazyFrame, columns: Sequence[str]) -> pl.LazyFrame:
    """The frame with these columns in this order; the same frame when it has no others."""
    return frame if frame.collect_schema().names() == list(columns) else frame.select(pl.col(columns))


def _text_as_numbers(
    raw: RawTable, shown: Mapping[str, str], missing: Sequence[str]
) -> tuple[pl.LazyFrame, dict[str, str], tuple[str, ...]]:
    """The frame with its text columns as numbers, the reasons of those that are not, and remarks on words."""
    frame = _clean_text_as_numbers(raw)
    text = [column for column, dtype in frame.collect_schema().items() if not dtype.is_numeric()]
    if not text:
        return frame, {}, ()
    as_numbers = [number(column, missing, decimal_comma=raw.decimal_comma) for column in text]
    numbers = _settled(frame.select(as_numbers), held=raw.held)
    counts = count_cells(frame, numbers, text, missing)
    reasons = {column: reason for column in text if (reason := counts[column].reason())}
    mixed = [column for column in text if column not in reasons and counts[column].numbers < counts[column].cells]
    words = count_words(frame, mixed, missing, decimal_comma=raw.decimal_comma)
    remarks = tuple(word_remarks(words, shown))
    if raw.held:
        return pl.concat([frame.drop(text), numbers.drop(reasons)], how="horizontal"), reasons, remarks
    kept = [cells for column, cells in zip(text, as_numbers, strict=True) if column not in reasons]
    return frame.drop(reasons).with_columns(kept), reasons, remarks


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
    marked = [reading(column).is_in(codes) for column in columns]
    cells = sum(frame.select(mark.sum() for mark in marked).collect().row(0))
    blanked = [
        pl.when(mark).then(None).otherwise(reading(column)).alias(column)
        for column, mark in zip(columns, marked, strict=True)
    ]
    listed = " or ".join(token for token in missing if is_number(token))
    remark = f"{cells:,} cell{' is' if cells == 1 else 's are'} {listed}: read as missing, as asked."
    return _settled(frame.with_columns(blanked), held=held), (remark,) if cells else ()
