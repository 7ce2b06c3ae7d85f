"""Files that hold named arrays: which of them are a table, and its columns."""

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import polars as pl
from numpy.typing import NDArray

from screener.errors import PlanError, TableError
from screener.tables.names import shortlist, visible
from screener.tables.raw import RawTable
from screener.tables.spool import Spool, roomy

_PIECE_READINGS = 8_000_000
_READING_BYTES = 8


@dataclass(frozen=True, slots=True)
class Column:
    """One column that can be read piece by piece."""

    name: str
    rows: int
    read: Callable[[int, int], NDArray[Any]]
    """The cells from a row to before another."""
    unit: str = ""


@dataclass(frozen=True, slots=True)
class Found:
    """The columns of one part of a file."""

    part: str
    columns: tuple[Column, ...]

    @property
    def size(self) -> int:
        """How many cells it has."""
        return sum(column.rows for column in self.columns)


def columns_of(
    name: str, array: Any, names: Sequence[str] = (), unit: str = "", *, turned: bool = False
) -> list[Column]:
    """The columns of an array of one or two dimensions or of records; none of any other.

    `turned` says that its first dimension runs along the columns.
    """
    fields = getattr(array.dtype, "names", None)
    if fields:
        return [] if array.ndim != 1 else _record_columns(array, fields)
    if array.dtype.kind not in "biuf" or array.ndim not in (1, 2) or not array.size:
        return []
    if array.ndim == 1:
        return [Column(name, len(array), lambda start, stop: np.asarray(array[start:stop]), unit)]
    rows, width = array.shape[::-1] if turned else array.shape
    if 1 in (rows, width):
        return [Column(name, max(rows, width), _vector(array), unit)]
    labels = names if len(names) == width else [f"{name} {at}" for at in range(1, width + 1)]
    return [Column(label, rows, _slicer(array, at, turned=turned), unit) for at, label in enumerate(labels)]


def _vector(array: Any) -> Callable[[int, int], NDArray[Any]]:
    return lambda start, stop: np.asarray(array[()] if array.ndim else array).ravel()[start:stop]


def _slicer(array: Any, at: int, *, turned: bool) -> Callable[[int, int], NDArray[Any]]:
    if turned:
        return lambda start, stop: np.asarray(array[at, start:stop])
    return lambda start, stop: np.asarray(array[start:stop, at])


def _record_columns(array: Any, fields: Sequence[str]) -> list[Column]:
    columns = []
    for label in fields:
        inner = array.dtype[label]
        if inner.kind in "biuf" and not inner.shape:
            columns.append(Column(label, len(array), _field(array, label)))
        elif inner.subdtype and inner.subdtype[0].kind in "biuf" and len(inner.shape) == 1:
            columns += [
                Column(f"{label} {at + 1}", len(array), _field(array, label, at)) for at in range(inner.shape[0])
            ]
    return columns


def _field(array: Any, label: str, at: int | None = None) -> Callable[[int, int], NDArray[Any]]:
    def read(start: int, stop: int) -> NDArray[Any]:
        cells = np.asarray(array[start:stop][label])
        return cells if at is None else cells[:, at]

    return read


def chosen(path: Path, found: Sequence[Found], part: str, kind: str) -> tuple[Found, tuple[str, ...]]:
    """The part that the plan names, else the one with most cells, and a remark on the others.

    Raises:
        TableError: there is none.
        PlanError: there is none of that name.
    """
    if not found:
        raise TableError(f"Couldn't read {str(path)!r}: this {kind} holds no table of numbers.")
    names = [visible(one.part) or "/" for one in found]
    if part:
        wanted = [one for one in found if one.part.strip("/") == part.strip("/")]
        if not wanted:
            raise PlanError(f"Couldn't find part {part!r} in {str(path)!r}: it has {shortlist(names, 8)}.")
        return wanted[0], ()
    best = max(found, key=lambda one: one.size)
    others = [name for name, one in zip(names, found, strict=True) if one is not best]
    if not others:
        return best, ()
    said = (
        f"Part {visible(best.part) or '/'!r} was read; the file also has {shortlist(others, 5)} (--part reads another)."
    )
    return best, (said,)


def table_of(found: Found, label: str, held_bytes: int, remarks: tuple[str, ...]) -> RawTable:
    """The columns as a table, shorter ones filled with missing readings; in memory where it fits."""
    columns = found.columns
    rows = max(column.rows for column in columns)
    spool = Spool() if rows * len(columns) * _READING_BYTES > held_bytes else None
    height = rows if spool is None else max(1, _PIECE_READINGS // len(columns))
    pieces = (_piece(columns, start, min(start + height, rows)) for start in range(0, rows, height))
    short = sum(column.rows < rows for column in columns)
    uneven = (f"{short:,} columns have fewer readings than the longest: the rest of each is missing.",) if short else ()
    return RawTable(
        frame=_in_files(pieces, spool) if spool else next(pieces).lazy(),
        names=tuple(column.name for column in columns),
        format=label,
        rows=rows,
        held=spool is None,
        loaded=spool is None,
        remarks=(*remarks, *uneven),
        units=tuple(column.unit for column in columns),
        dialect=f"part {visible(found.part)}" if found.part.strip("/") else "",
        spool=spool,
    )


def _piece(columns: Sequence[Column], start: int, stop: int) -> pl.DataFrame:
    return pl.DataFrame([_cells(column, at, start, stop) for at, column in enumerate(columns)])


def _cells(column: Column, at: int, start: int, stop: int) -> pl.Series:
    last = min(stop, column.rows)
    read = column.read(start, last) if start < last else np.empty(0)
    native = read.astype(read.dtype.newbyteorder("=")) if read.dtype.kind in "iuf" else read
    cells = pl.Series(f"c{at}", np.ascontiguousarray(native))
    short = stop - start - len(cells)
    return cells.extend_constant(None, short) if short > 0 else cells


def _in_files(pieces: Iterator[pl.DataFrame], spool: Spool) -> pl.LazyFrame:
    with roomy(spool.folder):
        for number, piece in enumerate(pieces):
            piece.write_ipc(spool.folder / f"piece{number:06}.arrow", compression="uncompressed")
    return pl.scan_ipc(spool.folder / "piece*.arrow")


def grouped(arrays: Mapping[str, Sequence[Column]]) -> list[Found]:
    """The parts of a file: every array of several columns, and the single columns that lie in one folder."""
    found = [Found(name, tuple(columns)) for name, columns in arrays.items() if len(columns) > 1]
    folders: dict[str, list[Column]] = {}
    longest = max((column.rows for columns in arrays.values() for column in columns), default=0)
    for name, columns in arrays.items():
        if len(columns) == 1 and columns[0].rows > min(1, longest - 1):
            folders.setdefault(name.rpartition("/")[0], []).append(columns[0])
    return found + [Found(folder, tuple(columns)) for folder, columns in folders.items()]
