"""Tables whose columns have types already: Parquet, Arrow IPC, newline-delimited JSON."""

import json
from collections.abc import Sequence
from pathlib import Path

import polars as pl

from screener.tables.encoding import HEAD_LINES, text_lines
from screener.tables.formats import Kind, Recognised, source_of
from screener.tables.raw import RawTable

_READING_BYTES = 8


def read_stored(path: Path, recognised: Recognised, *, held_bytes: int) -> RawTable:
    """The table, in memory when its readings take at most `held_bytes`, else left in its file and read by columns."""
    if recognised.kind is Kind.NDJSON:
        return _held(_json_lines(path), recognised)
    if recognised.kind is Kind.IPC_STREAM:
        with path.open("rb") as file:
            return _held(pl.read_ipc_stream(file), recognised)
    scan = pl.scan_parquet if recognised.kind is Kind.PARQUET else pl.scan_ipc
    return read_frame(scan(source_of(path), glob=False), recognised, held_bytes=held_bytes)


def read_frame(frame: pl.LazyFrame, recognised: Recognised, *, held_bytes: int) -> RawTable:
    """The table behind a scan, in memory when its readings take at most `held_bytes`."""
    names = frame.collect_schema().names()
    if any(name.startswith("^") for name in names):
        frame = frame.rename(_plain(names))
    rows = int(frame.select(pl.len()).collect().item())
    held = rows * len(names) * _READING_BYTES <= held_bytes
    return RawTable(frame, tuple(names), recognised.label, rows, held=held, loaded=False)


def _held(frame: pl.DataFrame, recognised: Recognised) -> RawTable:
    plain = frame.rename(_plain(frame.columns))
    return RawTable(plain.lazy(), tuple(frame.columns), recognised.label, len(frame), held=True, loaded=True)


def _json_lines(path: Path) -> pl.DataFrame:
    """The columns in the order of the first object's keys, those it lacks by name: polars gives them in any order."""
    with path.open("rb") as file:
        frame = pl.read_ndjson(file, infer_schema_length=None)
    first = next(line for line in text_lines(source_of(path), HEAD_LINES) if line.strip())
    leading = [name for name in json.loads(first) if name in frame.columns]
    return frame[[*leading, *sorted(set(frame.columns).difference(leading))]]


def _plain(names: Sequence[str]) -> dict[str, str]:
    """New names by position: polars takes a name such as `^a.*$` for a pattern of names."""
    return {name: f"c{at}" for at, name in enumerate(names)}
