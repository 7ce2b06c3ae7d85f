"""Double exponential (Laplace) distribution: differences of waiting times.

    G(u) = ln(2u) for u <= 1/2, -ln(2(1 - u)) above

Support: the whole line. Shapes: none.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 2 (2nd ed., 1995), ch. 24.
"""

import numpy as np

from screener.stats.families.family import Family, FloatArray, Support


def quantile(u: FloatArray) -> FloatArray:
    """Standard quantiles at probabilities u, same shape as u."""
    return np.where(u <= 0.5, _below(u), _above(u))


def _below(u: FloatArray) -> FloatArray:
    return np.asarray(np.log(2.0 * u), dtype=np.float64)


def _above(u: FloatArray) -> FloatArray:
    return np.asarray(-np.log(2.0 * (1.0 - u)), dtype=np.float64)


FAMILY = Family(
    name="double exponential",
    support=Support.WHOLE_LINE,
    quantile=quantile,
    branches=(_below, _above),
    arises_from="differences of waiting times; a sharp peak",
)
