"""The scores of a block of channels: r, critical value and p against every family."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.conditions import Conditions, conditions_of, find_conditions
from screener.stats.correlation import Fits, fit_families
from screener.stats.families import Family
from screener.stats.families.family import FloatArray
from screener.stats.null.matched import MatchedTable
from screener.stats.null.nulls import Nulls
from screener.stats.ordering import sort_in_place
from screener.stats.points import kept_ranks
from screener.stats.row_order import kept_in_order

FEWEST = 3
"""Readings without which a plot has no shape."""

FEWEST_DISTINCT = 4
"""Distinct readings without which a plot is a stair of two or three steps."""

COARSE = 0.5
"""Steps, in standard deviations, below which distinct readings cannot be so few."""

MATCHED_FAMILY = "normal"


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
    plain_critical_r: FloatArray
    """[C, F] the textbook value, for independent, unrounded, complete readings."""
    conditions: Conditions


def score(
    readings: FloatArray, families: Sequence[Family], nulls: Nulls, alpha: float, *, match: bool = True
) -> Scoring:
    """Score readings in row order, float64[C, rows].

    With `match`, a channel that is rounded or follows itself in time is held against the normal family by the critical
    value of a normal channel in the same condition; other families keep the plain one.
    """
    ordered = readings.copy()
    n = sort_in_place(ordered)
    scored = _scorable(ordered, n)
    conditions = find_conditions(readings, ordered, n)
    fits = fit_families(ordered, np.where(scored, n, 0), families, nulls.rule)
    plain, p, extrapolated = _against_null(fits, n, families, nulls, alpha)
    critical = plain.copy()
    if match and nulls.matched is not None:
        for column in (place for place, family in enumerate(families) if family.name == MATCHED_FAMILY):
            _match(column, fits, conditions, nulls.matched, alpha, critical, p, extrapolated)
    return Scoring(
        n=n,
        missing=readings.shape[1] - n,
        reasons=_reasons(ordered, n, scored, conditions),
        fits=fits,
        critical_r=critical,
        p=p,
        extrapolated=extrapolated,
        points=_kept(ordered, n),
        in_order=kept_in_order(readings),
        plain_critical_r=plain,
        conditions=conditions,
    )


def _match(
    column: int,
    fits: Fits,
    conditions: Conditions,
    table: MatchedTable,
    alpha: float,
    critical: FloatArray,
    p: FloatArray,
    extrapolated: NDArray[np.bool_],
) -> None:
    """Replace the critical value and p of one family where the channel's condition calls for it."""
    r = fits.r[:, column]
    at = np.flatnonzero((conditions.rounded | conditions.serial) & ~np.isnan(r))
    if at.size:
        step = np.where(conditions.rounded, conditions.step_in_sd, 0.0)[at]
        tau = np.where(conditions.serial, conditions.tau_4, 1.0)[at]
        null, each = table.rows(conditions.n[at], step, tau), np.arange(at.size)
        critical[at, column] = null.critical(alpha)
        p[at, column] = null.p_against(r[at], each, alpha)
        extrapolated[at, column] = p[at, column] < null.floor


def _reasons(
    ordered: FloatArray, n: NDArray[np.int64], scored: NDArray[np.bool_], conditions: Conditions
) -> tuple[str, ...]:
    """Why each channel is not scored; empty where it is."""
    reasons = [""] * n.size
    coarse = np.flatnonzero(scored & (conditions.step_in_sd >= COARSE))
    distinct = 1 + np.count_nonzero(np.diff(ordered[coarse], axis=1) > 0.0, axis=1)
    for channel, count in zip(coarse[distinct < FEWEST_DISTINCT], distinct[distinct < FEWEST_DISTINCT], strict=True):
        reasons[channel] = f"only {count} distinct readings, at least {FEWEST_DISTINCT} are needed"
    for channel in np.flatnonzero(scored & (conditions.stuck > 0.5 * n)):
        reasons[channel] = conditions_of(conditions, int(channel))
    for channel in np.flatnonzero(scored & conditions.drifting):
        reasons[channel] = conditions_of(conditions, int(channel))
    for channel in np.flatnonzero(~scored):
        reasons[channel] = _reason(ordered[channel], int(n[channel]))
    return tuple(reasons)


def _scorable(ordered: FloatArray, n: NDArray[np.int64]) -> NDArray[np.bool_]:
    """Which channels of sorted readings have enough of them, and spread."""
    each = np.arange(n.size)
    return np.asarray((n >= FEWEST) & (ordered[each, 0] < ordered[each, np.maximum(n - 1, 0)]), dtype=np.bool_)


def _kept(ordered: FloatArray, n: NDArray[np.int64]) -> tuple[FloatArray, ...]:
    """The sorted readings of each channel that its plots need."""
    kept: list[FloatArray] = [np.empty(0)] * n.size
    for size in np.unique(n):
        rows = np.flatnonzero(n == size)
        place = rows[:, None] * ordered.shape[1] + kept_ranks(int(size))
        for row, readings in zip(rows, ordered.ravel().take(place), strict=True):
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
