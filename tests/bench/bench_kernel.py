"""Cost of scoring over np.sort of the same block, one thread against one thread, and its growth with n and channels.

python tests/bench/bench_kernel.py
"""

import time
import tracemalloc
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from functools import partial

import numpy as np
from numpy.typing import NDArray
from scipy import stats
from threadpoolctl import threadpool_limits

from screener.stats.correlation import fit_families
from screener.stats.families import FAMILIES
from screener.stats.null.packing import shipped_nulls
from screener.stats.ordering import sort_in_place
from screener.stats.scoring import score

Readings = NDArray[np.float64]


def best(work: Callable[[Readings], object], readings: Readings, repeats: int = 5) -> float:
    """Least time of several runs, each on its own copy."""
    times = []
    for _ in range(repeats):
        copy = readings.copy()
        started = time.perf_counter()
        work(copy)
        times.append(time.perf_counter() - started)
    return min(times)


def block(channels: int, rows: int, missing: float) -> Readings:
    """Normal readings away from zero, so that every family is fitted."""
    rng = np.random.default_rng(1)
    readings = 20.0 + rng.standard_normal((channels, rows))
    readings[rng.random(readings.shape) < missing] = np.nan
    return readings


def correlate(readings: Readings) -> object:
    """Sort and correlate with every family."""
    return fit_families(readings, sort_in_place(readings), FAMILIES, "filliben")


def score_all(readings: Readings) -> object:
    """Sort, correlate, critical values, p and plot points."""
    return score(readings, FAMILIES, shipped_nulls(), 0.05)


def sort_only(readings: Readings) -> None:
    """The floor."""
    readings.sort(axis=1)


def main() -> None:
    """Print the ratios."""
    print(f"{len(FAMILIES)} families, one thread; times over np.sort of the same block")
    for missing in (0.0, 0.02, 0.3):
        readings = block(1000, 10_000, missing)
        floor = best(sort_only, readings)
        correlated, scored = best(correlate, readings) / floor, best(score_all, readings) / floor
        print(f"1,000 x 10,000, {missing:4.0%} missing: correlate {correlated:.2f}, score {scored:.2f}")
    readings = block(100, 10_000, 0.0)
    loop = best(lambda r: [stats.probplot(channel) for channel in r], readings, 2)
    print(f"a loop of scipy.stats.probplot, normal only: {10 * loop / floor:.0f} (from 100 channels)")
    readings = block(2000, 10_000, 0.02)
    one, two = (best(partial(in_threads, jobs=jobs), readings, 3) for jobs in (1, 2))
    print(f"two threads on two cores: {one / two:.2f} times one (blocks of 50 channels)")
    tracemalloc.start()
    copy = block(1000, 10_000, 0.02)
    tracemalloc.reset_peak()
    before = tracemalloc.get_traced_memory()[0]
    score_all(copy)
    beyond = tracemalloc.get_traced_memory()[1] - before
    tracemalloc.stop()
    print(f"memory beyond the block: {beyond / copy.nbytes:.2f} of the block ({beyond / 1e6:.0f} MB)\n")
    growth("readings a channel", [(max(10, 3_000_000 // n), n) for n in (100, 1000, 10_000, 100_000, 1_000_000)], 1)
    growth("channels", [(channels, 1000) for channels in (10, 100, 1000, 10_000, 20_000)], 0)


def in_threads(readings: Readings, jobs: int) -> None:
    """Score blocks of 50 channels in that many threads."""
    with ThreadPoolExecutor(jobs) as pool:
        list(pool.map(score_all, [readings[first : first + 50] for first in range(0, len(readings), 50)]))


def growth(name: str, shapes: list[tuple[int, int]], axis: int) -> None:
    """Print the cost a reading over one dimension, and the exponent with which the whole cost grows."""
    costs = []
    for channels, rows in shapes:
        readings = block(channels, rows, 0.02)
        floor, cost = best(sort_only, readings, 3), best(score_all, readings, 3)
        costs.append(cost / channels if axis else cost)
        each = 1e9 * cost / readings.size
        print(f"{channels:>9,} channels x {rows:>9,}: {each:7.2f} ns a reading, {cost / floor:5.2f} x np.sort")
    exponent = np.polyfit(np.log([shape[axis] for shape in shapes[1:]]), np.log(costs[1:]), 1)[0]
    print(f"cost grows as {name} to the power {exponent:.2f} (fitted without the smallest)\n")


if __name__ == "__main__":
    with threadpool_limits(1):
        main()
