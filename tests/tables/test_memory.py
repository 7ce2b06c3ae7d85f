"""Anonymous memory that opening a table takes, in a process of its own."""

import subprocess
import sys
from pathlib import Path

import numpy as np
import polars as pl
import pytest

LIMIT_FACTOR, LIMIT_BESIDE = 1.5, 300 << 20
OPEN_AND_WATCH = """
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
                peak = max(peak, int(line.split()[1]) * 1024)
        time.sleep(0.002)

threading.Thread(target=watch, daemon=True).start()
table = open_table(Path(sys.argv[1]), Plan())
for span in spans(table.facts):
    table.read(span)
print(peak)
"""


def peak_of(path: Path) -> int:
    """Bytes at the peak."""
    said = subprocess.run([sys.executable, "-c", OPEN_AND_WATCH, str(path)], capture_output=True, text=True, check=True)
    return int(said.stdout)


@pytest.mark.parametrize("missing", [0.0, 0.02])
def test_a_text_table_takes_half_as_much_again_as_its_readings_and_300_mb(tmp_path: Path, missing: float) -> None:
    rng = np.random.default_rng(1)
    readings = rng.normal(20.0, 1.0, (10_000, 1_000)).round(5)
    readings[rng.random(readings.shape) < missing] = np.nan
    pl.DataFrame(readings).fill_nan(None).write_csv(tmp_path / "t.csv")
    assert peak_of(tmp_path / "t.csv") <= LIMIT_FACTOR * readings.nbytes + LIMIT_BESIDE
