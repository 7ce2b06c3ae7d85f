"""The 95 % simultaneous band of a quantile plot: all readings lie in it in 95 of 100 samples of the family.

The k-th smallest of n uniform readings is Beta(k, n + 1 - k); the band goes from its quantile at level/2 to that at
1 - level/2, with one level for all k ("equal local levels"). The level is the one at which, in samples that were fitted
as a channel is fitted, by least squares, all readings lie within the band with probability 0.95. It was simulated for
the families below, under filliben positions; other positions change it little. Families with shapes, with an end of
their support, or without a variance have no such band: their fits scatter too much for it.

Source: Aldor-Noiman, Brown, Buja, Rolke & Stine 2013, The American Statistician ("The power to see").
"""

from functools import lru_cache

import numpy as np
from numpy.typing import NDArray
from scipy.special import betainc, betaincinv

from screener.stats.families import Family
from screener.stats.points import kept_ranks
from screener.stats.positions import plotting_positions

FloatArray = NDArray[np.float64]

COVERAGE = 0.95
SIZES = (5, 10, 20, 50, 100, 200, 500, 1000, 2000, 5000, 10000, 30000)
"""The n for which levels were simulated; between them ln level is linear in ln n, and beyond them goes on so."""

LEVELS: dict[str, tuple[float, ...]] = {
    "normal": (
        *(0.262914, 0.143382, 0.082230, 0.043883, 0.027601, 0.017662, 0.010758),
        *(0.007357, 0.005187, 0.003949, 0.002946, 0.002464),
    ),
    "logistic": (
        *(0.241843, 0.136575, 0.082808, 0.044203, 0.028666, 0.019479, 0.012248),
        *(0.008565, 0.006138, 0.004396, 0.003507, 0.002809),
    ),
    "double exponential": (
        *(0.178749, 0.083533, 0.048251, 0.025177, 0.017265, 0.012891, 0.008985),
        *(0.006909, 0.005272, 0.004134, 0.003043, 0.002510),
    ),
    "largest extreme value": (
        *(0.180473, 0.063937, 0.029605, 0.012942, 0.007525, 0.004720, 0.003083),
        *(0.002099, 0.001560, 0.001447, 0.001218, 0.001127),
    ),
}
"""Local levels at SIZES, by the family that stands behind a plot; `tests/bench/bench_band.py` prints them."""

BEHIND = {
    **{"normal": "normal", "lognormal": "normal", "logistic": "logistic", "log-logistic": "logistic"},
    **{"double exponential": "double exponential", "largest extreme value": "largest extreme value"},
    **{"smallest extreme value": "largest extreme value", "Weibull": "largest extreme value"},
}
"""Families whose plots have the same level: on a log axis, or as mirror images."""

FINE = 20_001
"""Nodes on which a quantile function is inverted."""


def has_band(family: Family) -> bool:
    """Whether the family's plots have a band."""
    return family.name in BEHIND


@lru_cache(maxsize=128)
def band(family: Family, n: int) -> tuple[FloatArray, FloatArray]:
    """Standard quantiles of the lower and the upper end of the band at `kept_ranks(n)`; only for `has_band`."""
    level = local_level(BEHIND[family.name], n)
    rank = kept_ranks(n) + 1.0
    low, high = betaincinv(rank, n + 1 - rank, level / 2), 1 - betaincinv(n + 1 - rank, rank, level / 2)
    return family.quantile(low), family.quantile(high)


def local_level(name: str, n: int) -> float:
    """The level for samples of n, at least 3, from a family that LEVELS holds."""
    sizes, levels = np.log(SIZES), np.log(LEVELS[name])
    place = int(np.clip(np.searchsorted(sizes, np.log(n)) - 1, 0, sizes.size - 2))
    slope = (levels[place + 1] - levels[place]) / (sizes[place + 1] - sizes[place])
    return float(np.exp(levels[place] + slope * (np.log(n) - sizes[place])))


def simulated_level(family: Family, n: int, replicates: int, rng: np.random.Generator) -> float:
    """The level found by simulating so many fitted samples of n from a family without shapes."""
    smallest = [smallest_level(family, n, size, rng) for size in _portions(n, replicates)]
    return float(np.quantile(np.concatenate(smallest), 1 - COVERAGE))


def smallest_level(family: Family, n: int, replicates: int, rng: np.random.Generator) -> FloatArray:
    """For each of so many fitted samples, the level at which its outermost reading lies just on the band."""
    standard = family.quantile(plotting_positions(n))
    centred = standard - standard.mean()
    readings = family.quantile(np.sort(rng.random((replicates, n)), axis=1))
    scale = readings @ centred / (centred @ centred)
    location = readings.mean(axis=1) - scale * standard.mean()
    ranks = kept_ranks(n)
    fitted = (readings[:, ranks] - location[:, None]) / scale[:, None]
    below = betainc(ranks + 1.0, n - ranks, _probability(family, fitted))
    return np.asarray(2 * np.minimum(below, 1 - below).min(axis=1))


def _probability(family: Family, z: FloatArray) -> FloatArray:
    """The family's probabilities at standard readings, from its quantile function on even steps of the logit."""
    logit = np.linspace(-36.0, 36.0, FINE)
    nodes = family.quantile(1 / (1 + np.exp(-logit)))
    finite = np.isfinite(nodes)
    return np.asarray(1 / (1 + np.exp(-np.interp(z, nodes[finite], logit[finite]))))


def _portions(n: int, replicates: int) -> list[int]:
    """The replicates in portions of a few million readings."""
    size = max(1, min(replicates, 4_000_000 // n))
    return [min(size, replicates - done) for done in range(0, replicates, size)]
