"""Gamma distribution: sums of waiting times.

    G(u; k) = P^-1(k, u), P the regularised lower incomplete gamma function

Support: x > location. Shapes: k from 0.25 to 2500; coordinate 1/sqrt(k), half the skewness.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 1 (2nd ed., 1994), ch. 17.
"""

import numpy as np
from scipy.special import gammainccinv, gammaincinv

from screener.stats.families.family import Family, FloatArray, ShapeGrid, Support


def quantile(u: FloatArray, k: FloatArray | float) -> FloatArray:
    """Standard quantiles at probabilities u and shape k, broadcast."""
    return np.where(u < 0.5, gammaincinv(k, u), gammainccinv(k, 1.0 - u))


def parameters(coordinate: FloatArray) -> tuple[FloatArray, ...]:
    """k = 1 / coordinate^2."""
    return (coordinate**-2.0,)


def mean_and_deviation(k: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Mean and standard deviation."""
    return k, np.sqrt(k)


FAMILY = Family(
    name="gamma",
    support=Support.HALF_LINE,
    quantile=quantile,
    arises_from="sums of waiting times",
    shapes=ShapeGrid(("k",), ((0.02, 2.0, 21),), parameters, lambda k: (k**-0.5,), (24,), coordinate_name="1/sqrt(k)"),
    centre_and_width=mean_and_deviation,
    typical=((0.5,), (2.0,), (9.0,), (100.0,)),
    costly=True,
)
