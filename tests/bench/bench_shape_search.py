"""How far r of beta and F falls short of its maximum over the shapes, found the slow way with scipy.

PYTHONPATH=tests/support python tests/bench/bench_shape_search.py [share of the samples, 1 unless given]
"""

import sys
import time

import numpy as np
from numpy.typing import NDArray
from straightest import SAMPLES, own_sample, scan, straightest_r
from threadpoolctl import threadpool_limits

from screener.stats.correlation import fit_families
from screener.stats.families import Family, family_named
from screener.stats.positions import plotting_positions

Array = NDArray[np.float64]

SHAPES = {
    "beta": ((0.5, 3.0), (0.7, 0.7), (1.0, 1.0), (2.0, 5.0), (8.0, 3.0), (30.0, 40.0)),
    "F": ((1.5, 60.0), (2.0, 3.0), (4.0, 8.0), (10.0, 30.0), (30.0, 200.0)),
}

SIZES = {20: 400, 100: 200, 1000: 40, 5000: 10}
"""Samples a cell, by n; the scan is shared by the cells of a family."""


def cells(family: Family, n: int, samples: int) -> list[tuple[str, Array]]:
    """Sorted samples, [samples, n], of the family itself and of others, each with its name."""
    rng = np.random.default_rng([n, len(family.name)])
    own = [
        (" ".join([family.name, *(f"{shape:g}" for shape in shapes)]), own_sample(family, shapes, rng, (samples, n)))
        for shapes in SHAPES[family.name]
    ]
    others = [(name, draw(rng, (samples, n))) for name, draw in SAMPLES.items()]
    return [(name, np.sort(drawn, axis=1)) for name, drawn in own + others]


def off_definition(family: Family, ordered: Array, r: Array, shapes: Array) -> float:
    """The greatest difference between r and the correlation with the member that is reported."""
    u = plotting_positions(ordered.shape[1])
    exact = [np.corrcoef(x, family.quantile(u, *at))[0, 1] for x, at in zip(ordered, shapes, strict=True)]
    return float(np.abs(r - exact).max())


def main() -> None:
    """Print a row for each family, sample and n."""
    share = float(sys.argv[1]) if len(sys.argv) > 1 else 1.0
    print("short of the maximum of r over the shapes: median, 99 %, worst; r off its definition: worst")
    print(f"{'fitted':<7}{'samples of':<14}{'n':>6}{'count':>7}{'median':>10}{'99 %':>10}{'worst':>10}{'off':>10}")
    for name in SHAPES:
        family = family_named(name)
        for n, most in SIZES.items():
            scanned = scan(family, n)
            for kind, ordered in cells(family, n, max(2, int(share * most))):
                fits = fit_families(ordered, np.full(len(ordered), n), [family], "filliben")
                best = np.array([straightest_r(scanned, sample) for sample in ordered])
                short = best - fits.r[:, 0]
                off = off_definition(family, ordered, fits.r[:, 0], fits.shapes[:, 0])
                figures = (np.median(short), np.quantile(short, 0.99), short.max(), off)
                print(
                    f"{name:<7}{kind:<14}{n:>6}{len(ordered):>7}" + "".join(f"{x:>10.1e}" for x in figures), flush=True
                )


if __name__ == "__main__":
    started = time.perf_counter()
    with threadpool_limits(1):
        main()
    print(f"{time.perf_counter() - started:.0f} s")
