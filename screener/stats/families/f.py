"""F distribution: ratios of variances.

    G(u; d1, d2) = F^-1(u), by the beta distribution: B/(1 - B) d2/d1 with B ~ Beta(d1/2, d2/2)

Support: x > location. Shapes: d1 from 1 and d2 from 2, degrees of freedom; coordinates are the polar ones of sqrt(2/d1)
and 1.42 sqrt(2/d2), in which the skewness is smooth near the normal.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 2 (2nd ed., 1995), ch. 27.
"""

import numpy as np
from scipy.special import betaincinv

from screener.stats.families.family import Family, FloatArray, ShapeGrid, Support


def quantile(u: FloatArray, d1: FloatArray | float, d2: FloatArray | float) -> FloatArray:
    """Standard quantiles at probabilities u and degrees of freedom d1 and d2, broadcast."""
    half1, half2 = np.multiply(0.5, d1), np.multiply(0.5, d2)
    lower = u < 0.5
    # B or, above the median, 1 - B, whichever is small.
    tail = betaincinv(np.where(lower, half1, half2), np.where(lower, half2, half1), np.minimum(u, 1.0 - u))
    # Far out in the tail the quantile is beyond every number.
    with np.errstate(divide="ignore"):
        odds = np.where(lower, tail / (1.0 - tail), (1.0 - tail) / tail)
    return np.asarray(odds * half2 / half1, dtype=np.float64)


WIDER = 1.42
"""By how much sqrt(2/d2) is stretched, so that the grid ends at d1 = 1 and at d2 = 2, the heaviest tail fitted."""


def parameters(radius: FloatArray, angle: FloatArray) -> tuple[FloatArray, ...]:
    """d1 and d2 at polar coordinates."""
    return 2.0 * (radius * np.cos(angle)) ** -2.0, 2.0 * (radius * np.sin(angle) / WIDER) ** -2.0


def coordinates(d1: float, d2: float) -> tuple[float, ...]:
    """Polar coordinates of d1 and d2."""
    across, up = (2.0 / d1) ** 0.5, WIDER * (2.0 / d2) ** 0.5
    return float(np.hypot(across, up)), float(np.arctan2(up, across))


def centre_and_width(d1: FloatArray, d2: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Mean and standard deviation for many degrees of freedom; finite for few."""
    return np.ones_like(d1), np.sqrt(2.0 / d1 + 2.0 / d2)


FAMILY = Family(
    name="F",
    support=Support.HALF_LINE,
    quantile=quantile,
    arises_from="ratios of variances",
    shapes=ShapeGrid(
        ("d1", "d2"),
        ((0.05, 1.42, 13), (0.03, np.pi / 2 - 0.03, 13)),
        parameters,
        coordinates,
        nodes=(28, 24),
        angle=True,
    ),
    centre_and_width=centre_and_width,
    typical=((4.0, 8.0), (10.0, 30.0), (30.0, 200.0)),
    costly=True,
)
