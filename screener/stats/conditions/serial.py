"""Serial dependence: autocorrelation in row order, and what it does to the null distribution of r.

    tau_3 = 1 + 2 sum rho_k^3        tau_4 = 1 + 2 sum rho_k^4        effective n = n / tau_4

The sums run over lags up to a quarter of the record: lag by lag to 16, then over lags 8, 64, 512, ... rows apart, from
sums of as many rows, which stand for all lags between. An estimated rho_k of an independent series is normal with
variance v = 1/n about 0, and powers of it do not vanish on average; so in place of r^3 and r^4 stand the Hermite
polynomials r^3 - 3 v r and r^4 - 6 v r^2 + 3 v^2, whose means are rho^3 and rho^4.

Sources: Lomnicki 1961, Metrika 4 (tau_3, tau_4); Gasser 1975, Biometrika 62; Bartlett 1946, J. R. Stat. Soc. Suppl. 8
(variance of r_k); Kendall 1954, Biometrika 41 (bias of r_1).
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.conditions.counting import FloatArray, IntArray
from screener.stats.conditions.lag_products import LAGS
from screener.stats.conditions.row_pass import FEWEST_STRETCHES, Resolution

BoolArray = NDArray[np.bool_]

FEWEST_LAGS = 12
"""Lags looked at in a short record, where a quarter of it is less."""
SURE_AT_ONE, SURE = 3.3, 4.2
"""Standard errors from 0 beyond which rho_1, or rho_k at another lag to 16, is no chance."""
SLIGHT = 0.1
"""A rho below this leaves the null of r as it is, however sure."""
COARSE = 0.2
"""Steps, in standard deviations, from which rounding takes more than a third of a percent from every rho."""
BISECTIONS = 14
NARROW, SURE_OF_LASTING, SMOOTH = 0.2, 3.0, 0.85
"""|rho| that lasts to the far half of a resolution's lags, and so many standard errors, calls for every lag when the
next resolution sees less than a share of it. The Fourier transform costs several sorts; few channels swing so."""


@dataclass(frozen=True, slots=True)
class Serial:
    """The serial dependence of each of C channels."""

    rho: FloatArray
    """[C, LAGS + 1] autocorrelation at lags 0, 1, ..., LAGS, averaged over pairs; NaN where too few pairs."""
    tau_3: FloatArray
    tau_4: FloatArray
    """[C] 1 for independent readings."""
    slow: FloatArray
    """[C] autocorrelation over about a sixteenth of the record; 0 where it is not known."""
    found: BoolArray
    """[C] the dependence is beyond chance, and not slight."""


def longest_lag(rows: int) -> int:
    """The longest lag that counts."""
    return min(rows - 2, max(FEWEST_LAGS, rows // 4))


def serial_dependence(
    resolutions: tuple[Resolution, ...], n: IntArray, readings: FloatArray, step_in_sd: FloatArray
) -> Serial:
    """Serial dependence of readings, float64[C, rows], given their lag products and their n[C] finite readings.

    tau_3 and tau_4 are those of the readings before they were rounded to a step of so many standard deviations, [C].
    """
    rho = [_correlations(each, resolutions[0]) for each in resolutions]
    unrounded = [before_rounding(each, step_in_sd, one.width) for each, one in zip(rho, resolutions, strict=True)]
    whole = [restored(each, unrounded[0][:, 1], n) for each in unrounded]
    limit = longest_lag(readings.shape[1])
    most = 2.0 * np.sum(np.nan_to_num(rho[0]) ** 2, axis=1) - 1.0
    tau_3, tau_4 = np.ones(n.size), np.ones(n.size)
    for i, (each, width) in enumerate(zip(whole, (one.width for one in resolutions), strict=True)):
        if i == 0 or 3 * width <= limit:
            weights = _weights(width, limit, finest=i == 0)
            third, fourth = powers(each, width, n, weights, most)
            tau_3 += 2.0 * third
            tau_4 += 2.0 * fourth
    narrow = _narrow(whole, [one.width for one in resolutions], n, limit)
    for channel in np.flatnonzero(narrow):
        tau_3[channel], tau_4[channel] = _from_every_lag(readings[channel], limit, step_in_sd[channel])
    tau_3, tau_4 = np.clip(tau_3, 0.0, None), np.maximum(tau_4, 1.0)
    slow = _slow(whole[-1], readings.shape[1] // resolutions[-1].width)
    return Serial(rho[0], tau_3, tau_4, slow, _beyond_chance(rho[0], resolutions[0].pairs))


def _correlations(at: Resolution, finest: Resolution) -> FloatArray:
    """Autocorrelation at 0, 1, ..., LAGS times the width; NaN where fewer than three pairs are known."""
    with np.errstate(divide="ignore", invalid="ignore"):
        variance = finest.products[:, :1] / finest.pairs[:, :1]
        return np.where(at.pairs >= 3.0 * at.width**2, at.products / at.pairs / variance, np.nan)


def before_rounding(rho: FloatArray, step_in_sd: FloatArray, width: int) -> FloatArray:
    """rho, float64[C, lags], between sums over `width` rows, without what rounding to a step took from it.

    A rounding error has a twelfth of the squared step as variance. Over the lags of one row it is correlated as far as
    readings stay within a step: by the sum over m of 6 / (pi m)^2 exp(-(2 pi m / step)^2 (1 - rho)),
    the step in unrounded standard deviations (Widrow & Kollar 2008, Quantization Noise, from memory).
    """
    coarse = np.flatnonzero(step_in_sd >= COARSE)
    if coarse.size == 0:
        return rho
    share = (step_in_sd[coarse] ** 2 / 12.0)[:, None]
    found = rho.copy()
    if width > 1:
        found[coarse] /= 1.0 - share
        found[coarse, 0] -= (share / (width * (1.0 - share)))[:, 0]
    else:
        found[coarse, 1:] = np.copysign(_unrounded(np.abs(rho[coarse, 1:]), share), rho[coarse, 1:])
    return found


def _unrounded(rho: FloatArray, share: FloatArray) -> FloatArray:
    """The rho, float64[K, lags], of which rounding, of that share in the variance, [K, 1], leaves the given one."""
    low, high = np.zeros_like(rho), np.ones_like(rho)
    rate = (2.0 * np.pi) ** 2 * (1.0 - share) / (12.0 * share)
    for _ in range(BISECTIONS):
        middle = 0.5 * (low + high)
        error = sum(6.0 / (np.pi * m) ** 2 * np.exp(-(m**2) * rate * (1.0 - middle)) for m in (1, 2, 3))
        below = (1.0 - share) * middle + share * error < rho
        low, high = np.where(below, middle, low), np.where(below, high, middle)
    return np.where(np.isnan(rho), np.nan, 0.5 * (low + high))


def restored(rho: FloatArray, first: FloatArray, n: IntArray) -> FloatArray:
    """rho, float64[C, lags], with what subtracting the mean took from it, by the rho at lag 1 and n, each [C]."""
    back = _lost_with_the_mean(first, n)[:, None]
    return rho + back * (1.0 - rho)


def _lost_with_the_mean(first: FloatArray, n: IntArray) -> FloatArray:
    """Variance of the mean over the variance of a reading: what subtracting the mean takes from every rho, [C]."""
    known = np.nan_to_num(first)
    held = np.clip(known + (1.0 + 4.0 * known) / np.maximum(n, 1), -0.98, 0.98)
    return np.minimum((1.0 + held) / (1.0 - held) / np.maximum(n, 1), 0.4)


def _weights(width: int, limit: int, *, finest: bool) -> FloatArray:
    """For how many lags each of 0, 1, ..., LAGS times the width stands, float64[LAGS + 1]."""
    step = np.arange(LAGS + 1)
    if finest:
        return ((step > 0) & (step <= limit)).astype(np.float64)
    # The finer resolution ends in the middle between its last lag and the next.
    first = 2
    covered = (LAGS + 0.5) / 8
    weights = np.where((step >= first) & (step * width <= limit), float(width), 0.0)
    weights[first] = width * (first + 0.5 - covered)
    return weights


def powers(
    rho: FloatArray, width: int, n: IntArray, weights: FloatArray, most: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Sums of rho^3 and of rho^4 over lags, each [C], without what chance adds to them.

    The variance of an estimated rho is taken to be at most most[C] / n, lest a swing that lasts be taken for chance.
    """
    known = np.where(np.isnan(rho), 0.0, rho)
    # Plain products: a power is taken by logarithms, which costs more than all the rest.
    squares = known * known
    total = np.minimum(width * (squares[:, 0] + 2.0 * squares[:, 1:].sum(axis=1)), most)
    free = 1.0 - np.minimum(squares, 1.0)
    variance = (total / np.maximum(n, 1))[:, None] * (free * free * free)
    weighed = np.where(np.isnan(rho), 0.0, weights)
    third = np.sum(weighed * known * (squares - 3.0 * variance), axis=1)
    fourth = np.sum(weighed * (squares * (squares - 6.0 * variance) + 3.0 * variance * variance), axis=1)
    return third, fourth


def _narrow(rho: list[FloatArray], wide: list[int], n: IntArray, limit: int) -> BoolArray:
    """Channels whose dependence lasts beyond the lags of some resolution, but swings too fast for the next one."""
    found = np.zeros(n.size, dtype=np.bool_)
    if limit <= LAGS:
        return found
    for i, each in enumerate(rho):
        known = np.abs(np.nan_to_num(each))
        lasting = np.max(known[:, LAGS // 2 + 1 :], axis=1)
        variance = wide[i] * (2.0 * np.sum(known * known, axis=1) - known[:, 0] ** 2) / np.maximum(n, 1)
        least = np.maximum(NARROW, SURE_OF_LASTING * np.sqrt(variance))
        if i + 1 < len(rho):
            seen = np.max(np.abs(np.nan_to_num(rho[i + 1][:, 1:3])), axis=1)
            found |= (lasting >= least) & (seen < SMOOTH * lasting)
        elif i == 0:
            found |= lasting >= least
    return found


def _from_every_lag(readings: FloatArray, limit: int, step_in_sd: float) -> tuple[float, float]:
    """tau_3 and tau_4 of one channel, float64[rows], lag by lag."""
    rho = (autocorrelation(readings[None, :]) / _kept(readings.size))[:, : limit + 1]
    rho = before_rounding(rho, np.array([step_in_sd]), 1)
    n = np.array([np.isfinite(readings).sum()])
    weights = np.ones(limit + 1)
    weights[0] = 0.0
    most = np.array([2.0 * float(np.nansum(rho[0, : LAGS + 1] ** 2)) - 1.0])
    third, fourth = powers(rho, 1, n, weights, most)
    return 1.0 + 2.0 * float(third[0]), 1.0 + 2.0 * float(fourth[0])


def _slow(rho: FloatArray, stretches: int) -> FloatArray:
    """Autocorrelation over about a sixteenth of the record, [C], from the widest stretches."""
    lag = min(max(1, round(stretches / FEWEST_STRETCHES)), LAGS)
    return np.nan_to_num(rho[:, lag])


def _beyond_chance(rho: FloatArray, pairs: FloatArray) -> BoolArray:
    """Whether some rho to lag LAGS is neither chance nor slight."""
    with np.errstate(invalid="ignore"):
        error = 1.0 / np.sqrt(np.maximum(pairs, 1.0))
        limit = np.maximum(SLIGHT, np.where(np.arange(LAGS + 1) == 1, SURE_AT_ONE, SURE) * error)
        found: BoolArray = np.any(np.abs(rho[:, 1:]) > limit[:, 1:], axis=1)
        return found


def autocorrelation(readings: FloatArray) -> FloatArray:
    """Autocorrelation of readings, float64[C, rows], at lags 0, 1, ..., rows - 1, in row order.

    Sum of products of the readings less their mean over the sum of squares, as handbooks define it; missing readings
    are made up for by the mean of the pairs that are known. NaN where no pair is known or all readings are equal.
    """
    rows = readings.shape[1]
    finite = np.isfinite(readings)
    n = np.maximum(finite.sum(axis=1, keepdims=True), 1)
    mean = np.where(finite, readings, 0.0).sum(axis=1, keepdims=True) / n
    length = 1 << (2 * rows - 1).bit_length()
    products = _by_transform(np.where(finite, readings - mean, 0.0), length)[:, :rows]
    pairs = np.rint(_by_transform(finite.astype(np.float64), length)[:, :rows])
    with np.errstate(divide="ignore", invalid="ignore"):
        covariance = np.where(pairs > 0, products * (_kept(rows) / pairs), np.nan)
        return covariance / covariance[:, :1]


def _kept(rows: int) -> FloatArray:
    """Share of the rows that have a row 0, 1, ..., rows - 1 later."""
    return 1.0 - np.arange(rows) / rows


def _by_transform(values: FloatArray, length: int) -> FloatArray:
    """Sums of products with the values k later, for all k, by the fast Fourier transform."""
    spectrum = np.fft.rfft(values, length, axis=1)
    return np.fft.irfft(spectrum.real**2 + spectrum.imag**2, length, axis=1)
