"""Two runs of the same channels: what is newly flagged, cleared, changed, missing, new.

A channel has changed when its r differs by more than chance explains: the difference is held against its standard error
(`stats.r_error`) in both runs, and the p of all channels are adjusted by Benjamini and Hochberg; changed means q below
the alpha of the new run. A channel that follows itself in time scatters as its effective number of readings says; the
readings of the two runs are taken to be independent of each other.
"""

from __future__ import annotations

from enum import StrEnum
from typing import TYPE_CHECKING, Any

import numpy as np
import polars as pl

from screener.records import Verdict
from screener.stats.families import Axis, family_named
from screener.stats.many import adjusted_p
from screener.stats.points import kept_ranks
from screener.stats.positions import plotting_positions
from screener.stats.r_error import change_p, r_error, worth

if TYPE_CHECKING:
    from screener.records import FloatArray
    from screener.runs.run_file import RunFile


class Change(StrEnum):
    """What became of a channel, in the order of weight."""

    NEWLY_FLAGGED = "newly flagged"
    CLEARED = "cleared"
    CHANGED = "changed"
    NO_LONGER_SCORED = "no longer scored"
    MISSING = "missing"
    NEW = "new"
    SAME = "same"


COMPARED: dict[str, type[int] | type[float] | type[str]] = {
    "channel": str,
    "change": str,
    "verdict_before": str,
    "verdict_now": str,
    "family_before": str,
    "family_now": str,
    "n_before": int,
    "n_now": int,
    "r_before": float,
    "r_now": float,
    "r_difference": float,
    "r_difference_error": float,
    "change_p": float,
    "change_q": float,
    "p_before": float,
    "p_now": float,
    "decision_before": str,
    "decision_now": str,
}
"""The columns of a comparison; new ones are appended."""

JUDGED_BY = ("family", "alpha", "control", "positions", "match", "expect", "missing")
"""Settings of a plan that verdicts depend on."""

_TAKEN = (
    "channel",
    "verdict",
    "family",
    "n",
    "r",
    "critical_r",
    "plain_critical_r",
    "n_effective",
    "p",
    "decision",
    "position",
)


def compared(before: RunFile, now: RunFile) -> pl.DataFrame:
    """One row per channel of either run, by name, in the order of the new run; those missing from it at the end."""
    old, new = before.results().select(_TAKEN), now.results().select(_TAKEN)
    both = new.join(old, on="channel", how="full", suffix="_old", coalesce=True, maintain_order="left_right")
    rows = both.join(_errors(now, new), on="position", how="left", maintain_order="left")
    rows = rows.join(_errors(before, old), left_on="position_old", right_on="position", how="left", suffix="_old")
    rows = rows.with_columns(error=(pl.col("error") ** 2 + pl.col("error_old") ** 2).sqrt())
    same_family = pl.col("family") == pl.col("family_old")
    difference = pl.when(same_family & pl.col("error").is_not_null()).then(pl.col("r") - pl.col("r_old"))
    rows = rows.with_columns(difference=difference)
    p = change_p(rows["difference"].fill_null(np.nan).to_numpy(), rows["error"].fill_null(np.nan).to_numpy())
    rows = rows.with_columns(change_p=pl.Series(p).fill_nan(None), change_q=pl.Series(adjusted_p(p)).fill_nan(None))
    return rows.with_columns(change=_change(now.plan.alpha)).select(_column(name) for name in COMPARED)


def unlike(before: RunFile, now: RunFile) -> str:
    """In what two runs were judged otherwise, so that verdicts may differ by it, in a sentence; empty when alike."""
    pairs = {name: (getattr(before.plan, name), getattr(now.plan, name)) for name in JUDGED_BY}
    pairs |= {"version": (before.version, now.version), "null tables": (before.null_version, now.null_version)}
    told = [f"{name} {_told(old)} and {_told(new)}" for name, (old, new) in pairs.items() if old != new]
    return f"Not judged alike: {'; '.join(told)}." if told else ""


def _told(value: object) -> str:
    return ", ".join(map(str, value)) or "none" if isinstance(value, tuple) else str(value)


def counts(comparison: pl.DataFrame) -> dict[str, int]:
    """How many channels each change befell, in the order of Change."""
    held = dict(comparison.group_by("change").len().iter_rows())
    return {change: held[change] for change in Change if change in held}


def sentence(comparison: pl.DataFrame) -> str:
    """The counts in one line."""
    told = ", ".join(f"{count:,} {change}" for change, count in counts(comparison).items())
    return f"{comparison.height:,} channels: {told}" if comparison.height else "no channels to compare"


def _change(alpha: float) -> pl.Expr:
    """What became of a channel."""
    old, new = pl.col("verdict_old"), pl.col("verdict")
    cases = (
        (new.is_null(), Change.MISSING),
        (old.is_null(), Change.NEW),
        ((new == Verdict.FLAGGED) & (old != Verdict.FLAGGED), Change.NEWLY_FLAGGED),
        ((new == Verdict.CLEAR) & (old == Verdict.FLAGGED), Change.CLEARED),
        ((new == Verdict.NOT_SCORED) & (old != Verdict.NOT_SCORED), Change.NO_LONGER_SCORED),
        ((pl.col("change_q") < alpha).fill_null(value=False), Change.CHANGED),
    )
    chosen = pl.lit(str(Change.SAME))
    for condition, change in reversed(cases):
        chosen = pl.when(condition).then(pl.lit(str(change))).otherwise(chosen)
    return chosen


def _column(name: str) -> pl.Expr:
    """A column of the comparison, from those of the joined results."""
    renamed = {"r_difference": "difference", "r_difference_error": "error"}
    stem, _, when = name.rpartition("_")
    if when in {"before", "now"}:
        return pl.col(stem + ("_old" if when == "before" else "")).alias(name)
    return pl.col(renamed.get(name, name)).alias(name)


def _errors(run: RunFile, results: pl.DataFrame) -> pl.DataFrame:
    """The standard error of r of every scored channel: `position` and `error`."""
    scored = results.filter(pl.col("r").is_not_null() & pl.col("critical_r").is_not_null())
    errors = [_error(run, row) for row in scored.iter_rows(named=True)]
    return scored.select("position", error=pl.Series(errors, dtype=pl.Float64).fill_nan(None))


def _error(run: RunFile, row: dict[str, Any]) -> float:
    points, n = run.points(row["position"]), row["n"]
    ranks = kept_ranks(n)
    if points.size != ranks.size:
        return float("nan")
    family = family_named(row["family"])
    readings = np.log(points) if family.axis is Axis.LOG else points
    standard = family.quantile(plotting_positions(n, run.plan.positions)[ranks], *_shapes(run, row, family.shape_count))
    effective = row["n_effective"] or n
    off = 1.0 - row["critical_r"]
    if row["critical_r"] == row["plain_critical_r"]:
        # Not matched: under dependence r scatters as if there were as few readings as are effective.
        off *= n / effective
    return r_error(readings, ranks, n, standard, 1.0 - off, worth(n, effective))


def _shapes(run: RunFile, row: dict[str, Any], count: int) -> tuple[float, ...]:
    """The estimated shapes of the family that the channel is held against."""
    if not count:
        return ()
    fit = run.fits(row["position"]).filter(pl.col("family") == row["family"]).row(0, named=True)
    return (fit["shape_1"], fit["shape_2"])[:count]


def by_weight(comparison: pl.DataFrame) -> pl.DataFrame:
    """The heaviest changes first."""
    return comparison.select(pl.all().gather(weight(comparison).argsort(kind="stable")))


def weight(comparison: pl.DataFrame) -> FloatArray:
    """What rows are sorted by: the weight of the change, then the size of the difference in standard errors."""
    rank = comparison["change"].replace_strict({str(c): k for k, c in enumerate(Change)}, return_dtype=pl.Float64)
    size = (comparison["r_difference"].abs() / comparison["r_difference_error"]).fill_null(0.0).fill_nan(0.0)
    return np.asarray(rank.to_numpy() - size.to_numpy() / (1.0 + size.to_numpy()))
