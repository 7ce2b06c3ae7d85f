"""Logistic distribution: symmetric, a little heavier in the tails than the normal.

    G(u) = ln(u / (1 - u))

Support: the whole line. Shapes: none.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 2 (2nd ed., 1995), ch. 23.
"""

import numpy as np

from screener.stats.families.family import Family, FloatArray, Support


def quantile(u: FloatArray) -> FloatArray:
    """Standard quantiles at probabilities u, same shape as u."""
    return np.log(u) - np.log1p(-u)


FAMILY = Family(
    name="logistic",
    support=Support.WHOLE_LINE,
    quantile=quantile,
    arises_from="slightly heavy, symmetric tails",
)
