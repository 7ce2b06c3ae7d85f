"""A channel's departure in a few steps from its low to its high tail, small enough for a cell of a table."""

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

PLACES = 8
"""Steps from the low to the high tail."""
LEVELS = 9
"""Sizes of departure told apart; the middle one is none."""
NONE, LARGE = 0.1, 1.0
"""Departures in standard deviations: below the first nothing is drawn, from the second on nothing larger."""


def strips(points: FloatArray, expected: FloatArray, scale: FloatArray) -> list[str]:
    """One string of PLACES digits for each channel: `4` on the line, `8` far above and `0` far below it.

    points and expected are float64[C, m], rising along m; scale is float64[C].
    """
    if points.size == 0:
        return [""] * points.shape[0]
    actual = _at_places(points, expected)
    off = (actual[0] - actual[1]) / np.where(scale > 0, scale, np.nan)[:, None]
    return ["".join(map(str, row)) for row in _levels(off).tolist()]


def _at_places(points: FloatArray, expected: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Mean actual and expected value around each of PLACES even steps of the expected values, both [C, PLACES]."""
    low, high = expected[:, :1], expected[:, -1:]
    place = np.clip((expected - low) / np.where(high > low, high - low, 1.0) * PLACES, 0, PLACES - 1e-9).astype(
        np.int64
    )
    cell = place + PLACES * np.arange(points.shape[0])[:, None]
    size = PLACES * points.shape[0]
    count = np.bincount(cell.ravel(), minlength=size)
    with np.errstate(invalid="ignore", divide="ignore"):
        actual = np.bincount(cell.ravel(), points.ravel(), minlength=size) / count
        wanted = np.bincount(cell.ravel(), expected.ravel(), minlength=size) / count
    return actual.reshape(-1, PLACES), wanted.reshape(-1, PLACES)


def _levels(off: FloatArray) -> NDArray[np.int64]:
    """Levels of departures in standard deviations, finer near none; the middle one where there is no reading."""
    half = LEVELS // 2
    size = np.clip(np.log(np.maximum(np.abs(off), NONE) / NONE) / np.log(LARGE / NONE), 0.0, 1.0)
    steps = np.where(np.isnan(off), 0.0, np.sign(off) * np.ceil(size * half))
    return half + steps.astype(np.int64)
