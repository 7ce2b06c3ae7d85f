"""Exponential distribution: waiting times without memory.

    G(u) = -ln(1 - u)

Support: x > location. Shapes: none.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 1 (2nd ed., 1994), ch. 19.
"""

import numpy as np

from screener.stats.families.family import Family, FloatArray, Support


def quantile(u: FloatArray) -> FloatArray:
    """Standard quantiles at probabilities u, same shape as u."""
    return -np.log1p(-u)


FAMILY = Family(
    name="exponential",
    support=Support.HALF_LINE,
    quantile=quantile,
    arises_from="waiting times",
)
