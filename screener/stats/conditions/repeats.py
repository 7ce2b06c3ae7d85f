"""A single value that repeats far more often than the values beside it: a default, a held or a filled-in reading."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.conditions.counting import FloatArray, IntArray, at_rank, count_below
from screener.stats.conditions.resolution import TOGETHER, Lattice, Sample

BoolArray = NDArray[np.bool_]

FEWEST, SHARE = 4, 0.01
"""Readings and share of the record that a value must exceed its expected count by."""
TIMES, SURE = 2.5, 5.0
"""Times its expected count, and standard errors above it."""


@dataclass(frozen=True, slots=True)
class Repeats:
    """The commonest value of each of C channels, as far as it shows among readings at even steps of rank."""

    value: FloatArray
    """[C]"""
    count: IntArray
    """[C] readings of that value; 1 where none repeats noticeably."""
    beyond: IntArray
    """[C] readings of it beyond what the values beside it let expect; 0 where that is no more than chance."""


def find_repeats(ordered: FloatArray, n: IntArray, sample: Sample, lattice: Lattice, spread: FloatArray) -> Repeats:
    """The commonest value of sorted readings; spread is their standard deviation, [C]."""
    value, count = np.where(n > 0, sample.readings[:, 0], 0.0), np.minimum(n, 1)
    beyond = np.zeros(n.size, dtype=np.int64)
    tied = np.flatnonzero(np.any(sample.tied, axis=1))
    half = np.maximum(lattice.step / 2.0, sample.same)
    for first in range(0, tied.size, TOGETHER):
        where = tied[first : first + TOGETHER]
        value[where] = _commonest(sample.readings[where], sample.counted[where], half[where])
    limits = value[tied, None] + half[tied, None] * np.array([-3.0, -1.0, 1.0, 3.0])
    cells = np.diff(count_below(ordered, n, limits, tied), axis=1)
    count[tied] = cells[:, 1]
    beyond[tied] = _beyond(cells, n[tied], lattice.step[tied], spread[tied])
    return Repeats(value, count, beyond)


def _commonest(readings: FloatArray, counted: BoolArray, alike: FloatArray) -> FloatArray:
    """The value that most of the sampled readings share, [c]."""
    place = np.arange(readings.shape[1], dtype=np.int32)
    start = np.zeros(readings.shape, dtype=np.int32)
    np.multiply(readings[:, 1:] - readings[:, :-1] > alike[:, None], place[1:], out=start[:, 1:])
    length = np.where(counted, place - np.maximum.accumulate(start, axis=1) + 1, 0)
    last = np.argmax(length, axis=1)[:, None]
    return at_rank(readings, last)[:, 0]


def _beyond(cells: IntArray, n: IntArray, step: FloatArray, spread: FloatArray) -> IntArray:
    """Readings of the middle of three lattice values beyond what a smooth peak would have there, [c]."""
    before, at, after = (cells[:, i].astype(np.float64) for i in range(3))
    with np.errstate(divide="ignore", invalid="ignore"):
        peak = np.where(step > 0, np.exp(0.5 * np.minimum(step / spread, 2.0) ** 2), 1.0)
    expected = np.where(step > 0, np.maximum(np.sqrt(before * after) * peak, np.maximum(before, after)), 1.0)
    excess = at - expected
    many = (excess >= FEWEST) & (excess >= SHARE * n) & (at >= TIMES * expected)
    return np.where(many & (excess > SURE * np.sqrt(at + expected)), np.rint(excess), 0).astype(np.int64)
