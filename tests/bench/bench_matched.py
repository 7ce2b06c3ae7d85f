"""Flagged share of truly normal channels in every condition: held to between 3 and 6 % at alpha = 5 %.

    python tests/bench/bench_matched.py [--channels 2000] [--alpha 0.05] [--sizes 50,200,1000,10000]

Tables of normal channels (rounded, following themselves in time, clipped at the top) are written as Parquet, screened
as a run is, and verdicts are read from the run file. A channel that is not scored is counted apart; shares are of the
scored. `!` marks shares outside .6 to 1.2 alpha (.5 to 1.4 alpha below alpha = 2 %).
"""

import argparse
import tempfile
from collections.abc import Callable
from pathlib import Path

import numpy as np
import polars as pl
from numpy.typing import NDArray
from scipy.signal import lfilter
from scipy.special import ndtri

from screener.records import Plan
from screener.runs import RunFile
from screener.screening.start import start
from screener.stats.null.matched import autoregressive

STEPS = (0.0, 0.1, 0.25, 0.5, 1.0)
COEFFICIENTS = (0.0, 0.3, 0.6, 0.9)
CLIPPED = (0.0, 0.05, 0.2)
TABLE_READINGS = 10_000_000

Readings = NDArray[np.float64]
Series = Callable[[np.random.Generator, int, int], Readings]


def second_order(first: float, second: float) -> Series:
    """AR(2) normal series of unit variance."""

    def series(rng: np.random.Generator, channels: int, n: int) -> Readings:
        noise = rng.standard_normal((channels, n + 2000))
        found = lfilter([1.0], [1.0, -first, -second], noise, axis=1)[:, 2000:]
        variance = (1.0 - second) / ((1.0 + second) * ((1.0 - second) ** 2 - first**2))
        return np.asarray(found / np.sqrt(variance), dtype=np.float64)

    return series


def moving_average(rng: np.random.Generator, channels: int, n: int) -> Readings:
    """The mean of five neighbours."""
    noise = rng.standard_normal((channels, n + 4))
    return np.asarray(lfilter(np.full(5, 5.0**-0.5), [1.0], noise, axis=1)[:, 4:], dtype=np.float64)


def slow_sine(rng: np.random.Generator, channels: int, n: int) -> Readings:
    """Noise and a sine of a tenth of its variance, eight turns in the record: normal but for that."""
    phase = 2.0 * np.pi * rng.random((channels, 1))
    sine = np.sqrt(2.0 / 11.0) * np.sin(2.0 * np.pi * 8.0 * np.arange(n) / n + phase)
    return np.asarray(sine + np.sqrt(10.0 / 11.0) * rng.standard_normal((channels, n)), dtype=np.float64)


OTHER_SERIES: dict[str, Series] = {
    "AR(2) 1.2, -0.5": second_order(1.2, -0.5),
    "AR(2) 1.5, -0.8 (a peak)": second_order(1.5, -0.8),
    "AR(2) 0, 0.8": second_order(0.0, 0.8),
    "MA of 5": moving_average,
    "slow sine and noise": slow_sine,
}


def recorded(rng: np.random.Generator, series: Readings, step: float, clipped: float) -> Readings:
    """Series as an instrument records them: clipped at the top, then rounded to a lattice of random phase."""
    readings = np.minimum(series, ndtri(1.0 - clipped)) if clipped else series
    if step:
        readings = step * np.round(readings / step + rng.random((series.shape[0], 1)))
    return np.asarray(40.0 + readings, dtype=np.float64)


def cell(make: Series, n: int, step: float, clipped: float, given: argparse.Namespace) -> tuple[str, bool]:
    """The flagged and the unscored share of channels of one kind, in words; whether the flagged one is off."""
    rng = np.random.default_rng([n, int(100 * step), int(100 * clipped)])
    block = max(1, TABLE_READINGS // n)
    counts = {"flagged": 0, "clear": 0, "not scored": 0}
    for first in range(0, given.channels, block):
        readings = recorded(rng, make(rng, min(block, given.channels - first), n), step, clipped)
        for verdict, count in verdicts(readings, given.alpha).items():
            counts[verdict] += count
    scored = counts["flagged"] + counts["clear"]
    share = counts["flagged"] / max(scored, 1)
    low, high = limits(given.alpha)
    off = scored > 0 and not low <= share <= high
    return f"{100 * share:.1f}{'!' if off else ' '}({100 * counts['not scored'] / given.channels:.0f})", off


def limits(alpha: float) -> tuple[float, float]:
    """Between which the flagged share is held."""
    return (0.5 * alpha, 1.4 * alpha) if alpha < 0.02 else (0.6 * alpha, 1.2 * alpha)


def verdicts(readings: Readings, alpha: float) -> dict[str, int]:
    """Verdicts on channels, float64[C, rows], from a table's file to the run file."""
    with tempfile.TemporaryDirectory() as name:
        table, run_path = Path(name) / "normal.parquet", Path(name) / "normal.run"
        pl.DataFrame(readings.T, schema=[f"c{k}" for k in range(len(readings))]).write_parquet(table)
        for _ in start(table, Plan(alpha=alpha, channels=("c*",)), run_path, jobs=2):
            pass
        with RunFile.open(run_path, read_only=True) as run:
            found = run.results()["verdict"].value_counts()
    counts = {str(verdict): int(count) for verdict, count in found.iter_rows()}
    # A short channel that stayed above the rail is constant, and set aside.
    counts["not scored"] = counts.get("not scored", 0) + len(readings) - sum(counts.values())
    return counts


def main() -> None:
    """Print the tables and how many cells miss."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--channels", type=int, default=2000, help="Channels a cell.")
    parser.add_argument("--alpha", type=float, default=0.05)
    parser.add_argument("--sizes", default="50,200,1000,10000", help="Readings a channel, separated by commas.")
    given = parser.parse_args()
    missed = cells = 0
    print(
        f"flagged of the scored (not scored), in percent, at alpha {given.alpha:g}; {given.channels:,} channels a cell"
    )
    for n in (int(size) for size in given.sizes.split(",")):
        for clipped in CLIPPED:
            print(f"n = {n:,}, clipped {clipped:.0%}" + "".join(f"{f'AR {one:g}':>14}" for one in COEFFICIENTS))
            for step in STEPS:
                row = [cell(first_order(one), n, step, clipped, given) for one in COEFFICIENTS]
                missed, cells = missed + sum(off for _, off in row), cells + len(row)
                print(f"{f'step {step:g} sd':>22}" + "".join(f"{text:>14}" for text, _ in row), flush=True)
        for name, make in OTHER_SERIES.items():
            row = [cell(make, n, step, 0.0, given) for step in (0.0, 0.25)]
            print(f"n = {n:,}, {name}: unrounded {row[0][0]}, step 0.25 sd {row[1][0]}", flush=True)
    low, high = limits(given.alpha)
    print(f"{missed} of {cells} cells outside {100 * low:g} to {100 * high:g} %")


def first_order(coefficient: float) -> Series:
    """AR(1) normal series."""
    return lambda rng, channels, n: autoregressive(rng, channels, n, coefficient)


if __name__ == "__main__":
    main()
