"""Simulated null distributions of r: sorted uniforms by exponential spacings, shared by all families."""

from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

from screener.stats.families.family import Family, FloatArray
from screener.stats.positions import plotting_positions

CHUNK_READINGS = 200_000
"""Readings simulated at a time, so that the work stays in the cache."""

LARGEST_BELOW_ONE = 1.0 - 2.0**-53

LOGIT_GRID = np.linspace(-36.0, 36.0, 14_401)


def sorted_uniforms(rng: np.random.Generator, samples: int, n: int) -> FloatArray:
    """Order statistics of uniform samples, float64[samples, n], each row increasing, without a sort.

    Source: partial sums of n + 1 exponential spacings over their total (Devroye 1986, Non-Uniform Random Variate
    Generation, ch. V).
    """
    sums = np.cumsum(rng.standard_exponential((samples, n + 1)), axis=1)
    return np.asarray(np.minimum(sums[:, :n] / sums[:, n:], LARGEST_BELOW_ONE), dtype=np.float64)


def sampling_quantile(family: Family) -> Callable[[FloatArray], FloatArray]:
    """The family's quantile function, read from a fine grid of ln(u / (1 - u)) where the exact one is costly."""
    if not family.costly:
        return family.quantile
    grid = family.quantile(1.0 / (1.0 + np.exp(-LOGIT_GRID)))

    def quantile(u: FloatArray) -> FloatArray:
        return np.asarray(np.interp(np.log(u) - np.log1p(-u), LOGIT_GRID, grid), dtype=np.float64)

    return quantile


def unit_score(quantiles: FloatArray) -> FloatArray:
    """Quantiles float64[n] centred and scaled to unit length, so that a dot product with readings gives r."""
    centred = quantiles - quantiles.mean()
    centred /= np.abs(centred).max()
    return np.asarray(centred / np.sqrt(centred @ centred), dtype=np.float64)


def simulated_log_gap(
    families: Sequence[Family], n: int, rule: str, samples: int, rng: np.random.Generator
) -> NDArray[np.float64]:
    """ln(1 - r) of samples that truly come from each family, float64[families, samples]."""
    u_expected = plotting_positions(n, rule)
    scores = [unit_score(family.quantile(u_expected)) for family in families]
    quantiles = [sampling_quantile(family) for family in families]
    gaps = np.empty((len(families), samples))
    chunk = max(1, CHUNK_READINGS // n)
    for first in range(0, samples, chunk):
        stop = min(first + chunk, samples)
        u = sorted_uniforms(rng, stop - first, n)
        for row, quantile, score in zip(gaps, quantiles, scores, strict=True):
            row[first:stop] = _log_gap(quantile(u), score)
    return gaps


def _log_gap(sample: FloatArray, score: FloatArray) -> FloatArray:
    """ln(1 - r) of each row of sample, float64[samples], with a unit score, float64[n]."""
    centred = sample - sample.mean(axis=1, keepdims=True)
    length = np.sqrt(np.einsum("ij,ij->i", centred, centred))
    r = (centred @ score) / length
    return np.asarray(np.log(np.maximum(1.0 - r, 1e-16)), dtype=np.float64)
