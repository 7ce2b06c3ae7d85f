"""Plotting positions: the probability assigned to the k-th smallest of n readings.

All rules but two are (k - a) / (n + 1 - 2a), named after their authors. Sources: Hazen 1914 (Trans. ASCE), Weibull
1939, Beard 1943, Benard & Bos-Levenbach 1953 (Statistica Neerlandica), Blom 1958 (Statistical Estimates and
Transformed Beta-Variables), Tukey 1962 (Ann. Math. Stat.), Gringorten 1963 (J. Geophys. Res.), Filliben 1975
(Technometrics), Cunnane 1978 (J. Hydrology), Adamowski 1981 (Water Resour. Bull.).
"""

import math

import numpy as np
from numpy.typing import NDArray
from scipy.special import betaincinv

from screener.errors import PlanError

FloatArray = NDArray[np.float64]

OFFSETS: dict[str, float] = {
    "hazen": 0.5,
    "weibull": 0.0,
    "blom": 3 / 8,
    "tukey": 1 / 3,
    "gringorten": 0.44,
    "cunnane": 0.4,
    "benard": 0.3,
    "beard": 0.31,
    "adamowski": 0.25,
}
"""The a of (k - a) / (n + 1 - 2a), by the rule's name."""

RULES = ("filliben", "exact", *OFFSETS)
DEFAULT_RULE = "filliben"


def rule_key(rule: str) -> str:
    """The canonical spelling of a rule given by name, or by a bare number a with 0 <= a < 1.

    Raises: PlanError when there is no such rule.
    """
    word = rule.strip().lower()
    if word in RULES:
        return word
    try:
        offset = float(word)
    except ValueError:
        offset = math.nan
    if not 0 <= offset < 1:
        raise PlanError(
            f"There are no plotting positions {rule!r}. Known: {', '.join(RULES)}, or a number a from 0 to below 1 "
            "for (k - a)/(n + 1 - 2a)."
        )
    return repr(offset)


def plotting_positions(n: int, rule: str = DEFAULT_RULE) -> FloatArray:
    """Positions u_1 < ... < u_n, float64[n]; symmetric: u_k = 1 - u_(n+1-k)."""
    lower = positions_at(np.arange(1.0, n // 2 + 1.0), n, rule)
    middle = [0.5] if n % 2 else []
    return np.concatenate([lower, middle, 1.0 - lower[::-1]])


def positions_at(rank: FloatArray, n: int, rule: str = DEFAULT_RULE) -> FloatArray:
    """Positions of ranks in the lower half, which may lie between whole numbers; same shape as rank."""
    key = rule_key(rule)
    if key == "exact":
        return np.asarray(betaincinv(rank, n + 1.0 - rank, 0.5), dtype=np.float64)
    if key == "filliben":
        # Medians of the uniform order statistics: exact at the end, approximate elsewhere.
        return np.where(rank == 1.0, -np.expm1(np.log(0.5) / n), (rank - 0.3175) / (n + 0.365))
    offset = OFFSETS[key] if key in OFFSETS else float(key)
    return (rank - offset) / (n + 1 - 2 * offset)
