"""Text tables: parsed as numbers at once where they are clean, cell by cell where they are not."""

from collections.abc import Collection, Sequence
from pathlib import Path

import polars as pl

from screener.errors import TableError
from screener.tables.encoding import utf8_source
from screener.tables.formats import Recognised
from screener.tables.layout import SAMPLED_LINES, SEPARATORS, Layout, layout_of
from screener.tables.ragged import row_widths
from screener.tables.raw import RawTable

_TAB_SUFFIXES = frozenset({".tsv", ".tab"})


def read_text(path: Path, recognised: Recognised) -> RawTable:
    """The table in memory: Float64 columns, and String columns where a cell is no plain number.

    Raises:
        TableError: there is no row of readings, or the header does not name every column.
    """
    source, remarks = utf8_source(path, recognised.packing)
    lines = _lines(source, SAMPLED_LINES).to_series().to_list()
    if not any(line.strip() for line in lines):
        raise TableError(f"Couldn't read {str(path)!r}: its first {len(lines):,} lines are blank.")
    layout = layout_of(lines, prefer_tab=bool(_TAB_SUFFIXES & {suffix.lower() for suffix in path.suffixes}))
    if layout.extra_cells:
        raise TableError(
            f"Couldn't read {str(path)!r}: its header names {len(layout.names):,} columns, "
            "but the rows have more cells. Give every column a name."
        )
    frame, more = _parse(source, layout)
    if frame.is_empty():
        raise TableError(f"Couldn't read {str(path)!r}: it has a header but no readings.")
    remarks = (*remarks, *_layout_remarks(layout), *more)
    return RawTable(
        frame.lazy(), layout.names, _label(recognised, layout), len(frame), True, remarks, layout.decimal_comma
    )


def _parse(source: Path | bytes, layout: Layout) -> tuple[pl.DataFrame, tuple[str, ...]]:
    columns = [f"c{at}" for at in range(len(layout.names))]
    try:
        frame = _scan(source, layout, columns, layout.words).collect()
        regular = frame.to_series(-1).null_count() == 0
    except pl.exceptions.ComputeError:
        frame = _scan(source, layout, columns, range(len(columns)), ragged=True).collect()
        regular = False
    return (frame, ()) if regular else _without_blank_lines(frame, source, layout)


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
    widths = row_widths(_lines(source), layout, len(frame))
    left_out = widths.left_out()
    if left_out.any() and len(left_out) == len(frame):
        frame = frame.filter(pl.Series(~left_out))
    return frame, tuple(widths.remarks())


def _lines(source: Path | bytes, count: int | None = None) -> pl.DataFrame:
    """The physical lines of the text, bytes that are no UTF-8 replaced."""
    try:
        return pl.scan_lines(source, n_rows=count, glob=False).collect()
    except pl.exceptions.ComputeError:
        return (
            pl.scan_csv(
                source,
                has_header=False,
                separator="\x01",
                quote_char=None,
                schema={"line": pl.String()},
                encoding="utf8-lossy",
                extra_columns="ignore",
                n_rows=count,
                glob=False,
            )
            .with_columns(pl.col("line").fill_null(""))
            .collect()
        )


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
