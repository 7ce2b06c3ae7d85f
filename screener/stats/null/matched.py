"""The null of r for normal channels in their own condition: rounded, and following themselves in time.

Samples are drawn from first-order autoregressive normal series, sorted, and rounded to a lattice of random phase whose
step is a given share of their own standard deviation, since that is how a channel's step is known. A
series with another autocorrelation is represented by the AR(1) with the same tau_4 = 1 + 2 sum rho_k^4, since what
inflates the null of r is the dependence of the third and fourth Hermite components (Lomnicki 1961; Gasser 1975).
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.families import family_named
from screener.stats.families.family import FloatArray
from screener.stats.null.simulate import unit_score
from screener.stats.null.table import NullRows
from screener.stats.positions import plotting_positions

IntArray = NDArray[np.int64]

SIZES = (10, 16, 25, 40, 65, 100, 160, 250, 400, 650, 1000, 1700, 3000, 5500, 10_000, 30_000)
"""n tabled; beyond the last the trend in ln n goes on."""

STEPS = (
    *(0.004, 0.008, 0.016, 0.032, 0.045, 0.06, 0.08, 0.1, 0.125, 0.15, 0.2, 0.25),
    *(0.3, 0.35, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0, 1.15, 1.4),
)
"""Rounding steps tabled, in standard deviations; no rounding is the first row of the table, before these."""

COEFFICIENTS = (0.0, 0.3, 0.45, 0.6, 0.7, 0.8, 0.87, 0.92, 0.96)
"""Coefficients of the AR(1) tabled."""

PROBABILITIES: FloatArray = np.array(
    [
        0.001,
        0.002,
        0.005,
        0.01,
        0.015,
        0.02,
        0.03,
        0.04,
        0.05,
        0.06,
        0.08,
        0.1,
        0.15,
        0.2,
        0.3,
        0.4,
        0.5,
        0.7,
        0.9,
        0.99,
    ]
)

CHUNK_READINGS = 200_000
"""Readings simulated at a time, so that the work stays in the cache."""


def samples_at(n: int) -> int:
    """Samples simulated at n, for every step and coefficient."""
    return int(min(40_000, max(10_000, 1e8 // n)))


def tau_of(coefficient: FloatArray | float) -> FloatArray:
    """tau_4 of an AR(1): (1 + c^4) / (1 - c^4)."""
    fourth = np.power(coefficient, 4.0)
    return np.asarray((1.0 + fourth) / (1.0 - fourth), dtype=np.float64)


def autoregressive(rng: np.random.Generator, samples: int, n: int, coefficient: float) -> FloatArray:
    """Stationary AR(1) normal series of unit variance, float64[samples, n], row order along the last axis."""
    noise = rng.standard_normal((samples, n))
    if not coefficient:
        return noise
    # Not at the head of the module: it takes a noticeable part of a second to import, and screening does without.
    from scipy.signal import lfilter

    innovation = np.sqrt(1.0 - coefficient**2)
    noise[:, 0] /= innovation
    return np.asarray(lfilter([innovation], [1.0, -coefficient], noise, axis=1), dtype=np.float64)


def simulated_node(n: int, coefficient: float, rule: str, samples: int, rng: np.random.Generator) -> FloatArray:
    """Quantiles of ln(1 - r) at PROBABILITIES, unrounded and for each step: float64[1 + STEPS, probabilities]."""
    score = unit_score(family_named("normal").quantile(plotting_positions(n, rule)))
    gaps = np.empty((1 + len(STEPS), samples))
    chunk = max(1, CHUNK_READINGS // n)
    for first in range(0, samples, chunk):
        stop = min(first + chunk, samples)
        ordered = np.sort(autoregressive(rng, stop - first, n, coefficient), axis=1)
        spread = standard_deviation(ordered)
        gaps[0, first:stop] = ordered_gap(ordered, spread, score)
        for row, in_sd in enumerate(STEPS, start=1):
            gaps[row, first:stop] = rounded_gap(ordered, spread, in_sd, score, rng)
    # A sample that is rounded to one value has no r; it would not be scored.
    quantiles = np.nanquantile(gaps, 1.0 - PROBABILITIES, axis=1, method="weibull").T
    return np.asarray(np.log(np.maximum(quantiles, 1e-16)), dtype=np.float64)


def ordered_gap(ordered: FloatArray, spread: FloatArray, score: FloatArray) -> FloatArray:
    """1 - r of sorted samples, float64[samples, n], of that standard deviation, with a unit score, float64[n]."""
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(1.0 - (ordered @ score) / (spread * np.sqrt(ordered.shape[1])), dtype=np.float64)


def rounded_gap(
    ordered: FloatArray, spread: FloatArray, in_sd: float, score: FloatArray, rng: np.random.Generator
) -> FloatArray:
    """1 - r of the samples rounded to a step that is in_sd of their rounded standard deviation; NaN without spread.

    Rounding adds a twelfth of the squared step to the variance, but for chance; what that chance does to the step in
    standard deviations, and so to 1 - r, is taken out, since a channel's own step in standard deviations is known.
    """
    scale = np.sqrt(1.0 - in_sd**2 / 12.0) / (in_sd * spread)
    # Sorted readings stay sorted when they are rounded.
    counts = ordered * scale[:, None]
    counts += rng.random((spread.size, 1))
    np.rint(counts, out=counts)
    deviation = standard_deviation(counts)
    gap = ordered_gap(counts, deviation, score)
    with np.errstate(divide="ignore"):
        chance = lost_to_rounding(1.0 / deviation) - lost_to_rounding(in_sd)
    return np.asarray(np.maximum(gap - chance, 0.2 * gap), dtype=np.float64)


def standard_deviation(readings: FloatArray) -> FloatArray:
    """The standard deviation of each row of readings whose mean is no larger than a few of them, float64[samples]."""
    n = readings.shape[1]
    mean = readings @ np.full(n, 1.0 / n)
    return np.asarray(np.sqrt(np.maximum(np.vecdot(readings, readings) / n - mean * mean, 0.0)), dtype=np.float64)


def lost_to_rounding(step_in_sd: FloatArray | float) -> FloatArray:
    """1 - r of a normal channel of very many readings, rounded to a step in its rounded standard deviations."""
    return np.asarray(1.0 - np.sqrt(1.0 - np.minimum(np.square(step_in_sd) / 12.0, 0.99)), dtype=np.float64)


@dataclass(frozen=True, slots=True)
class MatchedTable:
    """Quantiles of ln(1 - r) over n, dependence and step."""

    sizes: IntArray
    """[N]"""
    log_gap: FloatArray
    """[N, coefficients, 1 + steps, probabilities]"""

    def rows(self, n: IntArray, step: FloatArray, tau: FloatArray) -> NullRows:
        """The null of each of C channels of n readings, step in standard deviations (0: none), and tau_4."""
        along_tau = tau_weights(tau)
        gap = self._at(np.clip(n, self.sizes[0], self.sizes[-1]), along_tau, step_weights(step))
        beyond = np.flatnonzero(n > self.sizes[-1])
        if beyond.size:
            gap[beyond] = self._continued(n[beyond], along_tau.of(beyond), gap[beyond])
        gap = np.minimum.accumulate(gap, axis=1)
        # Below the smallest tabled p an exponential tail with the slope of the last two.
        scale = np.maximum(gap[:, 0] - gap[:, 1], 1e-3) / np.log(PROBABILITIES[1] / PROBABILITIES[0])
        return NullRows(PROBABILITIES, gap, np.zeros(n.size), scale, np.full(n.size, PROBABILITIES[0]))

    def _at(self, n: IntArray, along_tau: "Weights", along_step: "Weights") -> FloatArray:
        """Interpolated ln(1 - r), float64[C, probabilities]."""
        along_n = weights_at(np.log(self.sizes), np.log(n))
        first, second = along_n.index[:, :, None, None], along_tau.index[:, None, :, None]
        nodes = self.log_gap[first, second, along_step.index[:, None, None, :]].reshape(n.size, -1, PROBABILITIES.size)
        both = along_n.weight[:, :, None] * along_tau.weight[:, None, :]
        weight = (both[:, :, :, None] * along_step.weight[:, None, None, :]).reshape(n.size, 1, -1)
        return np.asarray(np.matmul(weight, nodes)[:, 0], dtype=np.float64)

    def _continued(self, n: IntArray, along_tau: "Weights", last: FloatArray) -> FloatArray:
        """ln(1 - r) beyond the largest n: the trend of unrounded channels, and what rounding adds at the largest n."""
        unrounded = step_weights(np.zeros(n.size))
        trend = self._at(n, along_tau, unrounded)
        added = np.exp(last) - np.exp(self._at(np.full(n.size, self.sizes[-1]), along_tau, unrounded))
        return np.asarray(np.log(np.exp(trend) + np.maximum(added, 0.0)), dtype=np.float64)


@dataclass(frozen=True, slots=True)
class Weights:
    """Which nodes each of C places is interpolated from, and their weights."""

    index: IntArray
    """[C, K]"""
    weight: FloatArray
    """[C, K]"""

    def of(self, places: IntArray) -> "Weights":
        """Those of some of the places."""
        return Weights(self.index[places], self.weight[places])


def within_table(n: IntArray, step: FloatArray, tau: FloatArray) -> NDArray[np.bool_]:
    """Whether conditions lie in what is tabled, [C]; beyond the largest n the table goes on."""
    largest = float(tau_of(COEFFICIENTS[-1]))
    return np.asarray((n >= SIZES[0]) & (step <= STEPS[-1]) & (tau <= largest), dtype=np.bool_)


def tau_weights(tau: FloatArray) -> Weights:
    """Weights of the tabled coefficients at tau_4, by ln tau_4."""
    return weights_at(np.log(tau_of(np.array(COEFFICIENTS))), np.log(np.maximum(tau, 1.0)))


def step_weights(step: FloatArray) -> Weights:
    """Weights of no rounding, node 0, and of the tabled steps, from node 1; below the first step by its square."""
    inside = weights_at(np.log(np.array(STEPS)), np.log(np.clip(step, STEPS[0], STEPS[-1])))
    share = np.minimum(step / STEPS[0], 1.0)[:, None] ** 2
    index = np.concatenate([np.zeros_like(inside.index[:, :1]), 1 + inside.index], axis=1)
    return Weights(index, np.concatenate([1.0 - share, share * inside.weight], axis=1))


def weights_at(nodes: FloatArray, at: FloatArray) -> Weights:
    """Weights of four nodes at each place: cubic between them, straight through the last two beyond."""
    first = np.clip(np.searchsorted(nodes, at) - 2, 0, nodes.size - 4)
    index = first[:, None] + np.arange(4)
    x = nodes[index]
    cubic = np.ones((at.size, 4))
    for i in range(4):
        for other in range(4):
            if other != i:
                cubic[:, i] *= (at - x[:, other]) / (x[:, i] - x[:, other])
    beyond = at > nodes[-1]
    slope = (at[beyond] - nodes[-1]) / (nodes[-1] - nodes[-2])
    cubic[beyond] = np.stack([0.0 * slope, 0.0 * slope, -slope, 1.0 + slope], axis=1)
    return Weights(index, cubic)
