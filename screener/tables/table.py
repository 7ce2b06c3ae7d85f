"""Opening a measurement table and reading its channels block by block."""

from collections.abc import Mapping, Sequence
from contextlib import nullcontext
from dataclasses import dataclass, field, replace
from pathlib import Path

import numpy as np
import polars as pl
from numpy.typing import NDArray

from screener.errors import PlanError, TableError
from screener.records import Block, Channel, Plan, SetAside, Span, TableFacts
from screener.tables.blocks import machine_memory
from screener.tables.chosen import NOT_ASKED, Choice, choose
from screener.tables.columns import reading
from screener.tables.failures import named, readable
from screener.tables.fingerprint import joined
from screener.tables.joining import join
from screener.tables.limits import Limit, known_beyond
from screener.tables.loading import FileState, Loaded, load_address, load_file
from screener.tables.names import Label, labels, shortlist
from screener.tables.raw import RawTable
from screener.tables.sifting import Sifted, sift
from screener.tables.sources import Source, source_named
from screener.tables.spool import Spool, sweep

HELD_BYTES = 2 << 30
"""A table whose readings take more than this is left in its columnar file."""
_READING_BYTES = 8


@dataclass(frozen=True, slots=True)
class Table:
    """The channels of a measurement table, ready to be read in any order and from any thread."""

    facts: TableFacts
    _columns: tuple[str, ...]
    _held: pl.DataFrame | None
    _scan: pl.LazyFrame
    _states: tuple[FileState, ...] = ()
    """The files that are read block by block, as they were when the table was opened."""
    _kept: tuple[Spool | None, ...] = ()
    """Temporary files that go with the table."""
    _below: Mapping[str, Limit] = field(default_factory=dict)
    _above: Mapping[str, Limit] = field(default_factory=dict)

    def read(self, span: Span) -> Block:
        """The readings of a span of channels.

        Raises:
            TableError: the file can no longer be read.
        """
        if not 0 <= span.first < span.stop <= len(self._columns):
            raise ValueError(f"{span} lies outside the {len(self._columns)} channels")
        with readable(self.facts.path, self.facts.format):
            for state in self._states:
                state.check()
            readings = _as_readings(self._part(span))
        columns = self._columns[span.first : span.stop]
        limits = (known_beyond(readings, columns, self._below, -1), known_beyond(readings, columns, self._above, 1))
        return Block(span, readings, *limits)

    def _part(self, span: Span) -> pl.DataFrame:
        if self._held is not None:
            return self._held[:, span.first : span.stop]
        return self._scan.select(reading(*self._columns[span.first : span.stop])).collect()


def open_table(path: Path, plan: Plan, *, held_bytes: int = HELD_BYTES, most_bytes: int | None = None) -> Table:
    """The table at `path`: which of its columns are channels, which are set aside and why.

    The path may also be a pattern for several files of one layout, `-` for standard input, or an address.
    Raises:
        TableError: there is no table that can be read, or no column is a channel.
        PlanError: the plan's name patterns leave no column, or it says what cannot be.

    One channel may take `most_bytes`, half of the machine's memory unless given.
    """
    sweep()
    source = source_named(path)
    if source.address:
        loaded = [load_address(source.address, plan, held_bytes)]
    else:
        loaded = [_loaded(file, source, plan, held_bytes // len(source.files)) for file in source.files]
    names = [file.name for file in source.files]
    raw, files = join([one.raw for one in loaded], names)
    if not raw.rows:
        raise TableError(f"Couldn't read {str(path)!r}: it has columns but no readings.")
    _check_size(path, raw.rows, most_bytes or machine_memory() // 2)
    with readable(path, raw.format):
        facts, sifted = _sifted(source.path, plan, raw)
        facts = replace(facts, fingerprint=joined([one.content for one in loaded]), files=files)
    states = () if raw.held else tuple(one.state for one in loaded if one.state)
    kept = (source.spool, *(one.raw.spool for one in loaded))
    return Table(facts, sifted.columns, sifted.whole, sifted.frame, states, kept, sifted.below, sifted.above)


def _loaded(file: Path, source: Source, plan: Plan, held_bytes: int) -> Loaded:
    with named(file, "standard input") if source.spool else nullcontext():
        return load_file(file, plan, held_bytes)


def _check_size(path: Path, rows: int, most_bytes: int) -> None:
    """Refuse a table of which not even one channel can be held, since a channel is sorted as a whole."""
    needed = rows * _READING_BYTES
    if needed > most_bytes:
        raise TableError(
            f"Couldn't read {str(path)!r}: one channel of {rows:,} readings takes {needed:,} bytes, more than this "
            f"machine can spare ({most_bytes:,}). Take fewer rows."
        )


def _sifted(path: Path, plan: Plan, raw: RawTable) -> tuple[TableFacts, Sifted]:
    shown, name_remarks = labels(raw.names, raw.units)
    choice = choose([label.name for label in shown], plan)
    schema = raw.frame.collect_schema()
    stored = schema.names()
    sifted = sift(raw, schema, dict(zip(stored, (label.name for label in shown), strict=True)), choice, plan.missing)
    by_column = dict(zip(stored, shown, strict=True))
    set_aside = tuple(SetAside(by_column[c].name, sifted.reasons[c]) for c in stored if c in sifted.reasons)
    if not sifted.columns:
        raise _nothing_to_screen(path, choice, set_aside)
    remarks = (*raw.remarks, *name_remarks, *choice.remarks, *sifted.remarks)
    channels = _channels(sifted, by_column)
    facts = TableFacts(path, raw.format, raw.rows, channels, set_aside, "", remarks, raw.dialect, sifted.proposals)
    return facts, sifted


def _channels(sifted: Sifted, shown: Mapping[str, Label]) -> tuple[Channel, ...]:
    return tuple(
        Channel(
            position,
            shown[column].name,
            shown[column].unit or sifted.units.get(column, ""),
            sifted.below[column].cells if column in sifted.below else 0,
            sifted.above[column].cells if column in sifted.above else 0,
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
