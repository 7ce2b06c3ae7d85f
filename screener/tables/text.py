"""Text tables: parsed as numbers at once where they are clean, cell by cell where they are not."""

import re
from collections.abc import Callable, Collection, Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import count
from os import SEEK_END
from pathlib import Path

import polars as pl

from screener.errors import TableError
from screener.records import Plan
from screener.tables.cells import is_blank, is_number
from screener.tables.encoding import HEAD_LINES, Text, blanks_as_tabs, in_memory, text_size, utf8_text
from screener.tables.formats import Recognised
from screener.tables.head import SEPARATORS, head_rows
from screener.tables.layout import Layout, layout_of
from screener.tables.left_out import Frame, Told, only_readings
from screener.tables.names import visible
from screener.tables.raw import RawTable
from screener.tables.shapes import names_a_channel
from screener.tables.spool import Spool, roomy
from screener.tables.spreadsheet import sheet_as_text

_FEWEST_BATCH_ROWS = 256
_BATCH_CELLS = 4_000_000
_PARSE_ERRORS = (pl.exceptions.ComputeError, pl.exceptions.SchemaError)
_TAB_SUFFIXES = frozenset({".tsv", ".tab"})
_REFUSED_COLUMN = re.compile(r"at column 'c(\d+)'")
_TRIES = 3
"""Parses of a text whose words show one column at a time, before every column is read as text."""


@dataclass(frozen=True, slots=True)
class _Parsed:
    frame: pl.LazyFrame
    rows: int
    told: Told
    whole: pl.DataFrame | None = None


def read_text(path: Path, recognised: Recognised, plan: Plan | None = None, *, held_bytes: int = 1 << 31) -> RawTable:
    """The table, Float64 columns and String columns where a cell is no plain number.

    It stands in memory unless its text takes more than `held_bytes`: then in a temporary columnar file.

    Raises:
        TableError: there is no row of readings, or the header does not name every column.
    """
    plan = plan or Plan()
    spool = Spool() if text_size(path, recognised.packing) > held_bytes else None
    text = utf8_text(path, recognised.packing, given=plan.encoding, keep=spool.keep if spool else in_memory)
    return _read(path, recognised, plan, text, spool)


def read_sheet(path: Path, recognised: Recognised, plan: Plan) -> RawTable:
    """A sheet of a spreadsheet, read as the text table that it would be when saved as one."""
    content, name, remarks = sheet_as_text(path, plan.part)
    lines = content.decode().split("\n", HEAD_LINES)[:HEAD_LINES]
    text = Text(content, lines, (f"sheet {visible(name)}",), remarks)
    raw = _read(path, recognised, replace(plan, separator="\t", decimal=plan.decimal or "."), text, None)
    return replace(raw, format=recognised.label, dialect=raw.dialect.removeprefix("tab, "))


def _read(path: Path, recognised: Recognised, plan: Plan, text: Text, spool: Spool | None) -> RawTable:
    if not any(not is_blank(line) for line in text.head):
        raise TableError(f"Couldn't read {str(path)!r}: it begins with nothing but blank lines.")
    prefer_tab = bool(_TAB_SUFFIXES & {suffix.lower() for suffix in path.suffixes})
    layout = layout_of(text.head, _as_shaped(text, plan, prefer_tab=prefer_tab), prefer_tab=prefer_tab)
    if layout.extra_cells:
        raise TableError(
            f"Couldn't read {str(path)!r}: its header names {len(layout.names):,} columns, "
            "but the rows have more cells. Give every column a name."
        )
    source, parsed_layout = _parseable(text, layout, spool)
    parsed = _parse(source, parsed_layout, spool)
    if not parsed.rows:
        raise TableError(f"Couldn't read {str(path)!r}: it has a header but no readings.")
    return RawTable(
        frame=parsed.frame,
        names=layout.names,
        format=_label(recognised, layout),
        rows=parsed.rows,
        held=spool is None,
        loaded=spool is None,
        remarks=(*text.remarks, *_layout_remarks(layout), *parsed.told.remarks),
        decimal_comma=layout.decimal_comma,
        units=layout.header.units,
        dialect=", ".join((*layout.words_of(), *text.words, *parsed.told.words)),
        whole=parsed.whole,
        spool=spool,
    )


def _as_shaped(text: Text, plan: Plan, *, prefer_tab: bool) -> Plan:
    """The plan, which says there are no names where channels are rows and the first line is one of them."""
    if plan.shape != "rows" or plan.header_line >= 0:
        return plan
    first = next(head_rows(text.head, layout_of(text.head, plan, prefer_tab=prefer_tab).separator)).cells
    numbers = [is_number(cell.strip()) for cell in first[1:] if cell.strip()]
    return replace(plan, header_line=0) if numbers and all(numbers) and not names_a_channel(first[0]) else plan


def _parseable(text: Text, layout: Layout, spool: Spool | None) -> tuple[Path | bytes, Layout]:
    """The text and its layout as polars takes them: one sign between two cells."""
    if layout.separator != " ":
        return text.source, layout
    return blanks_as_tabs(text, spool.keep if spool else in_memory), replace(layout, separator="\t")


def _parse(source: Path | bytes, layout: Layout, spool: Spool | None) -> _Parsed:
    columns = [f"c{at}" for at in range(len(layout.names))]
    if spool:
        return _spooled(source, layout, columns, spool)
    frame, long_rows = _frame(source, layout, columns, pl.LazyFrame.collect)
    irregular = long_rows or layout.drop_comments or frame.to_series(-1).null_count() > 0
    frame, rows, told = only_readings(frame, len(frame), source, layout, irregular=irregular)
    return _Parsed(frame.lazy(), rows, told, frame)


def _spooled(source: Path | bytes, layout: Layout, columns: Sequence[str], spool: Spool) -> _Parsed:
    """The cells in a temporary columnar file, written in pieces of bounded size."""
    tries = count(1)

    def write(frame: pl.LazyFrame) -> pl.LazyFrame:
        # A file of its own for each try: polars may still be writing to that of one that failed.
        kept = spool.folder / f"cells{next(tries)}.arrow"
        for failed in spool.folder.glob("cells*.arrow"):
            failed.unlink()
        batch = max(_FEWEST_BATCH_ROWS, _BATCH_CELLS // len(columns))
        with roomy(spool.folder):
            frame.sink_ipc(kept, record_batch_size=batch, compression="uncompressed")
        return pl.scan_ipc(kept, glob=False)

    frame, long_rows = _frame(source, layout, columns, write)
    rows, absent = frame.select(pl.len(), pl.col(columns[-1]).null_count().alias("absent")).collect().row(0)
    irregular = long_rows or layout.drop_comments or absent > 0
    frame, rows, told = only_readings(frame, rows, source, layout, irregular=irregular)
    return _Parsed(frame, rows, told)


def _frame(
    source: Path | bytes, layout: Layout, columns: Sequence[str], gather: Callable[[pl.LazyFrame], Frame]
) -> tuple[Frame, bool]:
    """The cells as `gather` gathers them, and whether a row has more of them than the header."""
    words = set(range(len(columns)) if _ends_in_quote(source) else layout.words)
    for _ in range(_TRIES):
        try:
            return gather(_scan(source, layout, columns, words)), False
        except _PARSE_ERRORS as error:
            refused = _REFUSED_COLUMN.search(str(error))
            if not refused or int(refused[1]) in words:
                break
            words.add(int(refused[1]))
    return _all_as_text(source, layout, columns, gather)


def _ends_in_quote(source: Path | bytes) -> bool:
    """Whether the last cell may be a lone quotation mark, on which polars' parser of numbers panics."""
    if isinstance(source, bytes):
        return source[-2:].rstrip(b"\r").endswith(b'"')
    with source.open("rb") as file:
        file.seek(-min(2, source.stat().st_size), SEEK_END)
        return file.read().rstrip(b"\r").endswith(b'"')


def _all_as_text(
    source: Path | bytes, layout: Layout, columns: Sequence[str], gather: Callable[[pl.LazyFrame], Frame]
) -> tuple[Frame, bool]:
    """Every cell as text, and whether a row has more cells than the header."""
    every = range(len(columns))
    try:
        return gather(_scan(source, layout, columns, every)), False
    except _PARSE_ERRORS:
        return gather(_scan(source, layout, columns, every, ragged=True)), True


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


def _layout_remarks(layout: Layout) -> Iterator[str]:
    if not any(layout.names):
        what = "reads like those below" if layout.words else "holds only numbers"
        yield f"The first line {what}: it was read as readings, and the columns are called by their place."
    if layout.doubt:
        sign, name = (",", "comma") if "," in layout.doubt else (".", "point")
        decimal = "," if layout.decimal_comma else "."
        read = "before decimals" if sign == decimal else "between thousands"
        other = "." if decimal == "," else ","
        yield (
            f"The {name} in cells such as {layout.doubt!r} was read as standing {read}; "
            f"--decimal={other} reads it the other way."
        )


def _label(recognised: Recognised, layout: Layout) -> str:
    words = ["TSV" if layout.separator == "\t" else str(recognised.kind)]
    details = [SEPARATORS[layout.separator]] if layout.separator == ";" else []
    details += ["decimal comma"] if layout.decimal_comma else []
    details += [str(recognised.packing)] if recognised.packing else []
    return f"{words[0]} ({', '.join(details)})" if details else words[0]
