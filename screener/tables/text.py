"""Text tables: parsed as numbers at once where they are clean, cell by cell where they are not."""

from collections.abc import Collection, Sequence
from os import SEEK_END
from pathlib import Path

import polars as pl

from screener.errors import TableError
from screener.tables.encoding import text_lines, utf8_text
from screener.tables.formats import Recognised
from screener.tables.layout import SEPARATORS, Layout, layout_of
from screener.tables.ragged import row_widths
from screener.tables.raw import RawTable

_PARSE_ERRORS = (pl.exceptions.ComputeError, pl.exceptions.SchemaError)
_TAB_SUFFIXES = frozenset({".tsv", ".tab"})


def read_text(path: Path, recognised: Recognised) -> RawTable:
    """The table in memory: Float64 columns, and String columns where a cell is no plain number.

    Raises:
        TableError: there is no row of readings, or the header does not name every column.
    """
    text = utf8_text(path, recognised.packing)
    if not any(line.strip() for line in text.head):
        raise TableError(f"Couldn't read {str(path)!r}: it begins with nothing but blank lines.")
    layout = layout_of(text.head, prefer_tab=bool(_TAB_SUFFIXES & {suffix.lower() for suffix in path.suffixes}))
    if layout.extra_cells:
        raise TableError(
            f"Couldn't read {str(path)!r}: its header names {len(layout.names):,} columns, "
            "but the rows have more cells. Give every column a name."
        )
    frame, more = _parse(text.source, layout)
    if frame.is_empty():
        raise TableError(f"Couldn't read {str(path)!r}: it has a header but no readings.")
    remarks = (*text.remarks, *_layout_remarks(layout), *more)
    return RawTable(
        frame=frame.lazy(),
        names=layout.names,
        format=_label(recognised, layout),
        rows=len(frame),
        held=True,
        loaded=True,
        remarks=remarks,
        decimal_comma=layout.decimal_comma,
    )


def _parse(source: Path | bytes, layout: Layout) -> tuple[pl.DataFrame, tuple[str, ...]]:
    columns = [f"c{at}" for at in range(len(layout.names))]
    words = range(len(columns)) if _ends_in_quote(source) else layout.words
    try:
        frame, long_rows = _scan(source, layout, columns, words).collect(), False
    except _PARSE_ERRORS:
        frame, long_rows = _all_as_text(source, layout, columns)
    regular = not long_rows and frame.to_series(-1).null_count() == 0
    return (frame, ()) if regular else _without_blank_lines(frame, source, layout)


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
        decimal_comma=layout.decimal_comma,
        encoding="utf8-lossy" if ragged else "utf8",
        extra_columns="ignore" if ragged else "raise",
        missing_columns="insert",
        glob=False,
    )


def _without_blank_lines(
    frame: pl.DataFrame, source: Path | bytes, layout: Layout
) -> tuple[pl.DataFrame, tuple[str, ...]]:
    widths = row_widths(text_lines(source), layout, len(frame))
    left_out = widths.left_out()
    if left_out.any() and len(left_out) == len(frame):
        frame = frame.filter(pl.Series(~left_out))
    return frame, tuple(widths.remarks())


def _layout_remarks(layout: Layout) -> tuple[str, ...]:
    if any(layout.names):
        return ()
    return ("The first line holds only numbers: it was read as readings, and the columns are called by their place.",)


def _label(recognised: Recognised, layout: Layout) -> str:
    words = ["TSV" if layout.separator == "\t" else str(recognised.kind)]
    details = [SEPARATORS[layout.separator]] if layout.separator == ";" else []
    details += ["decimal comma"] if layout.decimal_comma else []
    details += [str(recognised.packing)] if recognised.packing else []
    return f"{words[0]} ({', '.join(details)})" if details else words[0]
