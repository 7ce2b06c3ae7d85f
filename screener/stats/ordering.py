"""Sorted, centred and scaled readings: what every correlation starts from."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.families.family import FloatArray


def sort_in_place(readings: FloatArray) -> NDArray[np.int64]:
    """Count the finite readings, int64[channels], and sort each channel in place: finite ones first, NaN after.

    Infinite readings become NaN.
    """
    readings[np.isinf(readings)] = np.nan
    readings.sort(axis=-1)
    missing = np.count_nonzero(np.isnan(readings), axis=-1)
    return np.asarray(readings.shape[-1] - missing, dtype=np.int64)


@dataclass(frozen=True, slots=True)
class Standardised:
    """Sorted readings of channels with the same n, as unit vectors, and the way back to their units."""

    unit: FloatArray
    """[C, n] centred, of unit length; zero where the channel is constant."""
    mean: FloatArray
    """[C] in the channel's units."""
    length: FloatArray
    """[C] root of the sum of squared deviations, in the channel's units; 0 where constant."""


def standardised(ordered: FloatArray) -> Standardised:
    """Unit vectors of sorted complete readings, float64[C, n], for any offset and any scale.

    The readings are first brought near 1 by a power of two, then the middle one is subtracted, which costs no digits,
    so that neither squares nor a large common offset spoil the result.
    """
    _, largest = np.frexp(np.maximum(np.abs(ordered[:, 0]), np.abs(ordered[:, -1])))
    near = np.ldexp(ordered, -largest[:, None])
    middle = near[:, ordered.shape[1] // 2].copy()
    near -= middle[:, None]
    _, widest = np.frexp(np.maximum(-near[:, 0], near[:, -1]))
    near = np.ldexp(near, -widest[:, None])
    mean = near.mean(axis=1)
    near -= mean[:, None]
    length = np.sqrt(np.einsum("ij,ij->i", near, near))
    near /= np.where(length > 0.0, length, 1.0)[:, None]
    return Standardised(
        unit=near,
        mean=np.ldexp(middle + np.ldexp(mean, widest), largest),
        length=np.ldexp(length, widest + largest),
    )


def logarithms(ordered: FloatArray) -> tuple[FloatArray, FloatArray]:
    """ln x - offset of sorted positive readings, float64[C, n], and the offset, float64[C].

    A channel that stays within a factor of two of its middle reading m has the offset ln m and keeps all digits of its
    small ln(x / m); any other channel has the offset 0.
    """
    middle = ordered[:, ordered.shape[1] // 2]
    narrow = (ordered[:, 0] > 0.5 * middle) & (ordered[:, -1] < 2.0 * middle)
    logs = np.empty_like(ordered)
    centre = middle[narrow, None]
    logs[narrow] = np.log1p((ordered[narrow] - centre) / centre)
    logs[~narrow] = np.log(ordered[~narrow])
    return logs, np.where(narrow, np.log(middle), 0.0)
