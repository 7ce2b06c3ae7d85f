"""Beta distribution: fractions, bounded by both ends.

    G(u; alpha, beta) = I^-1(alpha, beta, u), I the regularised incomplete beta function

Support: an interval. Shapes: alpha and beta, each from 0.5 to 625; coordinates 1/sqrt(alpha), 1/sqrt(beta).
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 2 (2nd ed., 1995), ch. 25.
"""

import numpy as np
from scipy.special import betainccinv, betaincinv

from screener.stats.families.family import Family, FloatArray, Shape, Support
from screener.stats.families.gamma import inverse_square

COORDINATES = (0.04, 1.42, 15)


def quantile(u: FloatArray, alpha: FloatArray | float, beta: FloatArray | float) -> FloatArray:
    """Standard quantiles at probabilities u and shapes alpha and beta, broadcast."""
    return np.where(u < 0.5, betaincinv(alpha, beta, u), betainccinv(alpha, beta, 1.0 - u))


FAMILY = Family(
    name="beta",
    support=Support.INTERVAL,
    quantile=quantile,
    arises_from="fractions, bounded by both ends",
    shapes=(Shape("alpha", COORDINATES, inverse_square), Shape("beta", COORDINATES, inverse_square)),
    typical=((0.7, 0.7), (2.0, 5.0), (8.0, 3.0), (30.0, 40.0)),
    costly=True,
)
