"""Tukey lambda distribution: how heavy a symmetric tail is; a diagnosis, not a model.

    G(u; lambda) = (u^lambda - (1 - u)^lambda) / lambda; lambda = 0 is the logistic distribution

Support: an interval for lambda > 0, else the whole line. Shapes: lambda from -1 (near Cauchy) by 0 (logistic), 0.14
(near normal) and 1 (uniform) to 2 (uniform too).
Source: NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.3.23 and 1.3.6.6.15.
"""

import numpy as np

from screener.stats.families.family import Family, FloatArray, ShapeGrid, Support


def quantile(u: FloatArray, lambda_: FloatArray | float) -> FloatArray:
    """Standard quantiles at probabilities u and shape lambda, broadcast."""
    log_u, log_v = np.log(u), np.log1p(-u)
    bent = np.where(np.abs(lambda_) < 1e-12, 1.0, lambda_)
    return np.where(np.abs(lambda_) < 1e-12, log_u - log_v, (np.expm1(bent * log_u) - np.expm1(bent * log_v)) / bent)


FAMILY = Family(
    name="Tukey lambda",
    support=Support.WHOLE_LINE,
    quantile=quantile,
    arises_from="how heavy a symmetric tail is",
    shapes=ShapeGrid(
        ("lambda",), ((-1.0, 2.0, 61),), lambda at: (at,), lambda value: (value,), (56,), coordinate_name="lambda"
    ),
    typical=((-0.5,), (0.0,), (0.14,), (0.5,), (1.0,)),
    diagnostic=True,
)
