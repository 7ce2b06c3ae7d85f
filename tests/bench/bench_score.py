"""The whole `score`, its memory, and the first row on the screen, of one table as CSV and as Parquet.

    python tests/bench/bench_score.py [--channels 1000] [--rows 10000] [--repeats 7]

Times of `score` are of the command in this process, from path to printed summary, over polars reading the same file,
measured in turn; beside them those of the whole program, its start included. Memory is what the program holds beyond
mapped files (RssAnon, sampled), over the size of the readings as float64. Rows are timed in a pseudo-terminal, from
start to the first line of the table.
"""

import argparse
import contextlib
import io
import os
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np
import polars as pl

sys.path.insert(0, str(Path(__file__).parent.parent / "support"))

from pseudo_terminal import PseudoTerminal

from screener.cli.group import group

PROGRAM = [sys.executable, "-m", "screener"]
ENVIRONMENT = {**os.environ, "TERM": "xterm-256color", "LANG": "C.UTF-8", "LC_ALL": "C.UTF-8"}
SAMPLE_SECONDS = 0.002


def main() -> None:
    """Print one line per figure."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--channels", type=int, default=1_000)
    parser.add_argument("--rows", type=int, default=10_000)
    parser.add_argument("--repeats", type=int, default=7)
    given = parser.parse_args()
    with tempfile.TemporaryDirectory() as name:
        files = write_tables(Path(name), given.channels, given.rows)
        print(f"{given.channels:,} channels x {given.rows:,} rows, medians of {given.repeats}, {os.cpu_count()} cores")
        readers: dict[str, Callable[[Path], object]] = {".csv": pl.read_csv, ".parquet": pl.read_parquet}
        for path in files:
            bench_time(path, readers[path.suffix], given.repeats)
        for path in files:
            bench_memory(path, 8 * given.channels * given.rows)
        for path in files:
            bench_first_row(path, given.repeats)


def write_tables(folder: Path, channels: int, rows: int) -> list[Path]:
    """Normal readings with 2 % missing, as both kinds of file."""
    rng = np.random.default_rng(1)
    readings = rng.normal(20.0, 1.0, (rows, channels)).round(5)
    readings[rng.random(readings.shape) < 0.02] = np.nan
    frame = pl.DataFrame(readings, schema=[f"channel_{k}" for k in range(channels)]).fill_nan(None)
    files = [folder / "table.csv", folder / "table.parquet"]
    frame.write_csv(files[0])
    frame.write_parquet(files[1])
    return files


def seconds(work: Callable[[], object]) -> float:
    """Wall time of one call."""
    began = time.perf_counter()
    work()
    return time.perf_counter() - began


def score_here(path: Path) -> None:
    """`screener score` in this process."""
    fresh(path)
    with contextlib.redirect_stdout(io.StringIO()), contextlib.redirect_stderr(io.StringIO()):
        assert not group.main(["score", str(path)], prog_name="screener", standalone_mode=False)


def score_there(path: Path) -> None:
    """`screener score` as a program of its own."""
    fresh(path)
    subprocess.run([*PROGRAM, "score", path], check=True, capture_output=True)


def fresh(path: Path) -> None:
    """Nothing is scored yet."""
    for left in path.parent.glob("*.run*"):
        left.unlink()


def bench_time(path: Path, read: Callable[[Path], object], repeats: int) -> None:
    """Print the command and the program over polars."""
    score_here(path)
    rounds = [
        (seconds(lambda: read(path)), seconds(lambda: score_here(path)), seconds(lambda: score_there(path)))
        for _ in range(repeats)
    ]
    reading, command, program = (statistics.median(column) for column in zip(*rounds, strict=True))
    kind = path.suffix[1:]
    print(
        f"score / polars.read_{kind}: {command / reading:.2f} in process, {program / reading:.2f} as a program", end=""
    )
    print(f"   ({reading:.3f} s, {command:.3f} s, {program:.3f} s)")


def bench_memory(path: Path, table_bytes: int) -> None:
    """Print the peak over the table's size, with and without what the program holds for the smallest table."""
    tiny = path.with_name(f"tiny{path.suffix}")
    frame = pl.DataFrame({"a": [1.0, 2.0, 4.5, 7.0]})
    frame.write_csv(tiny) if path.suffix == ".csv" else frame.write_parquet(tiny)
    least, peak = peak_bytes(tiny), peak_bytes(path)
    print(f"peak memory / table, {path.suffix[1:]}: {peak / table_bytes:.2f}", end="")
    print(
        f"   ({peak / 1e6:.0f} MB; {least / 1e6:.0f} MB for a table of four readings; table {table_bytes / 1e6:.0f} MB)"
    )


def peak_bytes(path: Path) -> int:
    """The largest RssAnon seen while the program scores the table."""
    fresh(path)
    peak = 0
    with subprocess.Popen([*PROGRAM, "score", path], stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL) as program:
        status = Path(f"/proc/{program.pid}/status")
        while program.poll() is None:
            for line in status.read_text().splitlines():
                if line.startswith("RssAnon:"):
                    peak = max(peak, int(line.split()[1]) * 1024)
            time.sleep(SAMPLE_SECONDS)
    assert program.returncode == 0
    return peak


def bench_first_row(path: Path, repeats: int) -> None:
    """Print the time from starting the program to the first row, and to the last channel scored."""
    frames, rows, whole = zip(*(one_start(path) for _ in range(repeats)), strict=True)
    told = ", ".join(
        f"{name} {statistics.median(times):.2f} s (at most {max(times):.2f})"
        for name, times in (("frame", frames), ("row", rows), ("all scored", whole))
    )
    print(f"first on the screen, {path.suffix[1:]}: {told}")


def one_start(path: Path) -> tuple[float, float, float]:
    """Seconds to the first frame, to the first row, and until all is scored."""
    fresh(path)
    began = time.perf_counter()
    with PseudoTerminal(
        [*PROGRAM, path.name], columns=80, rows=24, environment=ENVIRONMENT, folder=path.parent
    ) as screen:
        screen.wait_for("Reading")
        frame = time.perf_counter() - began
        screen.wait_for("channel_0")
        row = time.perf_counter() - began
        screen.wait_for("Scored in")
        whole = time.perf_counter() - began
        screen.send("q")
        screen.exit_code()
    return frame, row, whole


if __name__ == "__main__":
    main()
