"""The condition of a channel, and samples of a family that are in the same condition."""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from screener.stats.correlation import fit_censored
from screener.stats.families import Axis, family_named
from screener.stats.families.family import Family, FloatArray
from screener.stats.null.matched import autoregressive
from screener.stats.null.rounding_loss import StepUnit, rounding_loss, step_unit
from screener.stats.null.underlying import recorded_at, underlying_coefficient
from screener.stats.positions import plotting_positions

IntArray = NDArray[np.int64]

CHUNK_READINGS = 200_000
"""Readings simulated at a time, so that the work stays in the cache."""


FEWEST_DISTINCT = 4
"""Distinct readings without which a plot is a stair of two or three steps."""

ROUNDS = 2
"""Times that the step is taken in the unit that it leads to."""

STEP_RATIOS: FloatArray = np.array([0.7, 0.85, 0.925, 1.0, 1.08, 1.18, 1.4])
"""Times the wanted step that a sample's may be by chance."""


@dataclass(frozen=True, slots=True)
class Condition:
    """What the null distribution of r depends on."""

    family: str
    shapes: tuple[float, ...]
    """Shape parameters; of a family on the log axis its scale, on which rounding and autocorrelation depend."""
    rule: str
    n: int
    low: int
    """Least readings that are known only to lie below the others."""
    high: int
    """Greatest readings that are known only to lie above the others."""
    step: float
    """Rounding step in the family's `step_unit`; 0: not rounded."""
    tau: float
    """tau_4 of the readings as they are recorded but for rounding; 1: independent."""

    def loss(self) -> float:
        """1 - r that rounding alone leaves in very many readings."""
        return rounding_loss(self.family, self.shapes, self.step, self.low / self.n, self.high / self.n)

    def losses(self) -> list[float]:
        """The same at STEP_RATIOS times the step."""
        return [replace(self, step=float(ratio * self.step)).loss() for ratio in STEP_RATIOS]


def log_gaps(condition: Condition, samples: int, rng: np.random.Generator) -> FloatArray:
    """ln(1 - r) of samples in a condition, float64[samples]; NaN where a sample has no r."""
    family, shares = family_named(condition.family), (condition.low / condition.n, condition.high / condition.n)
    coefficient = underlying_coefficient(family, condition.shapes, *shares, condition.tau)
    found = np.empty(samples)
    chunk = max(1, CHUNK_READINGS // condition.n)
    for first in range(0, samples, chunk):
        count = min(chunk, samples - first)
        normal = np.sort(autoregressive(rng, count, condition.n, coefficient), axis=1)
        found[first : first + count] = recorded_log_gaps(normal, condition, rng)
    return found


def recorded_log_gaps(normal: FloatArray, condition: Condition, rng: np.random.Generator) -> FloatArray:
    """ln(1 - r) of sorted standard normal samples, float64[S, n], that stand for readings in a condition."""
    family = family_named(condition.family)
    quantiles = family.quantile(plotting_positions(condition.n, condition.rule), *_own(family, condition.shapes))
    ordered = recorded_at(normal, family, condition.shapes)
    return np.asarray(np.log(np.maximum(_gaps(ordered, quantiles, family, condition, rng), 1e-16)), dtype=np.float64)


def _own(family: Family, shapes: tuple[float, ...]) -> tuple[float, ...]:
    """The shape parameters among the shapes of a condition."""
    return shapes if family.shape_count else ()


def _gaps(
    ordered: FloatArray, quantiles: FloatArray, family: Family, condition: Condition, rng: np.random.Generator
) -> FloatArray:
    """1 - r of sorted samples, float64[S, n], as an instrument records them.

    What chance does to the step in its unit, and so to 1 - r, is taken out, since a channel's own is known.
    """
    count = np.ones(ordered.shape[0], dtype=np.int64)
    recorded = _Recorded(ordered, condition.low * count, condition.high * count)
    if condition.step == 0.0:
        return _correlated(recorded, quantiles, family, condition.rule)[0]
    steps = condition.step * _units(recorded, quantiles, family, condition.rule)
    part = rng.random(steps.size)
    with np.errstate(divide="ignore", invalid="ignore"):
        for _ in range(ROUNDS):
            recorded = _record(ordered, condition, steps, part)
            ratio = steps / (condition.step * _units(recorded, quantiles, family, condition.rule))
            steps = steps / np.where(np.isfinite(ratio) & (ratio > 0.0), np.clip(ratio, 0.5, 2.0), 1.0)
        recorded = _record(ordered, condition, steps, part)
        gap, _ = _correlated(recorded, quantiles, family, condition.rule)
        ratio = steps / (condition.step * _units(recorded, quantiles, family, condition.rule))
        chance = np.interp(ratio, STEP_RATIOS, condition.losses()) - condition.loss()
        gap = np.maximum(gap - chance, 0.2 * gap)
    return np.where(_distinct(recorded) < FEWEST_DISTINCT, np.nan, gap)


@dataclass(frozen=True, slots=True)
class _Recorded:
    """Sorted samples as an instrument records them."""

    readings: FloatArray
    """[S, n]"""
    low: IntArray
    """[S] readings at the lower rail."""
    high: IntArray


def _distinct(recorded: _Recorded) -> IntArray:
    """How many distinct readings lie between the rails, [S]."""
    changes = np.diff(recorded.readings, axis=1) > 0.0
    rails = (recorded.low > 0).astype(np.int64) + (recorded.high > 0)
    return np.asarray(1 + np.count_nonzero(changes, axis=1) - rails, dtype=np.int64)


def _record(ordered: FloatArray, condition: Condition, step: FloatArray, part: FloatArray) -> _Recorded:
    """Clip samples, float64[S, n], and round them to steps, [S], the lattice placed by a part of 1, [S]."""
    edge = _edge(ordered, condition, step, part)
    cell = np.floor((ordered - edge[:, None]) / step[:, None])
    low = high = np.zeros(step.size, dtype=np.int64)
    if condition.low:
        low = np.count_nonzero(cell < 0.0, axis=1)
        np.maximum(cell, -1.0, out=cell)
    if condition.high:
        top = _top(ordered, condition, edge, step)
        high = np.count_nonzero(cell >= top[:, None], axis=1)
        np.minimum(cell, top[:, None], out=cell)
    return _Recorded(edge[:, None] + (cell + 0.5) * step[:, None], low, high)


def _units(recorded: _Recorded, quantiles: FloatArray, family: Family, rule: str) -> FloatArray:
    """What the steps of samples are measured in, [S]."""
    if step_unit(family) is StepUnit.SCALE:
        return _correlated(recorded, quantiles, family, rule)[1]
    rank = np.arange(recorded.readings.shape[1])
    last = rank.size - 1 - recorded.high
    edges = (np.take_along_axis(recorded.readings, at[:, None], axis=1) for at in (recorded.low, last))
    return np.asarray(np.clip(recorded.readings, *edges).std(axis=1), dtype=np.float64)


def _edge(ordered: FloatArray, condition: Condition, step: FloatArray, part: FloatArray) -> FloatArray:
    """A limit between two lattice cells: that of a rail's, if there is one, else anywhere."""
    if condition.low:
        inside = condition.low
    elif condition.high:
        inside = condition.n - condition.high
    else:
        return part * step
    return ordered[:, inside - 1] + part * (ordered[:, inside] - ordered[:, inside - 1])


def _top(ordered: FloatArray, condition: Condition, edge: FloatArray, step: FloatArray) -> FloatArray:
    """The cell, counted from the edge, from which readings lie at the upper rail."""
    if not (condition.low and condition.high):
        return np.zeros(step.size)
    inside = condition.n - condition.high
    middle = 0.5 * (ordered[:, inside - 1] + ordered[:, inside])
    return np.maximum(np.rint((middle - edge) / step), 1.0)


def _correlated(recorded: _Recorded, quantiles: FloatArray, family: Family, rule: str) -> tuple[FloatArray, FloatArray]:
    """1 - r over the readings between the rails, and the slope of the plot, each [S]."""
    if family.shape_count:
        n = np.full(recorded.low.size, quantiles.size)
        fits = fit_censored(recorded.readings, n, recorded.low, recorded.high, [family], rule)
        return 1.0 - fits.r[:, 0], fits.scale[:, 0]
    readings = recorded.readings
    with np.errstate(divide="ignore", invalid="ignore"):
        values = np.log(readings) if family.axis is Axis.LOG else readings - readings.mean(axis=1, keepdims=True)
        ones, count = _kept(recorded, quantiles.size)
        values = values if ones is None else np.where(ones > 0.0, values, 0.0)
        sums, squares = _sums(ones, quantiles), _sums(ones, quantiles**2)
        mean = values.sum(axis=1) / count
        cross = values @ quantiles - mean * sums
        spread = squares - sums**2 / count
        lengths = np.sqrt(np.maximum(np.vecdot(values, values) - count * mean**2, 0.0) * spread)
        return 1.0 - cross / lengths, cross / spread


def _kept(recorded: _Recorded, n: int) -> tuple[FloatArray | None, FloatArray]:
    """1 for every reading between the rails, float64[S, n], None where all are, and how many there are, [S]."""
    count = (n - recorded.low - recorded.high).astype(np.float64)
    if np.all(count == n):
        return None, count
    rank = np.arange(n)
    between = (rank >= recorded.low[:, None]) & (rank < n - recorded.high[:, None])
    return between.astype(np.float64), count


def _sums(ones: FloatArray | None, values: FloatArray) -> FloatArray:
    return np.asarray(values.sum() if ones is None else ones @ values, dtype=np.float64)
