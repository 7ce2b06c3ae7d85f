"""Half-normal distribution: absolute normal errors, flatness, runout.

    G(u) = Phi^-1((1 + u) / 2), by the inverse error function below the median, which keeps the digits of small u

Support: x > location. Shapes: none.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 1 (2nd ed., 1994), ch. 13.
"""

import numpy as np
from scipy.special import erfinv, ndtri

from screener.stats.families.family import Family, FloatArray, Support


def quantile(u: FloatArray) -> FloatArray:
    """Standard quantiles at probabilities u, same shape as u."""
    return np.where(u < 0.5, np.sqrt(2.0) * erfinv(u), -ndtri(0.5 * (1.0 - u)))


FAMILY = Family(
    name="half-normal",
    support=Support.HALF_LINE,
    quantile=quantile,
    arises_from="absolute errors, flatness, runout",
)
