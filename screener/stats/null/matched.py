"""The null of r for normal channels in their own condition: rounded, and following themselves in time.

Samples are drawn from first-order autoregressive normal series, sorted, and rounded to a lattice of random phase whose
step is a given share of their own standard deviation, since that is how a channel's step is known. A
series with another autocorrelation is represented by the AR(1) with the same tau_4 = 1 + 2 sum rho_k^4, since what
inflates the null of r is the dependence of the third and fourth Hermite components (Lomnicki 1961; Gasser 1975).
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.correlation import fit_families
from screener.stats.families import family_named
from screener.stats.families.family import FloatArray
from screener.stats.null.table import NullRows

IntArray = NDArray[np.int64]

SIZES = (10, 16, 25, 40, 65, 100, 160, 250, 400, 650, 1000, 1700, 3000, 5500, 10_000, 30_000)
"""n tabled; beyond the last the trend in ln n goes on."""

STEPS = (0.004, 0.008, 0.016, 0.032, 0.06, 0.1, 0.15, 0.2, 0.25, 0.3, 0.4, 0.5, 0.6, 0.75, 0.9, 1.1, 1.4)
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

CHUNK_READINGS = 1_000_000


def samples_at(n: int) -> int:
    """Samples simulated at n, for every step and coefficient."""
    return int(min(20_000, max(4000, 4e7 // n)))


def tau_of(coefficient: FloatArray | float) -> FloatArray:
    """tau_4 of an AR(1): (1 + c^4) / (1 - c^4)."""
    fourth = np.power(coefficient, 4.0)
    return np.asarray((1.0 + fourth) / (1.0 - fourth), dtype=np.float64)


def autoregressive(rng: np.random.Generator, samples: int, n: int, coefficient: float) -> FloatArray:
    """Stationary AR(1) normal series of unit variance, float64[samples, n], row order along the last axis."""
    series = rng.standard_normal((n, samples))
    if coefficient:
        innovation = np.sqrt(1.0 - coefficient**2)
        for row in range(1, n):
            series[row] *= innovation
            series[row] += coefficient * series[row - 1]
    return np.ascontiguousarray(series.T)


def simulated_node(n: int, coefficient: float, rule: str, samples: int, rng: np.random.Generator) -> FloatArray:
    """Quantiles of ln(1 - r) at PROBABILITIES, unrounded and for each step: float64[1 + STEPS, probabilities]."""
    gaps = np.empty((1 + len(STEPS), samples))
    chunk = max(1, CHUNK_READINGS // n)
    for first in range(0, samples, chunk):
        stop = min(first + chunk, samples)
        ordered = np.sort(autoregressive(rng, stop - first, n, coefficient), axis=1)
        gaps[0, first:stop] = log_gap(ordered, rule)
        spread = ordered.std(axis=1, keepdims=True)
        for row, in_sd in enumerate(STEPS, start=1):
            # A channel's step is known over the standard deviation of its own rounded readings, whose square is larger
            # by a twelfth of the step's: each sample gets the lattice that looks like this step.
            step = in_sd * spread / np.sqrt(1.0 - in_sd**2 / 12.0)
            phase = rng.random((stop - first, 1))
            # Sorted readings stay sorted when they are rounded.
            gaps[row, first:stop] = log_gap(step * np.round(ordered / step + phase), rule)
    # A sample that is rounded to one value has no r; it would not be scored.
    return np.asarray(np.nanquantile(gaps, 1.0 - PROBABILITIES, axis=1, method="weibull").T, dtype=np.float64)


def log_gap(ordered: FloatArray, rule: str) -> FloatArray:
    """ln(1 - r) of sorted samples against the normal, float64[samples]; NaN without spread."""
    n = np.full(ordered.shape[0], ordered.shape[1])
    r = fit_families(ordered, n, [family_named("normal")], rule).r[:, 0]
    return np.asarray(np.log(np.maximum(1.0 - r, 1e-16)), dtype=np.float64)


@dataclass(frozen=True, slots=True)
class MatchedTable:
    """Quantiles of ln(1 - r) over n, dependence and step."""

    sizes: IntArray
    """[N]"""
    log_gap: FloatArray
    """[N, coefficients, 1 + steps, probabilities]"""

    def rows(self, n: IntArray, step: FloatArray, tau: FloatArray) -> NullRows:
        """The null of each of C channels of n readings, step in standard deviations (0: none), and tau_4."""
        along_n = _weights(np.log(self.sizes), np.log(np.maximum(n, self.sizes[0])))
        along_tau = _weights(np.log(tau_of(np.array(COEFFICIENTS))), np.log(np.maximum(tau, 1.0)))
        along_step = step_weights(step)
        at_n = np.einsum("cn,nasp->casp", along_n, self.log_gap)
        gap = np.einsum("ca,cs,casp->cp", along_tau, along_step, at_n)
        gap = np.minimum.accumulate(gap, axis=1)
        # Below the smallest tabled p an exponential tail with the slope of the last two.
        scale = np.maximum(gap[:, 0] - gap[:, 1], 1e-3) / np.log(PROBABILITIES[1] / PROBABILITIES[0])
        return NullRows(PROBABILITIES, gap, np.zeros(n.size), scale, np.full(n.size, PROBABILITIES[0]))


def step_weights(step: FloatArray) -> FloatArray:
    """Weights of no rounding and of the tabled steps, float64[C, 1 + steps]; below the first by its square."""
    nodes = np.log(np.array(STEPS))
    inside = _weights(nodes, np.log(np.clip(step, STEPS[0], STEPS[-1])))
    share = np.minimum(step / STEPS[0], 1.0) ** 2
    return np.concatenate([(1.0 - share)[:, None], share[:, None] * inside], axis=1)


def _weights(nodes: FloatArray, at: FloatArray) -> FloatArray:
    """Weights of all nodes at each place, float64[C, nodes]: cubic between them, straight beyond the last."""
    weights = np.zeros((at.size, nodes.size))
    first = np.clip(np.searchsorted(nodes, at) - 2, 0, nodes.size - 4)
    index = first[:, None] + np.arange(4)
    x = nodes[index]
    cubic = np.ones((at.size, 4))
    for i in range(4):
        for other in range(4):
            if other != i:
                cubic[:, i] *= (at - x[:, other]) / (x[:, i] - x[:, other])
    np.put_along_axis(weights, index, cubic, axis=1)
    beyond = at > nodes[-1]
    slope = (at[beyond] - nodes[-1]) / (nodes[-1] - nodes[-2])
    weights[beyond] = 0.0
    weights[beyond, -1], weights[beyond, -2] = 1.0 + slope, -slope
    return weights
