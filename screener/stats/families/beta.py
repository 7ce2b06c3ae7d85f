"""Beta distribution: fractions, bounded by both ends.

    G(u; alpha, beta) = I^-1(alpha, beta, u), I the regularised incomplete beta function

Support: an interval. Shapes: alpha and beta; coordinates are the polar ones of 1/sqrt(alpha) and 1/sqrt(beta), in
which the skewness, 2 (1/alpha - 1/beta) / sqrt(1/alpha + 1/beta) near the normal, is smooth.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 2 (2nd ed., 1995), ch. 25.
"""

import numpy as np
from scipy.special import betaincinv

from screener.stats.families.family import Family, FloatArray, ShapeGrid, Support


def quantile(u: FloatArray, alpha: FloatArray | float, beta: FloatArray | float) -> FloatArray:
    """Standard quantiles at probabilities u and shapes alpha and beta, broadcast."""
    lower = u < 0.5
    tail = betaincinv(np.where(lower, alpha, beta), np.where(lower, beta, alpha), np.minimum(u, 1.0 - u))
    return np.where(lower, tail, 1.0 - tail)


def parameters(radius: FloatArray, angle: FloatArray) -> tuple[FloatArray, ...]:
    """alpha and beta at polar coordinates."""
    return (radius * np.cos(angle)) ** -2.0, (radius * np.sin(angle)) ** -2.0


def coordinates(alpha: float, beta: float) -> tuple[float, ...]:
    """Polar coordinates of alpha and beta."""
    return float(np.hypot(alpha**-0.5, beta**-0.5)), float(np.arctan2(beta**-0.5, alpha**-0.5))


def mean_and_deviation(alpha: FloatArray, beta: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Mean and standard deviation."""
    both = alpha + beta
    return alpha / both, np.sqrt(alpha * beta / (both + 1.0)) / both


FAMILY = Family(
    name="beta",
    support=Support.INTERVAL,
    quantile=quantile,
    arises_from="fractions, bounded by both ends",
    shapes=ShapeGrid(
        ("alpha", "beta"),
        ((0.05, 2.0, 13), (0.03, np.pi / 2 - 0.03, 13)),
        parameters,
        coordinates,
        nodes=(20, 28),
        angle=True,
    ),
    centre_and_width=mean_and_deviation,
    typical=((0.7, 0.7), (2.0, 5.0), (8.0, 3.0), (30.0, 40.0)),
    costly=True,
)
