"""The scores of a block of channels: r, critical value and p against every family."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from screener.stats.censoring import Censoring, censoring_of, distinct_uncensored, refit
from screener.stats.conditions import Conditions, conditions_of, find_conditions
from screener.stats.correlation import Fits, fit_families
from screener.stats.families import Family
from screener.stats.families.family import FloatArray
from screener.stats.found import Found
from screener.stats.matching import TABLED_FAMILY, Judgement, Matching, judged_in_doubt, textbook
from screener.stats.null.condition import FEWEST_DISTINCT
from screener.stats.null.nulls import Nulls
from screener.stats.null.on_demand import SimulatedNulls
from screener.stats.ordering import sort_in_place
from screener.stats.points import kept_ranks
from screener.stats.row_order import kept_in_order

FEWEST = 3
"""Readings without which a plot has no shape."""

COARSE = 0.5
"""Steps, in standard deviations, below which distinct readings cannot be so few."""


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
    readings: FloatArray,
    families: Sequence[Family],
    nulls: Nulls,
    alpha: float,
    *,
    match: bool = True,
    held: NDArray[np.int64] | None = None,
    simulated: SimulatedNulls | None = None,
    below: NDArray[np.int64] | None = None,
    above: NDArray[np.int64] | None = None,
) -> Scoring:
    """Score readings in row order, float64[C, rows].

    With `match`, a channel that is rounded, clipped, or follows itself in time is held against a family by the critical
    value of samples of that family in the same condition; r of a clipped channel is that of its unclipped readings.
    `held`, int64[C], says which of the families each channel is held against (the normal family, or else the first);
    what no table holds is simulated for that family alone. `below` and `above`, int64[C], count the readings that stand
    at a detection limit and are known only to lie below it, or above it.
    Raises: Cancelled, when simulating is given up.
    """
    ordered = readings.copy()
    n = sort_in_place(ordered)
    scored = _scorable(ordered, n)
    conditions = _limited(find_conditions(readings, ordered, n), below, above)
    fits = fit_families(ordered, np.where(scored, n, 0), families, nulls.rule)
    censoring = censoring_of(conditions, ordered)
    reasons = _reasons(ordered, n, scored, conditions, censoring)
    judge = np.array([not reason for reason in reasons], dtype=np.bool_)
    if match:
        refit(fits, ordered, censoring, np.flatnonzero(judge & censoring.some), families, nulls.rule)
    plain = textbook(fits, n, families, nulls, alpha)
    judgement = Judgement(plain.critical_r.copy(), plain.p.copy(), plain.extrapolated.copy())
    if match:
        found = Found(families, fits, conditions, censoring, nulls.rule)
        matching = Matching(found, nulls, simulated or SimulatedNulls(), alpha)
        conditions = judged_in_doubt(matching, judgement, _held(held, families, n.size), judge, ordered)
        if conditions is not found.conditions:
            reasons = _reasons(ordered, n, scored, conditions, censoring_of(conditions, ordered))
    return Scoring(
        n=n,
        missing=readings.shape[1] - n,
        reasons=reasons,
        fits=fits,
        critical_r=judgement.critical_r,
        p=judgement.p,
        extrapolated=judgement.extrapolated,
        points=_kept(ordered, n),
        in_order=kept_in_order(readings),
        plain_critical_r=plain.critical_r,
        conditions=conditions,
    )


def _limited(conditions: Conditions, below: NDArray[np.int64] | None, above: NDArray[np.int64] | None) -> Conditions:
    """Conditions with the readings beyond detection limits."""
    if below is not None:
        conditions = replace(conditions, below=below)
    return conditions if above is None else replace(conditions, above=above)


def _held(held: NDArray[np.int64] | None, families: Sequence[Family], channels: int) -> NDArray[np.int64]:
    if held is not None:
        return held
    names = [family.name for family in families]
    return np.full(channels, names.index(TABLED_FAMILY) if TABLED_FAMILY in names else 0)


def _reasons(
    ordered: FloatArray,
    n: NDArray[np.int64],
    scored: NDArray[np.bool_],
    conditions: Conditions,
    censoring: Censoring,
) -> tuple[str, ...]:
    """Why each channel is not scored; empty where it is."""
    reasons = [""] * n.size
    coarse = np.flatnonzero(scored & (conditions.step_in_sd >= COARSE))
    distinct = distinct_uncensored(ordered, censoring, coarse)
    for channel, count in zip(coarse[distinct < FEWEST_DISTINCT], distinct[distinct < FEWEST_DISTINCT], strict=True):
        reasons[channel] = f"only {count} distinct readings, at least {FEWEST_DISTINCT} are needed"
    for channel in np.flatnonzero(scored & (censoring.most | (conditions.stuck > 0.5 * n))):
        reasons[channel] = conditions_of(conditions, int(channel))
    limited = (conditions.below > 0) | (conditions.above > 0)
    for channel in np.flatnonzero(scored & censoring.most & limited):
        beyond = int(censoring.low[channel] + censoring.high[channel])
        reasons[channel] = f"{beyond:,} of {n[channel]:,} readings lie beyond a limit: too few are known"
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
