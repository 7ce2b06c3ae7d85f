"""Rejected share of samples that truly come from each family, at typical shapes: alpha is held to between 4 and 6 %.

python tests/bench/bench_own_family.py [samples] [family ...]
"""

import sys

import numpy as np
from threadpoolctl import threadpool_limits

from screener.stats.correlation import fit_families
from screener.stats.families import FAMILIES, Axis, Family, family_named
from screener.stats.null.packing import shipped_nulls
from screener.stats.null.simulate import LOGIT_GRID, sorted_uniforms

SIZES = (20, 50, 200, 1000, 5000)
ALPHA = 0.05
CHUNK_READINGS = 4_000_000


def rejected(family: Family, shapes: tuple[float, ...], n: int, samples: int) -> float:
    """Share of own samples with r below the critical value."""
    rng = np.random.default_rng([n, len(family.name), *(int(1000 * abs(shape)) for shape in shapes)])
    grid = family.quantile(1.0 / (1.0 + np.exp(-LOGIT_GRID)), *shapes)
    finite = np.isfinite(grid)
    count, below = max(1, CHUNK_READINGS // n), 0
    for first in range(0, samples, count):
        u = sorted_uniforms(rng, min(count, samples - first), n)
        ordered = np.interp(np.log(u) - np.log1p(-u), LOGIT_GRID[finite], grid[finite])
        readings = np.exp(ordered) if family.axis is Axis.LOG else ordered
        fits = fit_families(readings, np.full(len(readings), n), [family], "filliben")
        rows, row = shipped_nulls().rows(family, np.full(len(readings), n), fits.steps[:, 0])
        below += int(np.count_nonzero(fits.r[:, 0] < rows.critical(ALPHA)[row]))
    return below / samples


def main() -> None:
    """Print the table and the cells that miss."""
    samples = int(sys.argv[1]) if len(sys.argv) > 1 else 10_000
    error = 100 * np.sqrt(ALPHA * (1 - ALPHA) / samples)
    print(f"rejected at alpha = 5 %, in percent; {samples:,} samples a cell, standard error {error:.2f}")
    print(f"{'family':<40}" + "".join(f"{n:>8}" for n in SIZES))
    missed = 0
    for family in map(family_named, sys.argv[2:]) if sys.argv[2:] else FAMILIES:
        for shapes in family.typical:
            shares = [100 * rejected(family, shapes, n, samples) for n in SIZES]
            marks = ["" if 4.0 <= share <= 6.0 else "!" for share in shares]
            missed += sum(map(bool, marks))
            name = " ".join([family.name, *(f"{shape:g}" for shape in shapes)])
            print(
                f"{name:<40}"
                + "".join(f"{share:>7.2f}{mark or ' '}" for share, mark in zip(shares, marks, strict=True))
            )
    print(f"cells outside 4 to 6 %: {missed}")


if __name__ == "__main__":
    with threadpool_limits(1):
        main()
