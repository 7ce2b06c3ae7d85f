"""Cauchy distribution: ratios of normal errors; tails without a mean.

    G(u) = tan(pi (u - 1/2)), computed as -1 / tan(pi u) in the tails

Support: the whole line. Shapes: none.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 1 (2nd ed., 1994), ch. 16.
"""

import numpy as np

from screener.stats.families.family import Family, FloatArray, Support


def quantile(u: FloatArray) -> FloatArray:
    """Standard quantiles at probabilities u, same shape as u."""
    return np.where(u < 0.5, -1.0, 1.0) / np.tan(np.pi * np.minimum(u, 1.0 - u))


FAMILY = Family(
    name="Cauchy",
    support=Support.WHOLE_LINE,
    quantile=quantile,
    arises_from="ratios; tails without a mean",
)
