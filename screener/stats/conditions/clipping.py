"""Clipping: readings piled up at the least or the greatest value of a channel.

Unrounded readings never repeat by chance, so equal extreme readings are clipped ones. On a lattice the extreme value is
compared with what the values next to it let expect, in two ways:

* it holds at least twice as many readings as the value beside it, and the values inside do not rise so towards the end;
* or the counts at all values inside are those of a rounded normal channel (a straight line on normal probability
  paper), and the extreme value holds the readings that this channel would have at it and beyond.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr, ndtri

from screener.stats.conditions.counting import FloatArray, IntArray, at_rank, count_below, noise
from screener.stats.conditions.resolution import Lattice

BoolArray = NDArray[np.bool_]

FEWEST = 3
"""Equal extreme readings of a channel without a step that are no coincidence; two among few readings without ties."""
FEW_READINGS = 200
PILE, SURE = 2.0, 2.5
"""Times the expected count, and standard errors above it, from which a lattice value is piled up."""
CLIPPED, SURELY = 4.0, 15.0
"""Log likelihood by which readings piled up at the extreme value, and none beyond, are those of a clipped rather than
an unclipped normal channel; the greater one where the counts inside do not tell a normal channel."""
FEWEST_BEYOND = 1.0
"""Readings that an unclipped normal channel would have beyond, without which there is nothing to miss."""
PERHAPS = 1.0
"""Log likelihood from which it may be so, and by which a channel cut off may at most be likelier."""
FEWEST_COUNTED = 20
"""Readings whose counts at lattice values are compared with a normal channel's."""
BELL = 3.0
"""Log likelihood by which the counts inside are those of a normal rather than a uniform channel."""
PLACES, STRAIGHT, HARDLY_STRAIGHT = 9, 3.0, 4.0
"""Places between the ends where the normal line is checked, and how far it may be off, in standard errors; how far if
it only may be so."""


@dataclass(frozen=True, slots=True)
class Clipping:
    """Readings at the ends of each of C channels."""

    low: IntArray
    """[C] clipped readings at the least value; 0 where it is not clipped."""
    high: IntArray
    at_low: IntArray
    """[C] readings equal to the least value, clipped or not."""
    at_high: IntArray
    perhaps_low: BoolArray
    """[C] the least value of a rounded channel may be a rail or not: too few readings to tell."""
    perhaps_high: BoolArray


def find_clipping(ordered: FloatArray, n: IntArray, lattice: Lattice, inflation: FloatArray) -> Clipping:
    """Clipping of sorted readings; inflation[C] is by how much serial dependence widens the variance of counts."""
    (at_low, beside_low), (at_high, beside_high) = _end_counts(ordered, n, lattice)
    rounded = lattice.step > 0
    low, high = (_repeated(at, n, lattice.ties) & ~rounded for at in (at_low, at_high))
    # Beyond a high level readings come in smaller clusters than the variance of the whole record says.
    clusters = np.sqrt(inflation)
    low |= rounded & _piled(at_low, beside_low, clusters)
    high |= rounded & _piled(at_high, beside_high, clusters)
    where = np.flatnonzero(rounded & (n >= FEWEST_COUNTED))
    perhaps_low, perhaps_high = np.zeros_like(low), np.zeros_like(high)
    if where.size:
        heaps = _heaps(ordered, n, lattice, inflation, where)
        enough = np.where(heaps.bell >= BELL, CLIPPED, np.where(heaps.bell >= 0.0, SURELY, np.inf))
        # The finer the lattice, the more values there are of which the extreme one may happen to be the fullest.
        enough += np.log(1.0 / np.clip(heaps.step, 1e-6, 1.0))
        straight = heaps.off <= STRAIGHT
        low[where] |= straight & (heaps.low >= enough) & (heaps.over_cut_low >= 0.0)
        high[where] |= straight & (heaps.high >= enough) & (heaps.over_cut_high >= 0.0)
        belled = heaps.bell >= np.where(n[where] < FEW_READINGS * np.sqrt(inflation[where]), 0.0, BELL)
        hardly_off = belled & (heaps.off <= HARDLY_STRAIGHT)
        perhaps_low[where] = hardly_off & (heaps.low >= PERHAPS) & (heaps.over_cut_low >= -PERHAPS)
        perhaps_high[where] = hardly_off & (heaps.high >= PERHAPS) & (heaps.over_cut_high >= -PERHAPS)
    varied = (n > 0) & (at_low < n)
    return Clipping(
        np.where(low & varied, at_low, 0),
        np.where(high & varied, at_high, 0),
        at_low,
        at_high,
        perhaps_low & ~low,
        perhaps_high & ~high,
    )


def _end_counts(ordered: FloatArray, n: IntArray, lattice: Lattice) -> tuple[tuple[IntArray, IntArray], ...]:
    """For either end: readings at its value, [C], and at the two lattice values inside it, [C, 2]."""
    half = np.maximum(lattice.step / 2.0, noise(ordered, n))[:, None] * np.array([1.0, 3.0, 5.0])
    greatest = at_rank(ordered, np.maximum(n - 1, 0)[:, None])
    limits = np.concatenate([ordered[:, :1] + half, greatest - half], axis=1)
    below = count_below(ordered, n, np.where((n > 0)[:, None], limits, 0.0))
    from_low, from_high = below[:, :3], n[:, None] - below[:, 3:]
    return tuple((inside[:, 0], np.diff(inside, axis=1)) for inside in (from_low, from_high))


def _repeated(at: IntArray, n: IntArray, ties: FloatArray) -> BoolArray:
    """Whether the extreme reading of a channel without a step repeats beyond coincidence."""
    two: BoolArray = (at == 2) & (n < FEW_READINGS) & (ties <= 2.0 / np.maximum(n - 1, 1))
    return two | (at >= FEWEST)


def _piled(at: IntArray, beside: IntArray, inflation: FloatArray) -> BoolArray:
    """Whether an extreme lattice value holds more than its neighbours let expect."""
    near, next_ = beside[:, 0].astype(np.float64), beside[:, 1].astype(np.float64)
    # A law that rises towards its end (a sine's) rises further in its last value.
    expected = np.maximum(near, near**2 / np.maximum(next_, 1.0))
    error = np.sqrt((at + expected) * inflation)
    piled: BoolArray = (at >= FEWEST) & (at >= PILE * expected) & (at - expected > SURE * error)
    return piled


@dataclass(frozen=True, slots=True)
class _Heaps:
    """How K channels agree with a rounded normal channel that is clipped; log likelihood ratios are minus infinity
    where an end cannot be looked at."""

    off: FloatArray
    """[K] the farthest that the counts inside are from those of a normal channel, in standard errors."""
    bell: FloatArray
    """[K] log likelihood ratio of normal over uniform, by the counts inside."""
    step: FloatArray
    """[K] in standard deviations of that normal channel."""
    low: FloatArray
    """[K] log likelihood ratio of clipped over complete, by the readings at the least value and none below it."""
    high: FloatArray
    over_cut_low: FloatArray
    """[K] log likelihood ratio of clipped over cut off: without the readings that would lie below."""
    over_cut_high: FloatArray


def _heaps(ordered: FloatArray, n: IntArray, lattice: Lattice, inflation: FloatArray, where: IntArray) -> _Heaps:
    """How the channels at `where` agree with clipped normal ones."""
    count, step = n[where].astype(np.float64), lattice.step[where]
    least = ordered[where, 0] + 0.5 * step
    values = np.rint((ordered[where, n[where] - 1] - ordered[where, 0]) / step) - 1
    place = np.rint(np.linspace(0.0, 1.0, PLACES) * np.maximum(values, 0.0)[:, None])
    share = count_below(ordered, n, least[:, None] + place * step[:, None], where) / count[:, None]
    usable = (share > 0) & (share < 1)
    line = np.where(usable, share, 0.5)
    score = ndtri(line)
    density = np.exp(-0.5 * score**2) / np.sqrt(2.0 * np.pi)
    weight = np.where(usable, density**2 / (line * (1.0 - line)), 0.0)
    slope, at_zero = _line(place, score, weight)
    fitted = ndtr(at_zero[:, None] + slope[:, None] * place)
    error = np.sqrt(np.maximum(line * (1.0 - line) * inflation[where, None] / count[:, None], 1e-300))
    off = np.max(np.where(usable, np.abs(line - fitted) / error, 0.0), axis=1)
    off[(values < 2) | (slope <= 0)] = np.inf
    independent = count / np.sqrt(inflation[where])
    low, cut_low = _heap(share[:, 0], independent, score[:, 0], slope)
    high, cut_high = _heap(1.0 - share[:, -1], independent, -score[:, -1], slope)
    low[~usable[:, 0]] = high[~usable[:, -1]] = -np.inf
    return _Heaps(off, _bell(independent, share, fitted, place), slope, low, high, cut_low, cut_high)


def _heap(
    share: FloatArray, independent: FloatArray, inner: FloatArray, slope: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Log likelihood ratios of clipped over complete, and over cut off, of an extreme value that holds a share, [K].

    The value's inner limit lies at that standard normal score.
    """
    beyond = independent * ndtr(inner - slope)
    inside = np.maximum(independent * ndtr(inner) - beyond, 1e-300)
    ratio = independent * share * np.log1p(beyond / inside)
    return np.where(beyond >= FEWEST_BEYOND, ratio, -np.inf), ratio - beyond


def _bell(independent: FloatArray, share: FloatArray, fitted: FloatArray, place: FloatArray) -> FloatArray:
    """Log likelihood ratio of the shares between the places: fitted normal over even, [C]."""
    counted, normal, even = (np.diff(each, axis=1) for each in (share, fitted, place))
    normal = normal / np.maximum(normal.sum(axis=1, keepdims=True), 1e-300)
    even = even / np.maximum(even.sum(axis=1, keepdims=True), 1e-300)
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = np.where(counted > 0, counted * np.log(normal / even), 0.0)
    return np.asarray(independent * ratio.sum(axis=1), dtype=np.float64)


def _line(x: FloatArray, y: FloatArray, weight: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Slope and value at 0 of the weighted straight line through each row."""
    total = np.maximum(weight.sum(axis=1), 1e-300)
    middle_x, middle_y = (weight * x).sum(axis=1) / total, (weight * y).sum(axis=1) / total
    off = x - middle_x[:, None]
    slope = (weight * off * y).sum(axis=1) / np.maximum((weight * off**2).sum(axis=1), 1e-300)
    return slope, middle_y - slope * middle_x
