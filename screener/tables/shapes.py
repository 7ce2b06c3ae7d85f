"""Tables whose channels are no columns: a channel a row, or a name beside every value."""

import re
from collections.abc import Iterator, Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np
import polars as pl
from numpy.typing import NDArray

from screener.errors import PlanError, TableError
from screener.tables.cells import BLANKS, is_number
from screener.tables.names import visible
from screener.tables.raw import RawTable

SHAPES = ("columns", "rows", "long")
_NAMING = frozenset({
    *("channel", "channels", "name", "signal", "parameter", "sensor", "tag", "variable"),
    *("measurement", "metric", "quantity"),
})  # fmt: skip
_VALUES = frozenset(("value", "values", "reading", "readings", "result", "measured", "measurement value"))
_UNITS = frozenset(("unit", "units", "uom", "eu"))
_FEWEST_READINGS = 3
_MOST_CHANNELS = 100_000
MOST_CELLS = 60_000_000
"""Cells of a table that is turned into columns, which takes some 45 bytes for each."""


def as_columns(raw: RawTable, shape: str, path: Path, *, most_cells: int = MOST_CELLS) -> RawTable:
    """The same table with a column for every channel.

    Raises:
        PlanError: the shape is none that is known, or not that of this table.
        TableError: it is not one of columns, and too large to be turned into one.
    """
    if shape not in ("", *SHAPES):
        raise PlanError(f"Couldn't use shape {shape!r}: known are {', '.join(SHAPES)}.")
    if shape == "columns":
        return raw
    if shape == "rows" or (not shape and _has_channels_in_rows(raw)):
        _check_size(raw, path, "it has a channel in each row", most_cells)
        return _turned(raw, asked=bool(shape))
    if shape == "long" or (not shape and _is_long(raw)):
        _check_size(raw, path, "it names a channel in each row", most_cells)
        return _widened(raw, asked=bool(shape))
    return raw


def _check_size(raw: RawTable, path: Path, what: str, most_cells: int) -> None:
    cells = raw.rows * len(raw.names)
    if cells > most_cells or not raw.held:
        raise TableError(
            f"Couldn't read {str(path)!r}: {what}, and such a table is turned into columns only up to {most_cells:,} "
            f"cells (it has {cells:,}) and 2 GB of text. Write a column for each channel, or split it by time into "
            "files that a pattern such as 'part_*.csv' joins; --shape=columns reads its columns as they are."
        )


def names_a_channel(word: str) -> bool:
    """Whether a column of this name holds the names of channels."""
    return word.strip().lower() in _NAMING


def _has_channels_in_rows(raw: RawTable) -> bool:
    """Whether every row begins with a name of its own, and the columns have no names but numbers."""
    told = bool(raw.names) and names_a_channel(raw.names[0])
    if told:
        unit = len(raw.names) > 1 and raw.names[1].strip().lower() in _UNITS
        told = _are_counted(raw.names[1 + unit :])
    if not (told or not any(raw.names)) or len(raw.names) <= _FEWEST_READINGS:
        return False
    schema = raw.frame.collect_schema()
    types = schema.dtypes()
    # Words among the readings make text of a column; where the header tells of channels in rows that is no matter.
    if types[0] != pl.String or not (told or all(dtype.is_numeric() for dtype in types[1:])):
        return False
    first = raw.frame.select(pl.col(schema.names()[0])).collect().to_series()
    words = not any(map(is_number, first.drop_nulls().head(_MOST_CHANNELS)))
    dated = first.str.contains(r"^\d{1,4}[-/.:]\d{1,2}[-/.:]\d{1,4}").any()
    return words and not dated and first.null_count() == 0 and first.n_unique() == len(first)


def _are_counted(names: Sequence[str]) -> bool:
    """Whether names are numbers from 0 or 1 up, with the same word before each."""
    numbers = [re.search(r"(\d+)$", name.strip()) for name in names]
    counted = [int(found[1]) for found in numbers if found]
    return len(counted) == len(names) and counted in (list(range(len(names))), list(range(1, len(names) + 1)))


def _turned(raw: RawTable, *, asked: bool) -> RawTable:
    """The table with its rows as columns; the leading text columns hold names and, if named so, units."""
    frame = raw.frame.collect()
    text = [column for column, dtype in frame.schema.items() if dtype == pl.String]
    name = text[0] if text else ""
    by_place = dict(zip(frame.columns, raw.names, strict=True))
    unit = next((column for column in text[1:] if by_place[column].strip().lower() in _UNITS), "")
    values = frame.drop([column for column in (name, unit) if column])
    if not all(dtype.is_numeric() for dtype in values.dtypes):
        values = values.cast(pl.String)
    turned = values.transpose(column_names=[f"c{at}" for at in range(len(frame))])
    said = "Each row begins with a name of its own: rows were read as channels; --shape=columns reads columns."
    return replace(
        raw,
        frame=turned.lazy(),
        whole=None,
        names=tuple(_texts(frame[name])) if name else ("",) * len(frame),
        rows=len(turned),
        units=tuple(_texts(frame[unit])) if unit else (),
        remarks=raw.remarks if asked else (*raw.remarks, said),
        dialect=_with(raw.dialect, "channels in rows"),
    )


def _long_columns(raw: RawTable) -> tuple[str, str] | None:
    """The columns of names and of values."""
    words = [name.strip().lower() for name in raw.names]
    name = next((at for at, word in enumerate(words) if word in _NAMING), None)
    value = next((at for at, word in enumerate(words) if word in _VALUES), None)
    if name is None or value is None or name == value:
        return None
    columns = raw.frame.collect_schema().names()
    return columns[name], columns[value]


def _is_long(raw: RawTable) -> bool:
    """Whether a text column of channel names, each many times, stands beside a column of values."""
    found = _long_columns(raw)
    if not found or raw.frame.collect_schema()[found[0]] != pl.String:
        return False
    channels = int(raw.frame.select(pl.col(found[0]).n_unique()).collect().item())
    return channels * _FEWEST_READINGS <= raw.rows


def _widened(raw: RawTable, *, asked: bool) -> RawTable:
    """The table with a column for every name, its values in the order of the rows or side by side by their key."""
    found = _long_columns(raw)
    if not found:
        raise PlanError(
            "Couldn't read the table as long: it needs a column called channel, name, signal or tag, "
            "and one called value, reading or result."
        )
    name, value = found
    frame = raw.frame.collect()
    if frame[name].null_count():
        frame = frame.filter(pl.col(name).is_not_null())
    by_place = dict(zip(frame.columns, raw.names, strict=True))
    unit = next((column for column, word in by_place.items() if word.strip().lower() in _UNITS), "")
    channels = frame[name].unique(maintain_order=True)
    if len(channels) > _MOST_CHANNELS:
        raise PlanError(f"Couldn't read the table as long: column {by_place[name]!r} has {len(channels):,} names.")
    of_channel = _first_seen(frame[name])
    keys = [column for column in frame.columns if column not in {name, value, unit}]
    place = _side_by_side(frame, keys, of_channel)
    aligned = place is not None
    wide = _placed(frame[value], of_channel, _in_turn(of_channel) if place is None else place)
    units = dict(frame.select(name, unit).unique(name, keep="first").rows()) if unit else {}
    left = [f"column {visible(by_place[key])!r}" for key in keys]
    said = f"Each row names its channel: {len(channels):,} channels were read from column {visible(by_place[value])!r}"
    aside = f", rows of one {' and '.join(left)} side by side" if aligned else ""
    remark = () if asked else (f"{said}{aside}; --shape=columns reads columns.",)
    return replace(
        raw,
        frame=wide.lazy(),
        whole=None,
        names=tuple(_texts(channels)),
        rows=len(wide),
        units=tuple(units.get(channel) or "" for channel in channels) if unit else (),
        remarks=(*raw.remarks, *remark),
        dialect=_with(raw.dialect, "a channel name in each row"),
    )


def _first_seen(column: pl.Series) -> NDArray[np.int64]:
    """[rows] the number of each cell's value, in the order in which they are first seen."""
    if column.dtype.is_nested() or column.dtype == pl.Boolean:
        column = column.to_frame().to_struct()
    code = column.rank("dense").fill_null(0).to_numpy().astype(np.int64)
    first = np.full(int(code.max(initial=-1)) + 1, len(code))
    first[code[::-1]] = np.arange(len(code))[::-1]
    number = np.empty_like(first)
    number[np.argsort(first)] = np.arange(len(first))
    seen: NDArray[np.int64] = number[code]
    return seen


def _side_by_side(frame: pl.DataFrame, keys: Sequence[str], of_channel: NDArray[np.int64]) -> NDArray[np.int64] | None:
    """[rows] the row of the wide table, one for each key; None without keys or where a channel has one twice."""
    if not keys:
        return None
    place = _first_seen(frame[keys[0]])
    for key in keys[1:]:
        more = _first_seen(frame[key])
        place = _first_seen(pl.Series(place * (int(more.max(initial=0)) + 1) + more))
    taken = np.sort(place * (int(of_channel.max(initial=0)) + 1) + of_channel)
    return place if (taken[1:] > taken[:-1]).all() else None


def _in_turn(of_channel: NDArray[np.int64]) -> NDArray[np.int64]:
    """[rows] how many readings the channel had before."""
    ordered = np.argsort(of_channel, kind="stable")
    starts = np.searchsorted(of_channel[ordered], of_channel[ordered], side="left")
    place = np.empty_like(ordered)
    place[ordered] = np.arange(len(ordered)) - starts
    return place


def _placed(values: pl.Series, of_channel: NDArray[np.int64], place: NDArray[np.int64]) -> pl.DataFrame:
    """The values as columns c0, c1, ..., null where there is none."""
    rows = int(place.max(initial=-1)) + 1
    columns = []
    ends = np.cumsum(np.bincount(of_channel))
    ordered = np.argsort(of_channel, kind="stable")
    for channel, at in enumerate(np.split(ordered, ends[:-1])):
        filled = np.full(rows, -1)
        filled[place[at]] = at
        columns.append(values.gather(pl.Series(filled).replace(-1, None)).alias(f"c{channel}"))
    return pl.DataFrame(columns)


def _texts(column: pl.Series) -> Iterator[str]:
    for cell in column:
        yield str(cell if cell is not None else "").strip(BLANKS)


def _with(dialect: str, words: str) -> str:
    return f"{dialect}, {words}" if dialect else words
