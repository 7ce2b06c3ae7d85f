"""Opening a measurement table and reading its channels block by block."""

import csv
import zlib
from collections.abc import Iterator, Mapping, Sequence
from concurrent.futures import ThreadPoolExecutor
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import polars as pl
from numpy.typing import NDArray

from screener.errors import PlanError, TableError
from screener.records import Block, Channel, Plan, SetAside, Span, TableFacts
from screener.tables.chosen import NOT_ASKED, Choice, choose
from screener.tables.columns import reading
from screener.tables.fingerprint import fingerprint
from screener.tables.formats import Kind, Recognised, recognise
from screener.tables.names import Label, labels, shortlist, visible
from screener.tables.raw import RawTable
from screener.tables.sifting import Sifted, sift
from screener.tables.stored import read_stored
from screener.tables.text import read_text

HELD_BYTES = 2 << 30
"""A table whose readings take more than this is left in its columnar file."""


@dataclass(frozen=True, slots=True)
class Table:
    """The channels of a measurement table, ready to be read in any order and from any thread."""

    facts: TableFacts
    _columns: tuple[str, ...]
    _held: pl.DataFrame | None
    _scan: pl.LazyFrame

    def read(self, span: Span) -> Block:
        """The readings of a span of channels.

        Raises:
            TableError: the file can no longer be read.
        """
        if not 0 <= span.first < span.stop <= len(self._columns):
            raise ValueError(f"{span} lies outside the {len(self._columns)} channels")
        with readable(self.facts.path, self.facts.format):
            return Block(span, _as_readings(self._part(span)))

    def _part(self, span: Span) -> pl.DataFrame:
        if self._held is not None:
            return self._held[:, span.first : span.stop]
        return self._scan.select(reading(*self._columns[span.first : span.stop])).collect()


def open_table(path: Path, plan: Plan, *, held_bytes: int = HELD_BYTES) -> Table:
    """The table at `path`: which of its columns are channels, which are set aside and why.

    Raises:
        TableError: the file is no table that can be read, or no column is a channel.
        PlanError: the plan's name patterns leave no column.
    """
    recognised = recognise(path)
    with readable(path, str(recognised.kind)), ThreadPoolExecutor(1) as aside:
        print_of_content = aside.submit(fingerprint, path)
        raw = _load(path, recognised, plan, held_bytes)
        if not raw.rows:
            raise TableError(f"Couldn't read {str(path)!r}: it has columns but no readings.")
        return _table(path, plan, raw, print_of_content.result())


@contextmanager
def readable(path: Path, what: str) -> Iterator[None]:
    """Turns what the reading libraries raise about a file into one sentence.

    Raises:
        TableError: something inside could not read the file.
    """
    try:
        yield
    except (EOFError, zlib.error) as error:
        raise TableError(f"Couldn't read {str(path)!r}: the file is damaged or cut off.") from error
    except (OSError, csv.Error, pl.exceptions.PolarsError, pl.exceptions.PanicException) as error:
        raise TableError(f"Couldn't read {str(path)!r} as {what}: {_said(error, what)}") from error


def _said(error: BaseException, what: str) -> str:
    if what.startswith(Kind.NDJSON) and not isinstance(error, OSError):
        return "every line must be one JSON object, and its values numbers, texts or null."
    first_line = visible((str(error).strip() or type(error).__name__).splitlines()[0])[:200].rstrip(".")
    if '`"' in first_line:
        return "a quotation mark is not closed. Mend the line or remove the mark."
    return f"{first_line}. The file may be damaged or cut off; write it again."


def _load(path: Path, recognised: Recognised, plan: Plan, held_bytes: int) -> RawTable:
    if recognised.kind is Kind.TEXT:
        return read_text(path, recognised, plan)
    return read_stored(path, recognised, held_bytes=held_bytes)


def _table(path: Path, plan: Plan, raw: RawTable, content: str) -> Table:
    shown, name_remarks = labels(raw.names, raw.units)
    choice = choose([label.name for label in shown], plan)
    stored = raw.frame.collect_schema().names()
    sifted = sift(raw, dict(zip(stored, (label.name for label in shown), strict=True)), choice, plan.missing)
    by_column = dict(zip(stored, shown, strict=True))
    set_aside = tuple(SetAside(by_column[c].name, sifted.reasons[c]) for c in stored if c in sifted.reasons)
    if not sifted.columns:
        raise _nothing_to_screen(path, choice, set_aside)
    remarks = (*raw.remarks, *name_remarks, *choice.remarks, *sifted.remarks)
    channels = _channels(sifted, by_column)
    facts = TableFacts(path, raw.format, raw.rows, channels, set_aside, content, remarks, raw.dialect, sifted.proposals)
    return Table(facts, sifted.columns, sifted.frame.collect() if raw.held else None, sifted.frame)


def _channels(sifted: Sifted, shown: Mapping[str, Label]) -> tuple[Channel, ...]:
    return tuple(
        Channel(
            position,
            shown[column].name,
            shown[column].unit or sifted.units.get(column, ""),
            sifted.below.get(column, 0),
            sifted.above.get(column, 0),
        )
        for position, column in enumerate(sifted.columns)
    )


def _nothing_to_screen(path: Path, choice: Choice, set_aside: Sequence[SetAside]) -> PlanError | TableError:
    if choice.reasons:
        columns = [f"{column.name} ({column.reason})" for column in set_aside if column.reason != NOT_ASKED]
        return PlanError(
            f"Couldn't screen the columns asked for of {str(path)!r}: none is a channel: {shortlist(columns, 5)}."
        )
    columns = [f"{column.name} ({column.reason})" for column in set_aside]
    return TableError(
        f"Couldn't find a channel in {str(path)!r}: no column holds readings that vary: {shortlist(columns, 5)}."
    )


def _as_readings(part: pl.DataFrame) -> NDArray[np.float64]:
    """float64[channels, rows], contiguous, null as NaN, sharing no memory with the table."""
    if any(dtype != pl.Float64 for dtype in part.dtypes):
        part = part.cast(pl.Float64)
    readings: NDArray[np.float64] = part.to_numpy(order="fortran", writable=True).T
    return np.ascontiguousarray(readings)
