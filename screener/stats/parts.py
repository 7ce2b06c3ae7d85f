"""Mean and spread of the parts of a record, such as the files that it was joined from."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
COLUMNS = ("n", "mean", "sd")


def part_summaries(readings: FloatArray, starts: Sequence[int]) -> FloatArray:
    """n, mean and standard deviation (over n - 1) of the finite readings of each part, float64[C, parts, 3].

    readings, float64[C, rows], are in row order; a part begins at each of the increasing `starts` and ends at the
    next. Where a figure is not defined it is NaN.
    """
    told = np.full((len(readings), len(starts), len(COLUMNS)), np.nan)
    ends = [*starts, readings.shape[1]]
    for part, start in enumerate(starts):
        told[:, part] = _summaries(readings[:, start : ends[part + 1]])
    return told


def _summaries(readings: FloatArray) -> FloatArray:
    """n, mean and standard deviation of each row, float64[C, 3]."""
    known = np.isfinite(readings)
    n = known.sum(axis=1)
    # Powers of two leave every digit, and squares of large readings within range.
    exponent = np.frexp(np.max(np.abs(readings), axis=1, initial=0.0, where=known))[1]
    near = np.ldexp(np.where(known, readings, 0.0), -exponent[:, None])
    mean = np.divide(near.sum(axis=1), n, out=np.full(n.size, np.nan), where=n > 0)
    away = np.where(known, near - mean[:, None], 0.0)
    # The second term is what rounding of the mean would add.
    squares = np.square(away).sum(axis=1) - np.divide(away.sum(axis=1) ** 2, np.maximum(n, 1))
    variance = np.divide(squares, n - 1, out=np.full(n.size, np.nan), where=n > 1)
    with np.errstate(over="ignore"):
        return np.column_stack([n, np.ldexp(mean, exponent), np.ldexp(np.sqrt(variance), exponent)])


def share_between(summaries: FloatArray) -> float:
    """The share of a channel's sum of squares that lies between its parts, eta squared; NaN where there is none.

    summaries are float64[parts, 3], of one channel. Source: R. A. Fisher (1925), Statistical Methods for Research
    Workers, analysis of variance between and within classes.
    """
    n, mean, sd = summaries[summaries[:, 0] > 0].T
    if n.size < 2:
        return float("nan")
    size = np.abs(mean).max() + np.nan_to_num(sd).max()
    mean, sd = (mean, np.nan_to_num(sd)) if size == 0 else (mean / size, np.nan_to_num(sd) / size)
    between = float(np.sum(n * (mean - np.average(mean, weights=n)) ** 2))
    within = float(np.sum((n - 1) * sd**2))
    return between / (between + within) if between + within > 0 else float("nan")
