"""Gamma distribution: sums of waiting times.

    G(u; k) = P^-1(k, u), P the regularised lower incomplete gamma function

Support: x > location. Shapes: k from 0.25 to 2500; coordinate 1/sqrt(k), half the skewness.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 1 (2nd ed., 1994), ch. 17.
"""

import numpy as np
from scipy.special import gammainccinv, gammaincinv

from screener.stats.families.family import Family, FloatArray, Shape, Support


def quantile(u: FloatArray, k: FloatArray | float) -> FloatArray:
    """Standard quantiles at probabilities u and shape k, broadcast."""
    return np.where(u < 0.5, gammaincinv(k, u), gammainccinv(k, 1.0 - u))


def inverse_square(coordinate: FloatArray) -> FloatArray:
    """The parameter 1 / coordinate^2."""
    return np.asarray(coordinate**-2.0, dtype=np.float64)


FAMILY = Family(
    name="gamma",
    support=Support.HALF_LINE,
    quantile=quantile,
    arises_from="sums of waiting times",
    shapes=(Shape("k", (0.02, 2.0, 21), inverse_square),),
    typical=((0.5,), (2.0,), (9.0,), (100.0,)),
    costly=True,
)
