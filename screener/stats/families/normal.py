"""Normal distribution: sums of many small causes.

    G(u) = Phi^-1(u)

Support: the whole line. Shapes: none.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 1 (2nd ed., 1994), ch. 13.
"""

import numpy as np
from scipy.special import ndtri

from screener.stats.families.family import Family, FloatArray, Support


def quantile(u: FloatArray) -> FloatArray:
    """Standard quantiles at probabilities u, same shape as u."""
    return np.asarray(ndtri(u), dtype=np.float64)


FAMILY = Family(
    name="normal",
    support=Support.WHOLE_LINE,
    quantile=quantile,
    arises_from="sums of many small causes",
)
