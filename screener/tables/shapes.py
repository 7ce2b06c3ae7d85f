"""Tables whose channels are no columns: a channel a row, or a name beside every value."""

import re
from collections.abc import Iterator, Sequence
from dataclasses import replace

import polars as pl

from screener.errors import PlanError
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


def as_columns(raw: RawTable, shape: str) -> RawTable:
    """The same table with a column for every channel.

    Raises:
        PlanError: the shape is none that is known, or not that of this table.
    """
    if shape not in ("", *SHAPES):
        raise PlanError(f"Couldn't use shape {shape!r}: known are {', '.join(SHAPES)}.")
    if shape == "columns" or not raw.held:
        return raw
    if shape == "rows" or (not shape and _has_channels_in_rows(raw)):
        return _turned(raw, asked=bool(shape))
    if shape == "long" or (not shape and _is_long(raw)):
        return _widened(raw, asked=bool(shape))
    return raw


def names_a_channel(word: str) -> bool:
    """Whether a column of this name holds the names of channels."""
    return word.strip().lower() in _NAMING


def _has_channels_in_rows(raw: RawTable) -> bool:
    """Whether every row begins with a name of its own, and the columns have no names but numbers."""
    headless = not any(raw.names) or (names_a_channel(raw.names[0]) and _are_counted(raw.names[1:]))
    if not headless or len(raw.names) <= _FEWEST_READINGS:
        return False
    schema = raw.frame.collect_schema()
    types = schema.dtypes()
    if types[0] != pl.String or not all(dtype.is_numeric() for dtype in types[1:]):
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
    frame = raw.frame.collect().filter(pl.col(name).is_not_null())
    by_place = dict(zip(frame.columns, raw.names, strict=True))
    unit = next((column for column, word in by_place.items() if word.strip().lower() in _UNITS), "")
    keys = [column for column in frame.columns if column not in {name, value, unit}]
    aligned = bool(keys) and not frame.select(pl.struct(*keys, name).is_duplicated().any()).item()
    place = pl.struct(keys).rank("dense") if aligned else pl.int_range(pl.len()).over(name)
    channels = frame[name].unique(maintain_order=True)
    if len(channels) > _MOST_CHANNELS:
        raise PlanError(f"Couldn't read the table as long: column {by_place[name]!r} has {len(channels):,} names.")
    numbered = frame.select(name, value, place=place)
    if aligned:
        first_seen = pl.col("row").min().over("place")
        numbered = numbered.with_row_index("row").with_columns(place=first_seen).drop("row")
    wide = numbered.pivot(on=name, index="place", values=value, maintain_order=True).sort("place").drop("place")
    wide = wide.select(pl.col(list(channels))).rename({old: f"c{at}" for at, old in enumerate(channels)})
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


def _texts(column: pl.Series) -> Iterator[str]:
    for cell in column:
        yield str(cell if cell is not None else "").strip(BLANKS)


def _with(dialect: str, words: str) -> str:
    return f"{dialect}, {words}" if dialect else words
