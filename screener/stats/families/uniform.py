"""Uniform distribution: rounding errors, phases.

    G(u) = u

Support: an interval. Shapes: none.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 2 (2nd ed., 1995), ch. 26.
"""

import numpy as np

from screener.stats.families.family import Family, FloatArray, Support


def quantile(u: FloatArray) -> FloatArray:
    """Standard quantiles at probabilities u, same shape as u."""
    return np.array(u, dtype=np.float64)


FAMILY = Family(
    name="uniform",
    support=Support.INTERVAL,
    quantile=quantile,
    arises_from="rounding, phase",
)
