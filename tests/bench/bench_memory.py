"""Peak anonymous memory while a table larger than memory is opened and read block by block.

Usage: python tests/bench/bench_memory.py [MEGABYTES [HELD_MEGABYTES]]

4,096 MB of readings by default, as CSV and as Parquet, at 500 columns and at 60; 2,048 MB may be held in memory, as in
the program. With less of both the check is scaled down.
"""

import subprocess
import sys
import tempfile
from pathlib import Path

import numpy as np
import polars as pl

CHILD = """
import sys, threading, time
from pathlib import Path
from screener.records import Plan
from screener.tables import open_table, spans

peak = 0

def watch():
    global peak
    while True:
        for line in open("/proc/self/status"):
            if line.startswith("RssAnon"):
                peak = max(peak, int(line.split()[1]))
        time.sleep(0.005)

threading.Thread(target=watch, daemon=True).start()
time.sleep(0.05)
begin = peak
start = time.monotonic()
table = open_table(Path(sys.argv[1]), Plan(), held_bytes=int(sys.argv[2]) << 20)
opened = time.monotonic() - start
at_open = peak
for span in spans(table.facts):
    table.read(span)
print(f"{begin // 1024} {at_open // 1024} {peak // 1024} {opened:.1f} {time.monotonic() - start - opened:.1f}")
"""


def write(path: Path, rows: int, columns: int) -> None:
    """A table of normal readings with six decimals, written in pieces."""
    schema = {f"ch{at}": pl.Float64 for at in range(columns)}
    piece = max(1, 4_000_000 // columns)
    rng = np.random.default_rng(1)

    def pieces(count: int) -> pl.DataFrame:
        return pl.DataFrame(rng.normal(size=(count, columns)).round(6), schema=schema)

    if path.suffix == ".csv":
        with path.open("wb") as file:
            for first in range(0, rows, piece):
                pieces(min(piece, rows - first)).write_csv(file, include_header=not first)
        return
    folder = path.with_suffix(".parts")
    folder.mkdir(exist_ok=True)
    for at, first in enumerate(range(0, rows, piece)):
        pieces(min(piece, rows - first)).write_ipc(folder / f"{at:06}.arrow")
    pl.scan_ipc(folder / "*.arrow").sink_parquet(path, row_group_size=max(10_000, piece))
    for part in folder.iterdir():
        part.unlink()


def main() -> None:
    """Print one line a table."""
    megabytes, held = (int(word) for word in (*sys.argv[1:], *("4096", "2048")[len(sys.argv) - 1 :]))
    print(f"{megabytes:,} MB of readings, at most {held:,} MB held; anonymous memory in MB")
    with tempfile.TemporaryDirectory() as name:
        for columns in (500, 60):
            rows = (megabytes << 20) // 8 // columns
            for suffix in (".csv", ".parquet"):
                path = Path(name) / f"table{suffix}"
                write(path, rows, columns)
                child = [sys.executable, "-c", CHILD, str(path), str(held)]
                said = subprocess.run(child, capture_output=True, text=True, check=True).stdout
                begin, at_open, peak, opened, read = said.split()
                print(
                    f"{rows:>9,} x {columns:>3} {suffix:8} {path.stat().st_size >> 20:>6,} MB on disk: "
                    f"at start {begin}, open {at_open}, all blocks {peak}; {opened} s to open, {read} s to read",
                    flush=True,
                )
                path.unlink()


if __name__ == "__main__":
    main()
