"""Weibull distribution: the weakest link, wear.

    on the log axis: ln x has the smallest extreme value distribution, G(u) = ln(-ln(1 - u))

Support: x > 0. Shapes: none.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 1 (2nd ed., 1994), ch. 21.
"""

from screener.stats.families import smallest_extreme_value
from screener.stats.families.family import Axis, Family, FloatArray, Support


def quantile(u: FloatArray) -> FloatArray:
    """Standard quantiles at probabilities u, same shape as u."""
    return smallest_extreme_value.quantile(u)


FAMILY = Family(
    name="Weibull",
    support=Support.POSITIVE,
    axis=Axis.LOG,
    quantile=quantile,
    arises_from="weakest link, wear",
    null_of="largest extreme value",
)
