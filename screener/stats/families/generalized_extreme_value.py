"""Generalized extreme value distribution: block maxima.

    G(u; xi) = ((-ln u)^-xi - 1) / xi; xi = 0 is -ln(-ln u)

Support: x > location - scale/xi for xi > 0, x < location - scale/xi for xi < 0, the whole line for xi = 0. Shapes: xi
from -1 to 1, positive for a heavy upper tail.
Source: Hosking, Wallis & Wood 1985, Technometrics (where the shape is k = -xi).
"""

import numpy as np

from screener.stats.families.family import Family, FloatArray, ShapeGrid, Support


def quantile(u: FloatArray, xi: FloatArray | float) -> FloatArray:
    """Standard quantiles at probabilities u and shape xi, broadcast."""
    reduced = -np.log(-np.log(u))
    bent = np.where(np.abs(xi) < 1e-12, 1.0, xi)
    return np.where(np.abs(xi) < 1e-12, reduced, np.expm1(bent * reduced) / bent)


FAMILY = Family(
    name="generalized extreme value",
    support=Support.WHOLE_LINE,
    quantile=quantile,
    arises_from="block maxima",
    shapes=ShapeGrid(("xi",), ((-1.0, 1.0, 41),), lambda at: (at,), lambda xi: (xi,), (44,), coordinate_name="xi"),
    typical=((-0.5,), (-0.1,), (0.0,), (0.2,), (0.6,)),
)
