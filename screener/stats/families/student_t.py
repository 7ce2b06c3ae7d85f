"""Student t distribution: mixtures of normal spreads.

    G(u; nu) = t_nu^-1(u); nu = infinity is the normal distribution

Support: the whole line. Shapes: nu, degrees of freedom, from 1 (Cauchy) up; coordinate 1/nu.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 2 (2nd ed., 1995), ch. 28.
"""

import numpy as np
from scipy.special import ndtri, stdtrit

from screener.stats.families.family import Family, FloatArray, ShapeGrid, Support


def quantile(u: FloatArray, nu: FloatArray | float) -> FloatArray:
    """Standard quantiles at probabilities u and degrees of freedom nu, broadcast."""
    lower = np.minimum(u, 1.0 - u)
    bounded = np.minimum(nu, 1e9)
    tail = np.where(np.isinf(nu), ndtri(lower), stdtrit(bounded, lower))
    return np.where(u < 0.5, tail, -tail)


def parameters(coordinate: FloatArray) -> tuple[FloatArray, ...]:
    """nu = 1 / coordinate; infinity at 0."""
    return (np.where(coordinate > 0.0, 1.0 / np.maximum(coordinate, 1e-300), np.inf),)


FAMILY = Family(
    name="Student t",
    support=Support.WHOLE_LINE,
    quantile=quantile,
    arises_from="mixtures of normal spreads",
    shapes=ShapeGrid(("nu",), ((0.0, 1.0, 21),), parameters, lambda nu: (1.0 / nu,), (28,), coordinate_name="1/nu"),
    typical=((1.5,), (3.0,), (10.0,), (60.0,)),
)
