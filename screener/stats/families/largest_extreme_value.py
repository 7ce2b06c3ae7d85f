"""Largest extreme value (Gumbel) distribution: maxima.

    G(u) = -ln(-ln u)

Support: the whole line. Shapes: none.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 2 (2nd ed., 1995), ch. 22.
"""

import numpy as np

from screener.stats.families.family import Family, FloatArray, Support


def quantile(u: FloatArray) -> FloatArray:
    """Standard quantiles at probabilities u, same shape as u."""
    return -np.log(-np.log(u))


FAMILY = Family(
    name="largest extreme value",
    support=Support.WHOLE_LINE,
    quantile=quantile,
    arises_from="maxima",
)
