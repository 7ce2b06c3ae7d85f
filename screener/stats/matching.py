"""Critical values and p of channels in their own condition, in place of the textbook ones."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, fields, replace

import numpy as np
from numpy.typing import NDArray

from screener.stats.censoring import as_if_clipped, censoring_of, distinct_uncensored, refit
from screener.stats.conditions import Conditions
from screener.stats.correlation import Fits, no_fits
from screener.stats.families import Family
from screener.stats.families.family import FloatArray
from screener.stats.found import Found
from screener.stats.null.condition import FEWEST_DISTINCT, Condition
from screener.stats.null.matched import SIZES, within_table
from screener.stats.null.nulls import Nulls
from screener.stats.null.on_demand import SimulatedNulls, judged, level, near, sufficient
from screener.stats.null.table import NullRows

IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

TABLED_FAMILY = "normal"
"""The family whose null in a condition is tabled."""


@dataclass(frozen=True, slots=True)
class Judgement:
    """What C channels are held to against F families; NaN where there is no fit."""

    critical_r: FloatArray
    """[C, F]"""
    p: FloatArray
    """[C, F]"""
    extrapolated: BoolArray
    """[C, F] p lies below what was simulated and is read from the fitted tail."""

    def put(self, channels: IntArray, column: int, r: FloatArray, rows: NullRows, alpha: float) -> None:
        """Judge channels, int64[K], of that r, float64[K], each by the null of its row."""
        self.critical_r[channels, column] = rows.critical(alpha)
        self.p[channels, column] = p = rows.p_against(r, np.arange(channels.size), alpha)
        self.extrapolated[channels, column] = p < rows.floor


@dataclass(frozen=True, slots=True)
class Matching:
    """C channels, what they were found to be, and the nulls that they can be held against."""

    found: Found
    nulls: Nulls
    simulated: SimulatedNulls
    alpha: float

    def into(self, judgement: Judgement, held: IntArray, judge: BoolArray) -> None:
        """Replace critical values and p where a channel's condition calls for it.

        Against the normal family a table serves all but censored channels. Against the family that a channel is held
        against, int64[C], samples in its condition are simulated where no table holds them, if it is to be judged,
        bool[C]. Other families keep the textbook value.
        """
        conditioned = self.found.conditions.rounded | self.found.conditions.serial
        wanted = judge & (conditioned | self.found.censoring.some)
        for column in (place for place, family in enumerate(self.found.families) if family.name == TABLED_FAMILY):
            tabled = conditioned & ~self.found.censoring.some & self._tabled()
            self._by_table(judgement, np.flatnonzero(tabled & ~np.isnan(self.found.fits.r[:, column])), column)
            wanted &= ~(tabled & (held == column))
        for column in np.unique(held[wanted]):
            channels = np.flatnonzero(wanted & (held == column) & ~np.isnan(self.found.fits.r[:, column]))
            for condition, alike, losses in self._alike(channels, int(column)):
                if sufficient(self.simulated, condition):
                    self._simulated(judgement, condition, alike, losses, int(column))

    def _tabled(self) -> BoolArray:
        if self.nulls.matched is None:
            return np.zeros(self.found.conditions.n.size, dtype=np.bool_)
        return within_table(self.found.conditions.n, self.found.step, self.found.tau)

    def _by_table(self, judgement: Judgement, at: IntArray, column: int) -> None:
        if at.size and self.nulls.matched is not None:
            rows = self.nulls.matched.rows(self.found.conditions.n[at], self.found.step[at], self.found.tau[at])
            judgement.put(at, column, self.found.fits.r[at, column], rows, self.alpha)

    def _alike(self, channels: IntArray, column: int) -> Iterator[tuple[Condition, IntArray, FloatArray]]:
        """Conditions that are simulated, the channels that share each, and what rounding takes from their own r."""
        groups: dict[Condition, list[tuple[int, float]]] = {}
        for channel in channels:
            own = self.found.condition(int(channel), column)
            groups.setdefault(near(own), []).append((int(channel), own.loss()))
        for condition, members in groups.items():
            alike, losses = zip(*members, strict=True)
            yield condition, np.array(alike), np.array(losses)

    def _simulated(
        self, judgement: Judgement, condition: Condition, at: IntArray, losses: FloatArray, column: int
    ) -> None:
        """Judge channels that share a simulated condition, each by as much as its own differs from that.

        1 - r is what rounding alone leaves, which is known, and the rest, which grows as that of unrounded normal
        channels does.
        """
        r = self.found.fits.r[at, column]
        moved = self._level(self.found.conditions.n[at], self.found.tau[at]) - self._level(
            np.array([condition.n]), np.array([condition.tau])
        )
        if self.found.families[column].shape_count:
            moved += self._shaped(condition, at, column)
        growth, loss = np.exp(moved), condition.loss()
        there = loss + (1.0 - r - losses) / growth
        rows, row = judged(self.simulated, condition, np.log(np.maximum(there, 1e-16)), self.alpha)
        gap = np.exp(rows.log_gap[row])
        own = losses[:, None] + (gap - loss) * growth[:, None]
        own = np.minimum.accumulate(np.log(np.maximum(own, 0.05 * gap)), axis=1)
        null = NullRows(rows.probabilities, own, rows.tail_shape[row], rows.tail_scale[row], rows.floor[row])
        judgement.put(at, column, r, null, self.alpha)

    def _level(self, n: IntArray, tau: FloatArray) -> FloatArray:
        """ln(1 - critical r) of unrounded normal channels by the tables, [K]."""
        table = self.nulls.matched
        if table is None:
            rows = self.nulls.plain.rows(TABLED_FAMILY, n)
        else:
            rows = table.rows(np.maximum(n, SIZES[0]), np.zeros(n.size), tau)
        return np.asarray(np.log(1.0 - rows.critical(self.alpha)), dtype=np.float64)

    def _shaped(self, condition: Condition, at: IntArray, column: int) -> FloatArray:
        """What the tabled null given the estimated shape differs from samples of that very shape, at alpha: [K]."""
        plain = replace(condition, low=0, high=0, step=0.0, tau=1.0)
        steps = self.found.fits.steps[at, column]
        rows, row = self.nulls.rows(self.found.families[column], np.full(at.size, condition.n), steps)
        tabled = np.log(1.0 - rows.critical(self.alpha)[row])
        return np.asarray(tabled - level(self.simulated, plain, self.alpha), dtype=np.float64)


def textbook(fits: Fits, n: NDArray[np.int64], families: Sequence[Family], nulls: Nulls, alpha: float) -> Judgement:
    """The textbook judgement of C channels, of n[C] readings."""
    critical, p = np.full_like(fits.r, np.nan), np.full_like(fits.r, np.nan)
    judgement = Judgement(critical, p, np.zeros(fits.r.shape, dtype=np.bool_))
    for column, family in enumerate(families):
        fitted = np.flatnonzero(~np.isnan(fits.r[:, column]))
        if fitted.size:
            null, row = nulls.rows(family, n[fitted], fits.steps[fitted, column])
            critical[fitted, column] = null.critical(alpha)[row]
            p[fitted, column] = null.p_against(fits.r[fitted, column], row, alpha)
            judgement.extrapolated[fitted, column] = p[fitted, column] < null.floor[row]
    return judgement


def judged_in_doubt(
    matching: Matching, judgement: Judgement, held: IntArray, judge: BoolArray, ordered: FloatArray
) -> Conditions:
    """Judge channels, and say their conditions as it turns out.

    Where too few readings tell whether an extreme value is a rail, a channel that would be flagged is called clipped,
    and judged without the readings there, if it is not flagged then or cannot be judged without them.
    """
    matching.into(judgement, held, judge)
    found, each = matching.found, np.arange(held.size)
    doubt = (found.conditions.perhaps_low > 0) | (found.conditions.perhaps_high > 0)
    normal = np.array([family.name == TABLED_FAMILY for family in found.families])[held]
    doubtful = np.flatnonzero(judge & doubt & normal & (judgement.p[each, held] < matching.alpha))
    if doubtful.size == 0:
        return found.conditions
    cleared = _cleared(matching, doubtful, found.families[int(held[doubtful[0]])], ordered)
    conditions = as_if_clipped(found.conditions, cleared)
    censoring = censoring_of(conditions, ordered)
    refit(found.fits, ordered, censoring, cleared, found.families, matching.nulls.rule)
    plain = textbook(_rows(found.fits, cleared), conditions.n[cleared], found.families, matching.nulls, matching.alpha)
    for field in fields(judgement):
        getattr(judgement, field.name)[cleared] = getattr(plain, field.name)
    again = replace(matching, found=replace(found, conditions=conditions, censoring=censoring))
    again.into(judgement, held, np.isin(each, cleared))
    return conditions


def _cleared(matching: Matching, doubtful: IntArray, family: Family, ordered: FloatArray) -> IntArray:
    """The channels among doubtful ones that are not flagged against the one family if their ends are rails.

    Those with too little between their ends to be judged are among them.
    """
    conditions = as_if_clipped(matching.found.conditions, doubtful)
    censoring = censoring_of(conditions, ordered)
    enough = ~censoring.most[doubtful] & (distinct_uncensored(ordered, censoring, doubtful) >= FEWEST_DISTINCT)
    some = doubtful[enough]
    fits, channels = no_fits(conditions.n.size, 1), conditions.n.size
    refit(fits, ordered, censoring, some, [family], matching.nulls.rule)
    alone = Judgement(np.full((channels, 1), np.nan), np.full((channels, 1), np.nan), np.zeros((channels, 1), np.bool_))
    only = np.isin(np.arange(channels), some)
    found = Found([family], fits, conditions, censoring, matching.nulls.rule)
    replace(matching, found=found).into(alone, np.zeros(channels, dtype=np.int64), only)
    return np.concatenate([some[alone.p[some, 0] >= matching.alpha], doubtful[~enough]])


def _rows(fits: Fits, channels: IntArray) -> Fits:
    """The fits of some channels."""
    return replace(fits, **{field.name: getattr(fits, field.name)[channels] for field in fields(fits)})
