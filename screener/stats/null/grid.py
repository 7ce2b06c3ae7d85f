"""The probabilities and sample sizes at which a null distribution is tabled, and one tabled node."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.families.family import FloatArray
from screener.stats.null.tail import fitted_tail, tail_excess

PROBABILITIES: FloatArray = np.concatenate(
    [
        [1e-6, 2e-6, 5e-6, 1e-5, 2e-5, 5e-5, 1e-4, 2e-4, 5e-4, 0.001, 0.002, 0.0035, 0.005, 0.0075, 0.01, 0.015],
        [0.02, 0.025, 0.03, 0.035, 0.04, 0.045, 0.05, 0.055, 0.06, 0.07, 0.08, 0.09, 0.1, 0.12, 0.15],
        np.linspace(0.2, 0.85, 14),
        [0.9, 0.93, 0.95, 0.97, 0.98, 0.99, 0.995, 0.998, 0.999],
    ]
)
"""p of r, increasing; r is small at small p."""

SIZES: tuple[int, ...] = (
    *range(3, 21),
    *(22, 25, 28, 32, 36, 40, 45, 50, 60, 70, 80, 100, 120, 150, 180, 220, 270, 330, 400, 500, 600, 750, 1000),
    *(1300, 1700, 2200, 3000, 4000, 5500, 7500, 10_000, 20_000, 45_000, 100_000),
)
"""Sample sizes n tabled, close enough for cubic interpolation in ln n."""

TAIL_FROM = 0.01
"""The generalized Pareto tail is fitted to the samples below this probability."""

COUNTED = 20
"""A quantile is taken from the samples themselves when at least this many lie beyond it."""


def samples_at(n: int) -> int:
    """Samples simulated at n: 400,000 when small, never under 50,000.

    At 50,000 the standard error of the achieved alpha is 0.0975 percentage points at alpha = 5 %.
    """
    return int(min(400_000, max(50_000, 4e8 // n)))


@dataclass(frozen=True, slots=True)
class Node:
    """The tabled null distribution of F families at one n."""

    log_gap: FloatArray
    """[F, probabilities] ln(1 - r) at each p, decreasing in p."""
    tail_shape: FloatArray
    """[F] xi of the generalized Pareto tail beyond the smallest tabled p."""
    tail_scale: FloatArray
    """[F] sigma of that tail beyond the smallest tabled p."""
    floor: float
    """The smallest probability that was counted; below it the tail is fitted."""


def node_from_samples(gaps: FloatArray) -> Node:
    """The node of simulated ln(1 - r), float64[F, samples]."""
    ordered = np.sort(gaps, axis=1)[:, ::-1]
    samples = gaps.shape[1]
    counted = COUNTED / samples <= PROBABILITIES
    rows = [_quantiles(row, counted) for row in ordered]
    quantiles, shapes, scales = (np.array(part) for part in zip(*rows, strict=True))
    return Node(quantiles, shapes, scales, float(PROBABILITIES[counted][0]))


def _quantiles(decreasing: FloatArray, counted: NDArray[np.bool_]) -> tuple[FloatArray, float, float]:
    """Quantiles of one family's samples at PROBABILITIES, and the tail beyond the smallest of them."""
    samples = decreasing.size
    rank = np.arange(1, samples + 1) / (samples + 1)
    quantiles = np.interp(PROBABILITIES, rank, decreasing)
    beyond = int(TAIL_FROM * samples)
    threshold = decreasing[beyond]
    xi, sigma = fitted_tail(decreasing[:beyond] - threshold, -threshold)
    quantiles[~counted] = threshold + tail_excess(PROBABILITIES[~counted] / TAIL_FROM, xi, sigma)
    quantiles = np.minimum.accumulate(quantiles)
    return quantiles, xi, sigma + xi * float(quantiles[0] - threshold)
