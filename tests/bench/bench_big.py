"""Peak anonymous memory of `screener score`, the whole program, on tables larger than memory and of odd shapes.

Usage: python tests/bench/bench_big.py [SCALE]

Each table is made in a temporary folder and removed after; SCALE below 1 takes fewer rows of the large ones. The limit
is 1,024 MB. Free disk needed: about 14 GB under TMPDIR.
"""

import os
import shutil
import subprocess
import sys
import tempfile
import time
from pathlib import Path

from bench_memory import write

SHAPES = (
    (1_073_741, 500, ".parquet"),
    (1_073_741, 500, ".csv"),
    (5_000_000, 60, ".parquet"),
    (5_000_000, 60, ".csv"),
    (1_000, 20_000, ".parquet"),
    (1_000, 20_000, ".csv"),
)
LARGE_ROWS = 10_000
BYTES_FREE = 14 << 30
WAIT = 0.005


def anonymous_kilobytes(pid: int) -> int:
    """The anonymous memory of a process; 0 when it has ended."""
    try:
        lines = Path(f"/proc/{pid}/status").read_text().splitlines()
    except OSError:
        return 0
    return next((int(line.split()[1]) for line in lines if line.startswith("RssAnon")), 0)


def scored(path: Path, run_path: Path) -> tuple[int, float, str]:
    """Peak anonymous memory in MB, seconds, and the last line said, of a table scored in a process of its own."""
    command = [sys.executable, "-m", "screener", "score", str(path), "-o", str(run_path)]
    log = run_path.with_suffix(".log")
    start = time.monotonic()
    peak = 0
    with log.open("wb") as said, subprocess.Popen(command, stdout=said, stderr=said) as child:
        while child.poll() is None:
            peak = max(peak, anonymous_kilobytes(child.pid))
            time.sleep(WAIT)
    ending = log.read_text().splitlines()[-1]
    return peak >> 10, time.monotonic() - start, f"exit {child.returncode}, {ending}"


def main() -> None:
    """Print one line a table."""
    scale = float(sys.argv[1]) if len(sys.argv) > 1 else 1.0
    free = shutil.disk_usage(tempfile.gettempdir()).free
    if free < scale * BYTES_FREE:
        sys.exit(f"{tempfile.gettempdir()} has {free >> 30} GB free; {scale * BYTES_FREE / 2**30:.0f} are needed.")
    with tempfile.TemporaryDirectory() as name:
        os.environ["TMPDIR"] = name
        for full, columns, suffix in SHAPES:
            rows = max(1_000, int(full * scale)) if full > LARGE_ROWS else full
            path = Path(name) / f"table{suffix}"
            write(path, rows, columns)
            size = path.stat().st_size >> 20
            peak, seconds, ending = scored(path, Path(name) / "table.run")
            told = f"{rows:>9,} x {columns:>6,} {suffix:8} {size:>5,} MB on disk: peak {peak:,} MB, {seconds:.0f} s"
            print(f"{told}, {ending}", flush=True)
            path.unlink()
            (Path(name) / "table.run").unlink(missing_ok=True)


if __name__ == "__main__":
    main()
