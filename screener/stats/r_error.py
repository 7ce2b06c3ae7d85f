"""How far r itself would scatter if a channel were measured again: what a change of r has to be held against.

Two parts. Away from the family, r scatters as the readings do: its asymptotic variance is that of its influence
function over n (r is an L-statistic over a standard deviation; Serfling 1980, Approximation Theorems of Mathematical
Statistics, ch. 8). On the family that variance vanishes and r scatters by its null distribution, whose spread is taken
from the critical value. Readings are taken to be independent.
"""

import numpy as np
from numpy.typing import NDArray
from scipy.special import erfc

FloatArray = NDArray[np.float64]

NULL_SPREAD = 0.5
"""Standard deviation of 1 - r under the null, as a share of 1 - critical r; on the safe side from n = 10 on."""


def r_error(points: FloatArray, ranks: NDArray[np.int64], n: int, standard: FloatArray, critical_r: float) -> float:
    """Standard error of r, from the readings kept at 0-based ranks of n and the standard quantiles at them."""
    if points[0] == points[-1]:
        return float("nan")
    weight = _weights(ranks, n)
    centred = points - weight @ points
    spread = np.sqrt(weight @ centred**2)
    quantile = standard - weight @ standard
    quantile = quantile / np.sqrt(weight @ quantile**2)
    z = centred / spread
    along = np.concatenate([[0.0], np.cumsum((quantile[1:] + quantile[:-1]) / 2 * np.diff(z))])
    influence = along - weight @ along - (weight @ (z * quantile)) / 2 * (z**2 - 1)
    own = weight @ influence**2 / n
    return float(np.sqrt(own + (NULL_SPREAD * (1 - critical_r)) ** 2))


def change_p(difference: FloatArray, error: FloatArray) -> FloatArray:
    """The probability of so large a difference of two r by chance, from the standard error of the difference."""
    return np.asarray(erfc(np.abs(difference) / error / np.sqrt(2.0)))


def _weights(ranks: NDArray[np.int64], n: int) -> FloatArray:
    """The share of the readings that each kept one stands for."""
    between = (ranks[1:] + ranks[:-1]) / 2
    return np.diff(np.concatenate([[-0.5], between, [n - 0.5]])) / n
