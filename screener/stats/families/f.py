"""F distribution: ratios of variances.

    G(u; d1, d2) = F^-1(u), by the beta distribution: B/(1 - B) d2/d1 with B ~ Beta(d1/2, d2/2)

Support: x > location. Shapes: d1 from 1 to 1250 and d2 from 2 to 1000, degrees of freedom; coordinates sqrt(2/d1)
and, since the upper tail falls as a power -d2/2, 2/d2.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 2 (2nd ed., 1995), ch. 27.
"""

import numpy as np
from scipy.special import betaincinv

from screener.stats.families.family import Family, FloatArray, Shape, Support


def quantile(u: FloatArray, d1: FloatArray | float, d2: FloatArray | float) -> FloatArray:
    """Standard quantiles at probabilities u and degrees of freedom d1 and d2, broadcast."""
    half1, half2 = np.multiply(0.5, d1), np.multiply(0.5, d2)
    below = np.asarray(betaincinv(half1, half2, np.minimum(u, 0.5)), dtype=np.float64)
    above = np.asarray(betaincinv(half2, half1, np.minimum(1.0 - u, 0.5)), dtype=np.float64)
    odds = np.where(u < 0.5, below / (1.0 - below), (1.0 - above) / above)
    return np.asarray(odds * half2 / half1, dtype=np.float64)


def numerator_degrees(coordinate: FloatArray) -> FloatArray:
    """d1 = 2 / coordinate^2."""
    return np.asarray(2.0 * coordinate**-2.0, dtype=np.float64)


def denominator_degrees(coordinate: FloatArray) -> FloatArray:
    """d2 = 2 / coordinate."""
    return np.asarray(2.0 / coordinate, dtype=np.float64)


FAMILY = Family(
    name="F",
    support=Support.HALF_LINE,
    quantile=quantile,
    arises_from="ratios of variances",
    shapes=(Shape("d1", (0.04, 1.42, 15), numerator_degrees), Shape("d2", (0.002, 1.0, 21), denominator_degrees)),
    typical=((4.0, 8.0), (10.0, 30.0), (30.0, 200.0)),
    costly=True,
)
