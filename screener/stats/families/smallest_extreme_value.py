"""Smallest extreme value distribution: minima, breakdown.

    G(u) = ln(-ln(1 - u))

Support: the whole line. Shapes: none.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 2 (2nd ed., 1995), ch. 22.
"""

import numpy as np

from screener.stats.families.family import Family, FloatArray, Support


def quantile(u: FloatArray) -> FloatArray:
    """Standard quantiles at probabilities u, same shape as u."""
    return np.log(-np.log1p(-u))


FAMILY = Family(
    name="smallest extreme value",
    support=Support.WHOLE_LINE,
    quantile=quantile,
    arises_from="minima, breakdown",
    null_of="largest extreme value",
)
