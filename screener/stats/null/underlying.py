"""The normal series behind readings of any family: what it turns into, and how strongly it must follow itself.

A series of readings x = T(z) of a standard normal series z with autocorrelation rho has the autocorrelation
sum a_k^2 rho^k / sum a_k^2, where a_k are the coefficients of T in normalised Hermite polynomials (Mehler's formula;
Lancaster 1957, Biometrika 44, from memory).
"""

from functools import lru_cache

import numpy as np
from scipy.special import ndtr, ndtri

from screener.stats.families import Axis, Family, family_named
from screener.stats.families.family import FloatArray

REACH = 8.2
"""Standard normal values beyond this cannot be told apart in u."""
POINTS = 8201
TERMS = 40
LARGEST = 0.995
"""The strongest coefficient looked for."""


def recorded_at(normal: FloatArray, family: Family, shapes: tuple[float, ...]) -> FloatArray:
    """Readings of a family, before clipping and rounding, at standard normal values of any shape."""
    if family.name == "normal":
        return normal
    at, values = _table(family.name, shapes)
    return np.asarray(np.interp(normal, at, values), dtype=np.float64)


@lru_cache(maxsize=64)
def _table(name: str, shapes: tuple[float, ...]) -> tuple[FloatArray, FloatArray]:
    """Values of a family at even standard normal values."""
    family = family_named(name)
    at = np.linspace(-REACH, REACH, POINTS)
    if family.axis is Axis.LOG:
        (scale,) = shapes
        values = np.exp(np.clip(scale * family.quantile(ndtr(at)), -600.0, 600.0))
    else:
        values = family.quantile(ndtr(at), *shapes)
    finite = np.isfinite(values)
    return at[finite], values[finite]


@lru_cache(maxsize=512)
def underlying_coefficient(family: Family, shapes: tuple[float, ...], low: float, high: float, tau: float) -> float:
    """The coefficient of the normal AR(1) whose readings, clipped at these shares, have the given tau_4."""
    if tau <= 1.0:
        return 0.0
    coefficients = np.linspace(0.0, LARGEST, 200)
    shares = _hermite_shares(family, shapes, low, high)
    lags = np.arange(1, 1 + int(np.ceil(np.log(1e-3) / np.log(LARGEST))))
    rho = coefficients[:, None] ** lags
    seen = np.zeros_like(rho)
    for share in shares[::-1]:
        seen = (seen + share) * rho
    taus = 1.0 + 2.0 * np.sum(seen**4, axis=1)
    return float(np.interp(np.log(tau), np.log(taus), coefficients))


def underlying_rho(rho: FloatArray, family: Family, shapes: tuple[float, ...], low: float, high: float) -> FloatArray:
    """The autocorrelation of the normal series whose readings, clipped at these shares, have the given one."""
    if family.name == "normal" and not (low or high):
        return rho
    at = np.linspace(-1.0, 1.0, 401)
    seen = np.zeros_like(at)
    for share in _hermite_shares(family, shapes, low, high)[::-1]:
        seen = (seen + share) * at
    # Even terms make it fall again below 0, where readings of a skew family cannot be so strongly opposed.
    lowest = int(np.argmin(seen))
    return np.asarray(np.interp(rho, seen[lowest:], at[lowest:]), dtype=np.float64)


def _hermite_shares(family: Family, shapes: tuple[float, ...], low: float, high: float) -> FloatArray:
    """Shares of the variance of readings that lie in the Hermite terms 1 to TERMS of the normal series behind them."""
    normal = ndtri((np.arange(20_001) + 0.5) / 20_001)
    readings = recorded_at(np.clip(normal, ndtri(low), ndtri(1.0 - high)), family, shapes)
    deviation = readings - readings.mean()
    before, term = np.zeros_like(normal), np.ones_like(normal)
    shares = np.empty(TERMS)
    for k in range(TERMS):
        before, term = term, (normal * term - np.sqrt(k) * before) / np.sqrt(k + 1.0)
        shares[k] = np.mean(deviation * term) ** 2
    return np.asarray(shares / np.mean(deviation**2), dtype=np.float64)
