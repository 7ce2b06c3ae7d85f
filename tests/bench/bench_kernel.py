"""Cost of scoring over np.sort of the same block, one thread against one thread, and its growth with n and channels.

Times of one thread are processor time, so that other programs' turns do not count; two threads go by the clock and need
a quiet machine.

python tests/bench/bench_kernel.py
"""

import time
import tracemalloc
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import numpy as np
from numpy.typing import NDArray
from scipy import stats
from threadpoolctl import threadpool_limits

from screener.records import Channel, Span, TableFacts
from screener.stats.correlation import fit_families
from screener.stats.families import FAMILIES
from screener.stats.null.on_demand import SimulatedNulls
from screener.stats.null.packing import shipped_nulls
from screener.stats.ordering import sort_in_place
from screener.stats.scoring import score
from screener.tables import spans

Readings = NDArray[np.float64]

SIMULATED = SimulatedNulls()
"""What was simulated for one block serves the others, as in a run."""


def least(works: dict[str, Callable[[Readings], object]], readings: Readings, rounds: int = 7) -> dict[str, float]:
    """Least processor seconds of each work, done in turn on its own copy so that a busy moment hits all alike."""
    seconds = dict.fromkeys(works, np.inf)
    for _ in range(rounds):
        for name, work in works.items():
            copy = readings.copy()
            started = time.thread_time()
            work(copy)
            seconds[name] = min(seconds[name], time.thread_time() - started)
    return seconds


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
    return score(readings, FAMILIES, shipped_nulls(), 0.05, simulated=SIMULATED)


def score_in_blocks(readings: Readings) -> None:
    """The same, block after block."""
    for span in program_spans(*readings.shape):
        score_all(readings[span.first : span.stop])


def sort_only(readings: Readings) -> None:
    """The floor."""
    readings.sort(axis=1)


def main() -> None:
    """Print the ratios."""
    print(f"{len(FAMILIES)} families, one thread; times over np.sort of the same block")
    for missing in (0.0, 0.02, 0.3):
        readings = block(1000, 10_000, missing)
        took = least({"sort": sort_only, "correlate": correlate, "score": score_all}, readings)
        floor = took["sort"]
        correlated, scored = took["correlate"] / floor, took["score"] / floor
        print(f"1,000 x 10,000, {missing:4.0%} missing: correlate {correlated:.2f}, score {scored:.2f}")
    loop = least({"sort": sort_only, "loop": lambda r: [stats.probplot(channel) for channel in r]}, readings[:100], 2)
    print(f"a loop of scipy.stats.probplot, normal only: {loop['loop'] / loop['sort']:.0f} (100 channels)")
    readings = block(3000, 10_000, 0.02)
    for name, cut in (("of 50 channels", even_spans(3000)), ("as the program cuts them", program_spans(3000, 10_000))):
        one, two = (min(in_threads(readings, cut, jobs) for _ in range(3)) for jobs in (1, 2))
        print(f"two threads on two cores, by the clock: {one / two:.2f} times one (blocks {name})")
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


def even_spans(channels: int) -> list[Span]:
    """Blocks of 50 channels."""
    return [Span(first, first + 50) for first in range(0, channels, 50)]


def program_spans(channels: int, rows: int) -> list[Span]:
    """The program's own blocks."""
    named = tuple(Channel(position, f"c{position}") for position in range(channels))
    return spans(TableFacts(Path("bench"), "none", rows, named, (), ""))


def in_threads(readings: Readings, cut: list[Span], jobs: int) -> float:
    """Seconds by the clock that scoring the blocks takes that many threads."""
    blocks = [readings[span.first : span.stop] for span in cut]
    started = time.perf_counter()
    with ThreadPoolExecutor(jobs) as pool:
        list(pool.map(score_all, blocks))
    return time.perf_counter() - started


def growth(name: str, shapes: list[tuple[int, int]], axis: int) -> None:
    """Print the cost a reading over one dimension, and the exponent with which the whole cost grows.

    Readings are scored in the blocks that the program cuts.
    """
    costs = []
    for channels, rows in shapes:
        readings = block(channels, rows, 0.02)
        took = least({"sort": sort_only, "score": score_in_blocks}, readings, 3)
        floor, cost = took["sort"], took["score"]
        costs.append(cost / channels if axis else cost)
        each = 1e9 * cost / readings.size
        print(f"{channels:>9,} channels x {rows:>9,}: {each:7.2f} ns a reading, {cost / floor:5.2f} x np.sort")
    exponent = np.polyfit(np.log([shape[axis] for shape in shapes[1:]]), np.log(costs[1:]), 1)[0]
    print(f"cost grows as {name} to the power {exponent:.2f} (fitted without the smallest)\n")


if __name__ == "__main__":
    with threadpool_limits(1):
        main()
