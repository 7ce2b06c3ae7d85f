"""Rayleigh distribution: the length of a two-dimensional normal error.

    G(u) = sqrt(-2 ln(1 - u))

Support: x > location. Shapes: none.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 1 (2nd ed., 1994), ch. 18.
"""

import numpy as np

from screener.stats.families.family import Family, FloatArray, Support


def quantile(u: FloatArray) -> FloatArray:
    """Standard quantiles at probabilities u, same shape as u."""
    return np.sqrt(-2.0 * np.log1p(-u))


FAMILY = Family(
    name="Rayleigh",
    support=Support.HALF_LINE,
    quantile=quantile,
    arises_from="length of a two-dimensional normal error",
)
