"""What rounding alone takes from r: 1 - r of very many readings of a family, clipped and rounded as a channel is."""

from enum import Enum
from functools import lru_cache

import numpy as np
from scipy.special import ndtri

from screener.stats.families import Axis, Family, family_named
from screener.stats.families.family import FloatArray
from screener.stats.null.underlying import recorded_at

POINTS = 20_001
"""Evenly probable readings that stand for very many."""
PHASES = (0.125, 0.375, 0.625, 0.875)
"""Places of the lattice, in steps, where no rail fixes it."""
ROUNDS = 4
"""Times that the step is taken over the standard deviation that it leads to."""


class StepUnit(Enum):
    """What a rounding step is measured in, so that it tells nothing of the straightness of the plot."""

    SCALE = "the scale that the family is fitted with"
    DEVIATION = "the standard deviation of the readings as they are recorded"


def step_unit(family: Family) -> StepUnit:
    """The scale, which hardly depends on r; the standard deviation where the scale is not that of the readings."""
    scaled = family.axis is Axis.LINEAR and not family.shape_count
    return StepUnit.SCALE if scaled else StepUnit.DEVIATION


@lru_cache(maxsize=4096)
def rounding_loss(name: str, shapes: tuple[float, ...], step: float, low: float, high: float) -> float:
    """1 - r over the readings between the rails, of a family whose lowest and highest shares are clipped.

    The step is in the unit that `step_unit` names.
    """
    if step == 0.0:
        return 0.0
    if low or high:
        return _loss(name, shapes, step, low, high, 0.0)
    return float(np.mean([_loss(name, shapes, step, low, high, phase) for phase in PHASES]))


def _loss(name: str, shapes: tuple[float, ...], step: float, low: float, high: float, phase: float) -> float:
    family = family_named(name)
    u, readings = _readings(name, shapes)
    first, stop = round(low * POINTS), POINTS - round(high * POINTS)
    expected = family.quantile(u) if family.axis is Axis.LOG else family.quantile(u, *shapes)
    unit, r = 1.0 if step_unit(family) is StepUnit.SCALE else float(readings[first:stop].std()), np.nan
    for _ in range(ROUNDS):
        recorded, kept = _rounded(readings, step * unit, first, stop, phase)
        with np.errstate(invalid="ignore", divide="ignore"):
            values = np.log(recorded[kept]) if family.axis is Axis.LOG else recorded[kept]
        if values.size < 3 or np.ptp(values) == 0.0:
            return np.nan
        covariance = np.cov(values, expected[kept])
        r = covariance[0, 1] / np.sqrt(covariance[0, 0] * covariance[1, 1])
        slope = covariance[0, 1] / covariance[1, 1]
        unit = float(slope if step_unit(family) is StepUnit.SCALE else recorded.std())
    return float(1.0 - r)


@lru_cache(maxsize=32)
def _readings(name: str, shapes: tuple[float, ...]) -> tuple[FloatArray, FloatArray]:
    u = (np.arange(POINTS) + 0.5) / POINTS
    return u, recorded_at(ndtri(u), family_named(name), shapes)


def _rounded(
    readings: FloatArray, step: float, first: int, stop: int, phase: float
) -> tuple[FloatArray, np.ndarray[tuple[int], np.dtype[np.bool_]]]:
    """Readings on a lattice whose cells begin at a rail, and which of them lie between the rails."""
    if first:
        edge = 0.5 * (readings[first - 1] + readings[first])
    elif stop < readings.size:
        edge = 0.5 * (readings[stop - 1] + readings[stop])
    else:
        edge = readings[0] + phase * step
    cell = np.floor((readings - edge) / step)
    kept = np.ones(readings.size, dtype=np.bool_)
    if first:
        kept &= cell >= 0.0
        cell = np.maximum(cell, -1.0)
    if stop < readings.size:
        top = max(1.0, np.rint((0.5 * (readings[stop - 1] + readings[stop]) - edge) / step)) if first else 0.0
        kept &= cell < top
        cell = np.minimum(cell, top)
    return edge + (cell + 0.5) * step, kept
