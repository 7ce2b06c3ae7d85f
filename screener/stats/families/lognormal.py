"""Lognormal distribution: products of many small causes.

    on the log axis: ln x is normal, G(u) = Phi^-1(u)

Support: x > 0. Shapes: none.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 1 (2nd ed., 1994), ch. 14.
"""

from screener.stats.families import normal
from screener.stats.families.family import Axis, Family, FloatArray, Support


def quantile(u: FloatArray) -> FloatArray:
    """Standard quantiles at probabilities u, same shape as u."""
    return normal.quantile(u)


FAMILY = Family(
    name="lognormal",
    support=Support.POSITIVE,
    axis=Axis.LOG,
    quantile=quantile,
    arises_from="products of many small causes",
    null_of="normal",
)
