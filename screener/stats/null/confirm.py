"""The null of r of one channel in its own autocorrelation: a normal process with the channel's own spectrum.

Samples are made by circulant embedding (Davies & Harte 1987, Biometrika 74; from memory), and recorded as the channel
is: its missing rows, clipping and rounding.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.conditions.serial import autocorrelation, before_rounding, restored
from screener.stats.families import family_named
from screener.stats.families.family import FloatArray
from screener.stats.null.condition import Condition, recorded_log_gaps
from screener.stats.null.underlying import underlying_rho

CHUNK_READINGS = 400_000
"""Readings simulated at a time."""


@dataclass(frozen=True, slots=True)
class OwnProcess:
    """A channel's readings as a process of the family that it is held against."""

    condition: Condition
    amplitude: FloatArray
    """[frequencies] root of the spectrum of the normal process behind the readings."""
    length: int
    """Rows of one turn of the process."""
    present: NDArray[np.bool_]
    """[rows] where a reading is."""


def own_process(readings: FloatArray, condition: Condition, step_in_sd: float) -> OwnProcess:
    """The process of a channel, float64[rows] in row order, in its condition.

    Its autocorrelation is the estimated one, with what the mean, rounding, clipping and the family took from it; it
    falls to 0 towards the longest lag as the number of pairs does.
    """
    rows, present = readings.size, np.isfinite(readings)
    window = 1.0 - np.arange(rows) / rows
    rho = np.nan_to_num(autocorrelation(readings[None, :])) / window
    rho = before_rounding(rho, np.array([step_in_sd]), 1)
    rho = restored(rho, rho[:, 1], np.array([condition.n]))[0]
    shares = condition.low / condition.n, condition.high / condition.n
    rho = underlying_rho(np.clip(rho, -1.0, 1.0), family_named(condition.family), condition.shapes, *shares) * window
    length = 1 << (2 * rows - 1).bit_length()
    around = np.zeros(length)
    around[:rows] = rho
    around[-rows + 1 :] = rho[:0:-1]
    around[0] = 1.0
    spectrum = np.maximum(np.fft.rfft(around).real, 0.0)
    return OwnProcess(condition, np.sqrt(spectrum), length, present)


def own_log_gaps(process: OwnProcess, samples: int, rng: np.random.Generator) -> FloatArray:
    """ln(1 - r) of samples of the process, float64[samples]; NaN where a sample has no r."""
    found = np.empty(samples)
    chunk = max(1, CHUNK_READINGS // process.length)
    for first in range(0, samples, chunk):
        count = min(chunk, samples - first)
        normal = np.sort(_series(process, count, rng), axis=1)
        found[first : first + count] = recorded_log_gaps(normal, process.condition, rng)
    return found


def _series(process: OwnProcess, samples: int, rng: np.random.Generator) -> FloatArray:
    """Readings of unit variance where the channel has some, float64[samples, n]."""
    noise = np.fft.rfft(rng.standard_normal((samples, process.length)), axis=1)
    series = np.fft.irfft(noise * process.amplitude, process.length, axis=1)
    power = process.amplitude[[0, -1]] ** 2
    variance = (2.0 * float(np.sum(process.amplitude**2)) - float(power.sum())) / process.length
    return np.asarray(series[:, : process.present.size][:, process.present] / np.sqrt(variance), dtype=np.float64)
