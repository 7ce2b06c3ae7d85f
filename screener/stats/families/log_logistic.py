"""Log-logistic distribution: growth and decay times.

    on the log axis: ln x is logistic, G(u) = ln(u / (1 - u))

Support: x > 0. Shapes: none.
Source: Johnson, Kotz & Balakrishnan, Continuous Univariate Distributions 2 (2nd ed., 1995), ch. 23.
"""

from screener.stats.families import logistic
from screener.stats.families.family import Axis, Family, FloatArray, Support


def quantile(u: FloatArray) -> FloatArray:
    """Standard quantiles at probabilities u, same shape as u."""
    return logistic.quantile(u)


FAMILY = Family(
    name="log-logistic",
    support=Support.POSITIVE,
    axis=Axis.LOG,
    quantile=quantile,
    arises_from="growth and decay times",
    null_of="logistic",
)
