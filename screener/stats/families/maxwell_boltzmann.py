"""Maxwell-Boltzmann distribution: the length of a three-dimensional normal error.

    G(u) = sqrt(2 P^-1(3/2, u)), P the regularised lower incomplete gamma function

Support: x > location. Shapes: none.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 1 (2nd ed., 1994), ch. 18.
"""

import numpy as np
from scipy.special import gammainccinv, gammaincinv

from screener.stats.families.family import Family, FloatArray, Support


def quantile(u: FloatArray) -> FloatArray:
    """Standard quantiles at probabilities u, same shape as u."""
    return np.sqrt(2.0 * np.where(u < 0.5, gammaincinv(1.5, u), gammainccinv(1.5, 1.0 - u)))


FAMILY = Family(
    name="Maxwell-Boltzmann",
    support=Support.HALF_LINE,
    quantile=quantile,
    costly=True,
    arises_from="length of a three-dimensional normal error",
)
