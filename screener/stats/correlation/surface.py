"""A smooth surface, known at Chebyshev points of one or two coordinates: its values in between, and its highest top.

The polynomial through values at Chebyshev points comes as close to a smooth function as any (barycentric formula:
Berrut & Trefethen 2004, SIAM Review 46:501). Tops are climbed by Newton's method from the highest points along either
coordinate; surfaces of r have long ridges, and sometimes two tops.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.correlation.on_grid import WIDE_TILE, IntArray, tiled_product
from screener.stats.families.family import FloatArray

MOST_STEPS = 8
"""Newton steps at the most; two or three are usual."""

FIRST_STEPS = 4
"""Steps before other starts are judged by what has been found; climbs that go on then do so with them."""

ENOUGH = 3e-9
"""A step that promises less than this is not taken."""

REACH = 0.25
"""Length of the first step at the most; an axis is 2 long."""

LEAST_BEND = 1e-12

NO_GAP = 1e-300
"""Stands for no gap: all the weight of the value is then at that point."""

APART = 0.1
"""A start nearer than this to the top found leads there."""

LEEWAY = 4.0
LEAST_LEEWAY = 1e-5
"""A top is hardly higher than its highest row by more than LEEWAY times what a parabola says, and LEAST_LEEWAY."""


@dataclass(frozen=True, slots=True)
class Axis:
    """The N Chebyshev points of one coordinate, from -1 to 1 with both ends; one point when there is no coordinate."""

    points: FloatArray
    """[N]"""
    weights: FloatArray
    """[N] of the barycentric formula."""
    orders: FloatArray
    """[N, 3 N] from weights of the value to those of the value and of its first and second derivative."""

    def value_weights(self, at: FloatArray) -> FloatArray:
        """Weights, float64[C, N], with which values at the points give the value at places float64[C]."""
        gap = at[:, None] - self.points
        gap[gap == 0.0] = NO_GAP
        share = self.weights / gap
        share /= share.sum(axis=1, keepdims=True)
        return share

    def all_weights(self, at: FloatArray) -> FloatArray:
        """The same for the value, the first and the second derivative, float64[C, 3, N]."""
        return tiled_product(self.value_weights(at), self.orders, WIDE_TILE).reshape(at.size, 3, -1)


def axis(count: int) -> Axis:
    """The axis with that many points."""
    if count == 1:
        return Axis(np.zeros(1), np.ones(1), np.eye(1, 3))
    points = _place(np.arange(float(count)), count)
    weights = np.where(np.arange(count) % 2, -1.0, 1.0)
    weights[[0, -1]] *= 0.5
    gap = points[:, None] - points + np.eye(count)
    first = weights / weights[:, None] / gap
    np.fill_diagonal(first, 0.0)
    np.fill_diagonal(first, -first.sum(axis=1))
    return Axis(points, weights, np.concatenate([np.eye(count), first, first @ first], axis=1))


def _place(number: FloatArray, count: int) -> FloatArray:
    """The place of a point by its number, which may lie between whole ones."""
    return np.asarray(-np.cos(np.pi * number / (count - 1)) if count > 1 else 0.0 * number, dtype=np.float64)


def values_at(surfaces: tuple[FloatArray, ...], axes: tuple[Axis, Axis], at: FloatArray) -> tuple[FloatArray, ...]:
    """The values, float64[C], of surfaces, [C or 1, N, M] each, at places float64[C, 2]."""
    first, second = axes[0].value_weights(at[:, 0])[:, None], axes[1].value_weights(at[:, 1])[:, :, None]
    return tuple(((first @ surface) @ second)[:, 0, 0] for surface in surfaces)


def highest(surface: FloatArray, axes: tuple[Axis, Axis]) -> tuple[FloatArray, FloatArray]:
    """The greatest value, float64[C], of surfaces given at the points, [C, N, M], and its place, float64[C, 2]."""
    first, *others = _starts(surface, axes)
    if axes[1].points.size > 1:
        # Tops on adjoining edges, or along a ridge between two rows, are told apart along the other coordinate.
        turned = _starts(np.ascontiguousarray(np.swapaxes(surface, 1, 2)), axes[::-1])
        others += [_Starts(start.place[:, ::-1], start.hope) for start in turned]
    top, place, going = _climbed(surface, axes, first.place, FIRST_STEPS)
    climbs = [(going, place[going])]
    for start in others:
        worth = np.flatnonzero(start.worth(top, place))
        climbs.append((worth, start.place[worth]))
    every, starts = (np.concatenate(part) for part in zip(*climbs, strict=True))
    found, at, _ = _climbed(surface[every], axes, starts, MOST_STEPS)
    done = 0
    for which, _ in climbs:
        part = slice(done, done + which.size)
        higher = found[part] > top[which]
        top[which[higher]], place[which[higher]] = found[part][higher], at[part][higher]
        done += which.size
    return top, place


@dataclass(frozen=True, slots=True)
class _Starts:
    """Where C climbs begin."""

    place: FloatArray
    """[C, 2]"""
    hope: FloatArray
    """[C] what the top above it hardly exceeds; minus infinity where there is no such start."""

    def worth(self, top: FloatArray, place: FloatArray) -> NDArray[np.bool_]:
        """Which starts promise more than the top found, and do not lie at its place."""
        elsewhere = np.abs(self.place - place).max(axis=1) > APART
        return np.asarray(elsewhere & (self.hope > top), dtype=np.bool_)


def _starts(surface: FloatArray, axes: tuple[Axis, Axis]) -> tuple[_Starts, _Starts]:
    """The highest of the rows that top their neighbours, and the next of them."""
    each = np.arange(surface.shape[0])
    height, number = _best_of_rows(surface)
    bordered = np.pad(height, ((0, 0), (1, 1)), constant_values=-np.inf)
    peaks = np.where((height >= bordered[:, :-2]) & (height > bordered[:, 2:]), height, -np.inf)
    first = np.argmax(height, axis=1)
    peaks[each, first] = -np.inf
    second = np.argmax(peaks, axis=1)
    starts = (_start(height, number, row, axes) for row in (first, second))
    best, other = starts
    return best, _Starts(other.place, np.where(np.isfinite(peaks[each, second]), other.hope, -np.inf))


def _start(height: FloatArray, number: FloatArray, row: IntArray, axes: tuple[Axis, Axis]) -> _Starts:
    """The place of the top by a parabola through a row and its neighbours, given the rows' heights and best points."""
    each, last = np.arange(row.size), height.shape[1] - 1
    step, gain = _vertex(*(height[each, np.clip(row + to, 0, last)] for to in (-1, 0, 1)))
    step = np.where((row > 0) & (row < last), step, 0.0)
    beside = number[each, np.clip(row + np.sign(step).astype(np.int64), 0, last)] - number[each, row]
    across = number[each, row] + np.abs(step) * np.clip(beside, -1.0, 1.0)
    place = np.stack([_place(row + step, axes[0].points.size), _place(across, axes[1].points.size)], axis=1)
    return _Starts(place, height[each, row] + LEEWAY * gain + LEAST_LEEWAY)


def _best_of_rows(surface: FloatArray) -> tuple[FloatArray, FloatArray]:
    """The greatest value of each row, float64[C, N], by a parabola through three points, and its point."""
    count = surface.shape[2]
    if count == 1:
        return surface[:, :, 0], np.zeros(surface.shape[:2])
    rows = surface.reshape(-1, count)
    each, best = np.arange(rows.shape[0]), np.argmax(rows, axis=1)
    step, gain = _vertex(*(rows[each, np.clip(best + to, 0, count - 1)] for to in (-1, 0, 1)))
    inner = (best > 0) & (best < count - 1)
    height = rows[each, best] + np.where(inner, gain, 0.0)
    number = best + np.where(inner, step, 0.0)
    return height.reshape(surface.shape[:2]), number.reshape(surface.shape[:2])


def _vertex(before: FloatArray, centre: FloatArray, after: FloatArray) -> tuple[FloatArray, FloatArray]:
    """How far from the middle one of three values, the greatest, their parabola is highest, and by how much."""
    bend, rise = before - 2.0 * centre + after, 0.5 * (after - before)
    step = np.where(bend < 0.0, _within(-rise / np.where(bend < 0.0, bend, 1.0), 0.5), 0.0)
    return step, 0.5 * rise * step


def _climbed(
    surface: FloatArray, axes: tuple[Axis, Axis], start: FloatArray, steps: int
) -> tuple[FloatArray, FloatArray, IntArray]:
    """The tops above the starts, float64[C, 2], their places, and which are not at their end after so many steps.

    A step that does not lead up is taken back and shortened.
    """
    place, trial = start.copy(), start.copy()
    form = np.full((start.shape[0], 3, 3), -np.inf)
    reach = np.full(start.shape[0], REACH)
    active = np.arange(start.shape[0])
    for _ in range(steps):
        if active.size == 0:
            break
        found = _form(surface if active.size == start.shape[0] else surface[active], axes, trial[active])
        up = found[:, 0, 0] > form[active, 0, 0]
        place[active[up]], form[active[up]] = trial[active[up]], found[up]
        reach[active] *= np.where(up, 2.0, 0.25)
        step = _step(place[active], form[active], reach[active], axes)
        trial[active] = place[active] + step
        promise = step[:, 0] * form[active, 1, 0] + step[:, 1] * form[active, 0, 1]
        active = active[promise > ENOUGH]
    return form[:, 0, 0], place, active


def _form(surface: FloatArray, axes: tuple[Axis, Axis], at: FloatArray) -> FloatArray:
    """Values and derivatives, [C, order along the first axis, order along the second], at places float64[C, 2]."""
    first, second = (along.all_weights(at[:, place]) for place, along in enumerate(axes))
    return np.asarray((first @ surface) @ np.swapaxes(second, 1, 2), dtype=np.float64)


def _step(place: FloatArray, form: FloatArray, reach: FloatArray, axes: tuple[Axis, Axis]) -> FloatArray:
    """Newton's step up, float64[C, 2], within the square, no longer than reach along its two principal directions."""
    slope, bends = form[:, (1, 0), (0, 1)], form[:, (2, 0), (0, 2)]
    if axes[1].points.size == 1:
        length = _within(slope / np.maximum(np.abs(bends), LEAST_BEND), reach[:, None])
        return np.asarray(_within(place + length, 1.0) - place, dtype=np.float64)
    free = place * np.sign(slope) < 1.0
    twist = np.where(free.all(axis=1), form[:, 1, 1], 0.0)
    step = np.where(free, _newton(np.where(free, slope, 0.0), bends, twist, reach), 0.0)
    inside = _within(place + step, 1.0) - place
    # Where the step would leave the square, it goes to that edge, and along it as far as is best there.
    beyond = np.abs(step - inside)
    out = np.flatnonzero(beyond.max(axis=1) > 1e-12)
    if out.size:
        across = np.argmax(beyond[out], axis=1)
        along = 1 - across
        rise = np.where(free[out, along], slope[out, along] + twist[out] * inside[out, across], 0.0)
        length = rise / np.maximum(np.abs(bends[out, along]), LEAST_BEND)
        inside[out, along] = _within(place[out, along] + _within(length, reach[out]), 1.0) - place[out, along]
    return inside


def _newton(slope: FloatArray, bends: FloatArray, twist: FloatArray, reach: FloatArray) -> FloatArray:
    """Up along each principal direction to its vertex, or as far where the surface bends upwards."""
    middle, half = 0.5 * (bends[:, 0] + bends[:, 1]), 0.5 * (bends[:, 0] - bends[:, 1])
    spread, turn = np.hypot(half, twist), 0.5 * np.arctan2(twist, half)
    ways = np.stack([np.cos(turn), np.sin(turn)], axis=1)
    step = np.zeros_like(slope)
    for bend, way in ((middle + spread, ways), (middle - spread, ways[:, ::-1] * np.array([-1.0, 1.0]))):
        length = (slope * way).sum(axis=1) / np.maximum(np.abs(bend), LEAST_BEND)
        step += _within(length, reach)[:, None] * way
    return step


def _within(values: FloatArray, bound: FloatArray | float) -> FloatArray:
    """Values cut to between minus bound and bound."""
    return np.minimum(np.maximum(values, np.negative(bound)), bound)
