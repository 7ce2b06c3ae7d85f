"""The scores of a block of channels: r, critical value and p against every family."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.correlation import Fits, fit_families
from screener.stats.families import Family
from screener.stats.families.family import FloatArray
from screener.stats.null.nulls import Nulls
from screener.stats.ordering import sort_in_place
from screener.stats.points import kept_ranks
from screener.stats.row_order import kept_in_order

FEWEST = 3
"""Readings without which a plot has no shape."""


@dataclass(frozen=True, slots=True)
class Scoring:
    """C channels against F families; NaN where a channel is not scored or outside a family's support."""

    n: NDArray[np.int64]
    """[C] finite readings."""
    missing: NDArray[np.int64]
    """[C] readings absent or infinite."""
    reasons: tuple[str, ...]
    """[C] why the channel is not scored; empty where it is."""
    fits: Fits
    critical_r: FloatArray
    """[C, F]"""
    p: FloatArray
    """[C, F]"""
    extrapolated: NDArray[np.bool_]
    """[C, F] p lies below what was simulated and is read from the fitted tail."""
    points: tuple[FloatArray, ...]
    """[C] sorted readings at `kept_ranks(n)`."""
    in_order: FloatArray
    """[C, k] readings in row order, as `kept_in_order` keeps them."""


def score(readings: FloatArray, families: Sequence[Family], nulls: Nulls, alpha: float) -> Scoring:
    """Score readings, float64[C, rows], which are sorted in place."""
    in_order = kept_in_order(readings)
    n = sort_in_place(readings)
    scored = _scorable(readings, n)
    reasons = [""] * n.size
    for channel in np.flatnonzero(~scored):
        reasons[channel] = _reason(readings[channel], int(n[channel]))
    fits = fit_families(readings, np.where(scored, n, 0), families, nulls.rule)
    critical, p, extrapolated = _against_null(fits, n, families, nulls, alpha)
    return Scoring(
        n, readings.shape[1] - n, tuple(reasons), fits, critical, p, extrapolated, _kept(readings, n), in_order
    )


def _scorable(ordered: FloatArray, n: NDArray[np.int64]) -> NDArray[np.bool_]:
    """Which channels of sorted readings have enough of them, and spread."""
    each = np.arange(n.size)
    return np.asarray((n >= FEWEST) & (ordered[each, 0] < ordered[each, np.maximum(n - 1, 0)]), dtype=np.bool_)


def _kept(ordered: FloatArray, n: NDArray[np.int64]) -> tuple[FloatArray, ...]:
    """The sorted readings of each channel that its plots need."""
    kept: list[FloatArray] = [np.empty(0)] * n.size
    for size in np.unique(n):
        rows = np.flatnonzero(n == size)
        for row, readings in zip(rows, ordered[np.ix_(rows, kept_ranks(int(size)))], strict=True):
            kept[row] = readings
    return tuple(kept)


def _reason(ordered: FloatArray, n: int) -> str:
    """Why sorted readings cannot be scored."""
    if n == 0:
        return "no finite reading"
    if n < FEWEST:
        return f"too few readings: {n}, at least {FEWEST} are needed"
    return f"constant: all {n} readings are {ordered[0]:g}"


def _against_null(
    fits: Fits, n: NDArray[np.int64], families: Sequence[Family], nulls: Nulls, alpha: float
) -> tuple[FloatArray, FloatArray, NDArray[np.bool_]]:
    """Critical value, p, and whether p is extrapolated, each [C, F]."""
    critical, p = np.full_like(fits.r, np.nan), np.full_like(fits.r, np.nan)
    extrapolated = np.zeros(fits.r.shape, dtype=np.bool_)
    for column, family in enumerate(families):
        fitted = np.flatnonzero(~np.isnan(fits.r[:, column]))
        if fitted.size:
            null, row = nulls.rows(family, n[fitted], fits.steps[fitted, column])
            critical[fitted, column] = null.critical(alpha)[row]
            p[fitted, column] = null.p_against(fits.r[fitted, column], row, alpha)
            extrapolated[fitted, column] = p[fitted, column] < null.floor[row]
    return critical, p, extrapolated
