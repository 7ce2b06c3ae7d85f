"""Cost of opening and reading tables, as a multiple of what polars takes for the same columns.

Usage: python tests/bench/bench_tables.py [ROWS CHANNELS]

Without a shape: 10,000 x 1,000, 1,000 x 20,000 and 1,000,000 x 100. Memory: see bench_memory.py.
"""

import statistics
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np
import polars as pl

from screener.records import Plan
from screener.tables import open_table, spans
from screener.tables.table import Table

REPEATS = 9
SHAPES = ((10_000, 1_000), (1_000, 20_000), (1_000_000, 100))


def seconds(work: Callable[[], object]) -> float:
    """Wall time of one call."""
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def compare(label: str, ours: Callable[[], object], theirs: Callable[[], object]) -> None:
    """Print the ratio of medians, the two measured in turn so that both meet the same machine."""
    pairs = [(seconds(ours), seconds(theirs)) for _ in range(REPEATS)]
    our, their = (statistics.median(side) for side in zip(*pairs, strict=True))
    print(f"{label:32} {our:8.3f} s {their:8.3f} s   ratio {our / their:5.2f}")


def read_all(table: Table) -> None:
    """Every block once."""
    for span in spans(table.facts):
        table.read(span)


def read_columns(path: Path, width: int, names: list[str]) -> None:
    """The same columns by polars alone, as many at a time as a block has."""
    for first in range(0, len(names), width):
        pl.read_parquet(path, columns=names[first : first + width], glob=False)


def bench_csv(folder: Path, frame: pl.DataFrame) -> None:
    """Text tables: clean, with a text column, and with one word late in the file."""
    stamps = [
        f"2024-01-{1 + row // 86400:02} {row // 3600 % 24:02}:{row // 60 % 60:02}:{row % 60:02}"
        for row in range(len(frame))
    ]
    words = [str(value) for value in frame["ch0"]]
    words[-5] = "OVER"
    tables = {
        "clean": frame,
        "with dates": frame.with_columns(pl.Series("stamp", stamps)),
        "with a word late": frame.with_columns(pl.Series("ch0", words)),
    }
    for label, table in tables.items():
        bench_one_csv(label, folder / "table.csv", table)


def bench_one_csv(label: str, path: Path, table: pl.DataFrame) -> None:
    """One text table, opened by screener and parsed by polars with the schema known."""
    table.write_csv(path)
    schema = dict(table.schema)
    compare(f"CSV, {label}: open", lambda: open_table(path, Plan()), lambda: pl.read_csv(path, schema=schema))


def bench_parquet(folder: Path, frame: pl.DataFrame) -> None:
    """Parquet: opened and read whole, and by blocks from an opened table."""
    path = folder / "table.parquet"
    frame.write_parquet(path)
    names = frame.columns
    compare(
        "Parquet: open and read all blocks", lambda: read_all(open_table(path, Plan())), lambda: pl.read_parquet(path)
    )
    held = open_table(path, Plan())
    scanned = open_table(path, Plan(), held_bytes=0)
    width = spans(held.facts)[0].stop
    compare("Parquet, held: all blocks", lambda: read_all(held), lambda: read_columns(path, width, names))
    compare(
        "Parquet, left in its file: all blocks", lambda: read_all(scanned), lambda: read_columns(path, width, names)
    )


def bench_shape(rows: int, channels: int) -> None:
    """One shape in every format."""
    readings = np.random.default_rng(1).normal(size=(rows, channels)).round(6)
    frame = pl.DataFrame(readings, schema=[f"ch{number}" for number in range(channels)])
    print(f"{rows:,} rows x {channels:,} channels, medians of {REPEATS}: screener, polars, ratio", flush=True)
    with tempfile.TemporaryDirectory() as name:
        bench_csv(Path(name), frame)
        bench_parquet(Path(name), frame)


def main() -> None:
    """Measure the shape given, or those of the issue."""
    shapes = [(int(sys.argv[1]), int(sys.argv[2]))] if len(sys.argv) > 2 else SHAPES
    for rows, channels in shapes:
        bench_shape(rows, channels)


if __name__ == "__main__":
    main()
