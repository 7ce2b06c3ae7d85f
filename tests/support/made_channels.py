"""Simulated channels of known conditions, float64[channels, rows], and their conditions."""

import numpy as np
from numpy.typing import NDArray
from scipy import signal

from screener.stats.conditions import WORDS, Conditions, find_conditions, words_of
from screener.stats.ordering import sort_in_place

Readings = NDArray[np.float64]

SETTLING = 2_000
"""Readings left out at the start, so that an autoregression has forgotten where it began."""


def conditions(readings: Readings) -> Conditions:
    """The conditions of readings in row order."""
    ordered = readings.copy()
    n = sort_in_place(ordered)
    return find_conditions(readings, ordered, n)


def autoregression(rng: np.random.Generator, channels: int, rows: int, coefficients: tuple[float, ...]) -> Readings:
    """Normal readings of mean 0 that follow themselves; their innovations have standard deviation 1."""
    innovations = rng.standard_normal((channels, rows + SETTLING))
    followed: Readings = signal.lfilter([1.0], [1.0, *(-c for c in coefficients)], innovations, axis=1)
    return followed[:, SETTLING:].copy()


def true_tau(coefficients: tuple[float, ...], power: int) -> float:
    """1 + 2 sum rho_k^power of an autoregression, by the autocorrelation of its answer to an impulse."""
    impulse = np.zeros(20_000)
    impulse[0] = 1.0
    answer = signal.lfilter([1.0], [1.0, *(-c for c in coefficients)], impulse)
    rho = signal.correlate(answer, answer, method="fft")[answer.size - 1 :]
    return float(1.0 + 2.0 * np.sum((rho[1:] / rho[0]) ** power))


def rounded(rng: np.random.Generator, readings: Readings, step: float) -> Readings:
    """Readings on a lattice of random phase, one for each channel."""
    phase = rng.random((readings.shape[0], 1))
    return (np.rint(readings / step + phase) - phase) * step


def said(found: Conditions) -> dict[str, float]:
    """The share of channels for which each word is said."""
    words = [words_of(found, channel) for channel in range(found.n.size)]
    return {word: sum(word in of for of in words) / max(len(words), 1) for word in WORDS}
