"""Text tables: parsed as numbers at once where they are clean, cell by cell where they are not."""

import re
from collections.abc import Collection, Iterator, Sequence
from dataclasses import dataclass, replace
from os import SEEK_END
from pathlib import Path

import numpy as np
import polars as pl

from screener.errors import TableError
from screener.records import Plan
from screener.tables.cells import is_blank
from screener.tables.encoding import Text, blanks_as_tabs, text_lines, utf8_text
from screener.tables.formats import Recognised
from screener.tables.head import SEPARATORS
from screener.tables.layout import Layout, layout_of
from screener.tables.ragged import last_rows_sum_up, row_widths
from screener.tables.raw import RawTable

_PARSE_ERRORS = (pl.exceptions.ComputeError, pl.exceptions.SchemaError)
_TAB_SUFFIXES = frozenset({".tsv", ".tab"})
_REFUSED_COLUMN = re.compile(r"at column 'c(\d+)'")
_TRIES = 3
"""Parses of a text whose words show one column at a time, before every column is read as text."""


@dataclass(frozen=True, slots=True)
class _Parsed:
    frame: pl.DataFrame
    words: tuple[str, ...] = ()
    remarks: tuple[str, ...] = ()


def read_text(path: Path, recognised: Recognised, plan: Plan | None = None) -> RawTable:
    """The table in memory: Float64 columns, and String columns where a cell is no plain number.

    Raises:
        TableError: there is no row of readings, or the header does not name every column.
    """
    plan = plan or Plan()
    text = utf8_text(path, recognised.packing, given=plan.encoding)
    if not any(not is_blank(line) for line in text.head):
        raise TableError(f"Couldn't read {str(path)!r}: it begins with nothing but blank lines.")
    prefer_tab = bool(_TAB_SUFFIXES & {suffix.lower() for suffix in path.suffixes})
    layout = layout_of(text.head, plan, prefer_tab=prefer_tab)
    if layout.extra_cells:
        raise TableError(
            f"Couldn't read {str(path)!r}: its header names {len(layout.names):,} columns, "
            "but the rows have more cells. Give every column a name."
        )
    parsed = _parse(*_parseable(text, layout))
    if parsed.frame.is_empty():
        raise TableError(f"Couldn't read {str(path)!r}: it has a header but no readings.")
    return RawTable(
        frame=parsed.frame.lazy(),
        names=layout.names,
        format=_label(recognised, layout),
        rows=len(parsed.frame),
        held=True,
        loaded=True,
        remarks=(*text.remarks, *_layout_remarks(layout), *parsed.remarks),
        decimal_comma=layout.decimal_comma,
        units=layout.header.units,
        dialect=", ".join((*layout.words_of(), *text.words, *parsed.words)),
    )


def _parseable(text: Text, layout: Layout) -> tuple[Path | bytes, Layout]:
    """The text and its layout as polars takes them: one sign between two cells."""
    if layout.separator != " ":
        return text.source, layout
    return blanks_as_tabs(text), replace(layout, separator="\t")


def _parse(source: Path | bytes, layout: Layout) -> _Parsed:
    columns = [f"c{at}" for at in range(len(layout.names))]
    frame, long_rows = _frame(source, layout, columns)
    irregular = long_rows or layout.drop_comments or frame.to_series(-1).null_count() > 0
    parsed = _without_other_rows(frame, source, layout) if irregular else _Parsed(frame)
    return _without_sums(parsed)


def _frame(source: Path | bytes, layout: Layout, columns: Sequence[str]) -> tuple[pl.DataFrame, bool]:
    """The cells, and whether a row has more of them than the header."""
    words = set(range(len(columns)) if _ends_in_quote(source) else layout.words)
    for _ in range(_TRIES):
        try:
            return _scan(source, layout, columns, words).collect(), False
        except _PARSE_ERRORS as error:
            refused = _REFUSED_COLUMN.search(str(error))
            if not refused or int(refused[1]) in words:
                break
            words.add(int(refused[1]))
    return _all_as_text(source, layout, columns)


def _ends_in_quote(source: Path | bytes) -> bool:
    """Whether the last cell may be a lone quotation mark, on which polars' parser of numbers panics."""
    if isinstance(source, bytes):
        return source[-2:].rstrip(b"\r").endswith(b'"')
    with source.open("rb") as file:
        file.seek(-min(2, source.stat().st_size), SEEK_END)
        return file.read().rstrip(b"\r").endswith(b'"')


def _all_as_text(source: Path | bytes, layout: Layout, columns: Sequence[str]) -> tuple[pl.DataFrame, bool]:
    """Every cell as text, and whether a row has more cells than the header."""
    every = range(len(columns))
    try:
        return _scan(source, layout, columns, every).collect(), False
    except _PARSE_ERRORS:
        return _scan(source, layout, columns, every, ragged=True).collect(), True


def _scan(
    source: Path | bytes,
    layout: Layout,
    columns: Sequence[str],
    text: Collection[int],
    *,
    ragged: bool = False,
) -> pl.LazyFrame:
    schema = {column: pl.String() if at in text else pl.Float64() for at, column in enumerate(columns)}
    return pl.scan_csv(
        source,
        has_header=False,
        separator=layout.separator,
        skip_lines=layout.lines_before,
        schema=schema,
        decimal_comma=layout.decimal_comma and layout.separator != ",",
        encoding="utf8-lossy" if ragged else "utf8",
        extra_columns="ignore" if ragged else "raise",
        missing_columns="insert",
        glob=False,
    )


def _without_other_rows(frame: pl.DataFrame, source: Path | bytes, layout: Layout) -> _Parsed:
    """The frame without blank lines, comments and footers."""
    widths = row_widths(text_lines(source), layout, len(frame))
    left_out = widths.left_out()
    if left_out.any() and len(left_out) == len(frame):
        frame = frame.filter(pl.Series(~left_out))
    count = int(widths.footers.sum())
    words = [f"{count} footer line{'s' if count > 1 else ''}"] if count else []
    return _Parsed(frame, tuple(words), tuple(widths.remarks()))


def _without_sums(parsed: _Parsed) -> _Parsed:
    """The frame without last rows that sum up the ones above, which are no readings."""
    first = parsed.frame.to_series(0)
    if first.dtype != pl.String or parsed.frame.width == 1:
        return parsed
    sums = last_rows_sum_up(first)
    if not sums.any():
        return parsed
    named = ", ".join(repr(cell.strip()) for cell in first.filter(pl.Series(sums)).head(3))
    count = int(np.count_nonzero(sums))
    remark = f"{count} last row{'s' if count > 1 else ''} ({named}) sum up the others: left out."
    return replace(parsed, frame=parsed.frame.filter(pl.Series(~sums)), remarks=(*parsed.remarks, remark))


def _layout_remarks(layout: Layout) -> Iterator[str]:
    if not any(layout.names):
        what = "reads like those below" if layout.words else "holds only numbers"
        yield f"The first line {what}: it was read as readings, and the columns are called by their place."
    if layout.doubt:
        read = "before decimals" if layout.decimal_comma else "between thousands"
        other = "." if layout.decimal_comma else ","
        yield (
            f"The comma in cells such as {layout.doubt!r} was read as standing {read}; "
            f"--decimal={other} reads it the other way."
        )


def _label(recognised: Recognised, layout: Layout) -> str:
    words = ["TSV" if layout.separator == "\t" else str(recognised.kind)]
    details = [SEPARATORS[layout.separator]] if layout.separator == ";" else []
    details += ["decimal comma"] if layout.decimal_comma else []
    details += [str(recognised.packing)] if recognised.packing else []
    return f"{words[0]} ({', '.join(details)})" if details else words[0]
