"""Cost of finding the conditions of a block over np.sort of the same block, one thread against one thread.

python tests/bench/bench_conditions.py
"""

import time
from collections.abc import Callable
from functools import partial

import numpy as np
from numpy.typing import NDArray
from threadpoolctl import threadpool_limits

from screener.stats.conditions import find_conditions
from screener.stats.conditions.clipping import find_clipping
from screener.stats.conditions.repeats import find_repeats
from screener.stats.conditions.resolution import find_lattice, sample_ranks
from screener.stats.conditions.row_pass import pass_over
from screener.stats.conditions.serial import serial_dependence
from screener.stats.ordering import sort_in_place

Readings = NDArray[np.float64]

CHANNELS, ROWS = 1000, 10_000


def least(works: dict[str, Callable[[], object]], rounds: int = 7) -> dict[str, float]:
    """Least processor seconds of each of several works, done in turn so that a busy moment hits all alike."""
    seconds = dict.fromkeys(works, np.inf)
    for _ in range(rounds):
        for name, work in works.items():
            started = time.thread_time()
            work()
            seconds[name] = min(seconds[name], time.thread_time() - started)
    return seconds


def blocks() -> dict[str, Readings]:
    """What is measured: independent, rounded, incomplete, serial and clipped readings."""
    rng = np.random.default_rng(1)
    plain = 20.0 + rng.standard_normal((CHANNELS, ROWS))
    rounded = np.rint(plain / 0.1) * 0.1
    incomplete = np.where(rng.random(plain.shape) < 0.02, np.nan, plain)
    serial = np.cumsum(plain - 20.0, axis=1)
    serial[:, 100:] -= serial[:, :-100].copy()
    clipped = np.minimum(rounded, 21.0)
    return {
        "unrounded": plain,
        "rounded to 0.1 sd": rounded,
        "2 % missing": incomplete,
        "serial to lag 100": serial,
        "rounded, 16 % clipped": clipped,
        "50 channels, unrounded": plain[:50].copy(),
        "50 channels, rounded": rounded[:50].copy(),
    }


def refill_and_sort(room: Readings, readings: Readings) -> None:
    """What a sort costs, and the copy that makes it possible to sort again."""
    room[...] = readings
    room.sort(axis=1)


def main() -> None:
    """Print the ratios, each part and all together."""
    print(
        f"{CHANNELS:,} x {ROWS:,}, one thread; times over np.sort of the same block (ns a reading in the first column)"
    )
    head = ("sort, ns", "row pass", "serial", "sample", "lattice", "clipping", "repeats", "all")
    print(f"{'':24}" + "".join(f"{word:>12}" for word in head))
    for name, readings in blocks().items():
        ordered = readings.copy()
        n = sort_in_place(ordered)
        passed, sample = pass_over(readings, ordered, n), sample_ranks(ordered, n)
        lattice = find_lattice(ordered, n, sample)
        ones, steps = np.ones(n.size), lattice.step / np.nanstd(readings, axis=1)
        room = readings.copy()
        seconds = least(
            {
                "refill": partial(np.copyto, room, readings),
                "sort": partial(refill_and_sort, room, readings),
                "row pass": partial(pass_over, readings, ordered, n),
                "serial": partial(serial_dependence, passed.resolutions, n, readings, steps),
                "sample": partial(sample_ranks, ordered, n),
                "lattice": partial(find_lattice, ordered, n, sample),
                "clipping": partial(find_clipping, ordered, n, lattice, ones),
                "repeats": partial(find_repeats, ordered, n, sample, lattice, ones),
                "all": partial(find_conditions, readings, ordered, n),
            }
        )
        floor = seconds["sort"] - seconds["refill"]
        ratios = "".join(f"{seconds[part] / floor:12.2f}" for part in head[1:])
        print(f"{name:24}{1e9 * floor / readings.size:12.2f}{ratios}")


if __name__ == "__main__":
    with threadpool_limits(1):
        main()
