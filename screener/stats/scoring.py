"""The scores of a block of channels: r, critical value and p against every family."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.correlation import Fits, fit_families
from screener.stats.families import Family
from screener.stats.families.family import FloatArray
from screener.stats.null.table import NullTable
from screener.stats.ordering import sort_in_place
from screener.stats.points import kept_ranks

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


def score(readings: FloatArray, families: Sequence[Family], table: NullTable, alpha: float) -> Scoring:
    """Score readings, float64[C, rows], which are sorted in place."""
    n = sort_in_place(readings)
    reasons = tuple(_reason(channel, int(count)) for channel, count in zip(readings, n, strict=True))
    scored = np.array([not reason for reason in reasons], dtype=np.bool_)
    fits = fit_families(readings, np.where(scored, n, 0), families, table.rule)
    critical, p, extrapolated = _against_null(fits.r, n, families, table, alpha)
    points = tuple(channel[kept_ranks(int(count))].copy() for channel, count in zip(readings, n, strict=True))
    return Scoring(n, readings.shape[1] - n, reasons, fits, critical, p, extrapolated, points)


def _reason(ordered: FloatArray, n: int) -> str:
    """Why sorted readings cannot be scored; empty when they can."""
    if n == 0:
        return "no finite reading"
    if n < FEWEST:
        return f"too few readings: {n}, at least {FEWEST} are needed"
    if ordered[0] == ordered[n - 1]:
        return f"constant: all {n} readings are {ordered[0]:g}"
    return ""


def _against_null(
    r: FloatArray, n: NDArray[np.int64], families: Sequence[Family], table: NullTable, alpha: float
) -> tuple[FloatArray, FloatArray, NDArray[np.bool_]]:
    """Critical value, p, and whether p is extrapolated, each [C, F]."""
    critical, p = np.full_like(r, np.nan), np.full_like(r, np.nan)
    extrapolated = np.zeros(r.shape, dtype=np.bool_)
    enough = np.flatnonzero(n >= FEWEST)
    sizes, row = np.unique(n[enough], return_inverse=True)
    if enough.size == 0:
        return critical, p, extrapolated
    for column, family in enumerate(families):
        if family.null_name not in table.families:
            continue
        null = table.rows(family.null_name, sizes)
        critical[enough, column] = null.critical(alpha)[row]
        p[enough, column] = null.p_against(r[enough, column], row, alpha)
        extrapolated[enough, column] = p[enough, column] < null.floor[row]
    critical[np.isnan(r)] = np.nan
    return critical, p, extrapolated
