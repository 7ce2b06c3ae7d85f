"""The resolution step: the largest spacing of a lattice on which nearly all readings of a channel lie.

Readings that repeat lie on the lattice; those off it hardly ever repeat. So the spacings of repeated readings, taken at
even steps of rank, are whole multiples of the step. One of the smallest of them, divided by 1, 2, 3, ... until nearly
all the others are multiples, is the step; its lattice is then held against readings of all ranks.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.conditions.counting import FloatArray, IntArray, at_rank, noise

BoolArray = NDArray[np.bool_]

FEWEST_TIES = 0.05
"""Neighbours in rank that are equal; a step that matters brings more from 20 readings on."""
SAMPLE, MANY, LARGE_SAMPLE = 256, 20_000, 1024
"""Ranks looked at, and how many of a longer record."""
TOGETHER = 128
"""Channels whose samples are worked on at a time, so that they stay in the processor's cache."""
PARTS = 12
"""The smallest spacing seen may be up to so many steps."""
OFF = 0.06
"""A reading farther than this share of the step from the lattice is off it."""
FEW_SPACINGS = 64
"""Spacings of most channels on a lattice, at most: there are no more among readings at even steps of rank."""
SPACINGS_ON = 0.95
"""Share of the spacings that must be multiples of the step; by chance 0.12 would be."""
READINGS_OFF, FEW_OFF = 0.04, 3
"""Readings that may be off the lattice: a share of those looked at, or so many of few."""


@dataclass(frozen=True, slots=True)
class Sample:
    """Readings of C channels at even steps of rank, the greatest left out; [C, k] each."""

    readings: FloatArray
    counted: BoolArray
    """False where a channel has fewer readings."""
    tied: BoolArray
    """The reading of the next rank is equal."""
    same: FloatArray
    """[C] below which difference two readings are equal."""


@dataclass(frozen=True, slots=True)
class Lattice:
    """The lattice of each of C channels."""

    step: FloatArray
    """[C] 0 where there is none, or none that matters with so few readings."""
    anchor: FloatArray
    """[C] one reading on the lattice; the middle reading where there is no step."""
    ties: FloatArray
    """[C] share of neighbours in rank that are equal, from a sample of ranks."""


def sample_ranks(ordered: FloatArray, n: IntArray) -> Sample:
    """A sample of sorted readings, float64[C, rows], of which the first n[C] are finite."""
    rows = ordered.shape[1]
    alike = n[:1] if n.size and np.all(n == n[0]) else n
    rank, counted = _ranks(alike, min(SAMPLE if rows <= MANY else LARGE_SAMPLE, max(rows - 1, 1)))
    readings = at_rank(ordered, rank)
    same = noise(ordered, n)
    tied = counted & (at_rank(ordered, np.minimum(rank + 1, rows - 1)) - readings <= same[:, None])
    return Sample(readings, np.broadcast_to(counted, readings.shape), tied, same)


def find_lattice(ordered: FloatArray, n: IntArray, sample: Sample) -> Lattice:
    """The lattice of sorted readings, float64[C, rows], of which the first n[C] are finite."""
    ties = sample.tied.sum(axis=1) / np.maximum(sample.counted.sum(axis=1), 1)
    step, anchor = np.zeros(n.size), at_rank(ordered, np.minimum(n // 2, ordered.shape[1] - 1)[:, None])[:, 0]
    likely = np.flatnonzero((ties >= FEWEST_TIES) & (n > 2))
    for kept in (sample.tied, sample.counted):
        for first in range(0, likely.size, TOGETHER):
            some = likely[first : first + TOGETHER]
            found, at = _lattice_of(
                sample.readings[some], sample.tied[some], kept[some], sample.counted[some], sample.same[some]
            )
            step[some] = found
            anchor[some] = np.where(found > 0, at, anchor[some])
        # Among few readings hardly any two spacings of repeated ones share the step: take all of them.
        likely = likely[(step[likely] == 0) & (n[likely] <= sample.readings.shape[1] + 1)]
    return Lattice(step, anchor, ties)


def _ranks(n: IntArray, size: int) -> tuple[IntArray, BoolArray]:
    """Ranks 0 to n - 2 at even steps, int64[C, size], and which of them count where there are fewer."""
    place = np.arange(size)[None, :]
    pairs = np.maximum(n - 1, 0)[:, None]
    rank = np.where(pairs > size, place * pairs // size, np.minimum(place, np.maximum(pairs - 1, 0)))
    return rank, place < pairs


def _lattice_of(
    readings: FloatArray, tied: BoolArray, kept: BoolArray, sampled: BoolArray, same: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Step (0 where there is none) and anchor, by the spacings of the kept ones of the readings."""
    ascending = np.sort(_spacings(readings, kept, same), axis=1)
    count = np.count_nonzero(~np.isnan(ascending), axis=1)
    step = np.zeros(count.size)
    few = count <= FEW_SPACINGS
    for rows, width in ((np.flatnonzero(few), FEW_SPACINGS), (np.flatnonzero(~few), ascending.shape[1])):
        if rows.size:
            step[rows] = _common_step(ascending[rows, :width], count[rows])
    anchor = _middle_kept(readings, tied)
    far = sampled & ~(np.abs(_from_lattice(readings, anchor, step)) <= OFF)
    off = np.count_nonzero(far, axis=1)
    found = (step > 8.0 * same) & (off <= np.maximum(READINGS_OFF * np.count_nonzero(sampled, axis=1), FEW_OFF))
    return np.where(found, step, 0.0), anchor


def _spacings(readings: FloatArray, kept: BoolArray, same: FloatArray) -> FloatArray:
    """Each kept reading less the kept one before it, float64[C, k]; NaN elsewhere, and where the two are the same."""
    before = np.maximum.accumulate(np.where(kept, readings, -np.inf), axis=1)[:, :-1]
    spacing = np.full(readings.shape, np.nan)
    np.subtract(readings[:, 1:], before, out=spacing[:, 1:])
    counts = kept & (spacing > same[:, None]) & (spacing < np.inf)
    return np.where(counts, spacing, np.nan)


def _common_step(ascending: FloatArray, count: IntArray) -> FloatArray:
    """The largest step of which nearly all of count[C] rising spacings are multiples, float64[C]; 0 without one."""
    small = _small_spacing(ascending, count)
    step = np.zeros(count.size)
    left = np.flatnonzero(count > 0)
    for parts in range(1, PARTS + 1):
        spacing = ascending[left]
        tried = spacing / (small[left, None] / parts)
        multiple = np.rint(tried)
        on = (np.abs(tried - multiple) <= OFF) & (multiple > 0)
        fits = np.count_nonzero(on, axis=1) >= SPACINGS_ON * count[left]
        total, steps = (np.where(on[fits], values[fits], 0.0).sum(axis=1) for values in (spacing, multiple))
        step[left[fits]] = total / steps
        left = left[~fits]
        if left.size == 0:
            break
    return step


def _small_spacing(ascending: FloatArray, count: IntArray) -> FloatArray:
    """One of the smallest of count[C] rising spacings of each channel.

    Counts printed with few decimals alternate between two spacings (0.030 and 0.031): the mean of those is taken.
    """
    small = at_rank(ascending, (count // 20)[:, None])
    alike = np.abs(ascending - small) <= OFF * small
    total = np.where(alike, ascending, 0.0).sum(axis=1)
    return np.asarray(total / np.maximum(np.count_nonzero(alike, axis=1), 1), dtype=np.float64)


def _middle_kept(readings: FloatArray, kept: BoolArray) -> FloatArray:
    """The middle one of the kept readings of each channel."""
    rank = np.cumsum(kept, axis=1, dtype=np.int32)
    middle = np.argmax(rank >= (rank[:, -1:] + 1) // 2, axis=1)
    return at_rank(readings, middle[:, None])[:, 0]


def _from_lattice(readings: FloatArray, anchor: FloatArray, step: FloatArray) -> FloatArray:
    """Distance to the next lattice value, in steps."""
    with np.errstate(divide="ignore", invalid="ignore"):
        steps = (readings - anchor[:, None]) / step[:, None]
        return steps - np.rint(steps)
