"""Runs at the rails: a clipped channel rests at its extreme value again and again, a stuck one rests there once."""

from dataclasses import replace

import numpy as np

from screener.stats.conditions import bits
from screener.stats.conditions.bits import Bits
from screener.stats.conditions.clipping import Clipping
from screener.stats.conditions.counting import FloatArray, IntArray

TILE = 160_000
"""Readings worked on at a time, so that they stay in the processor's cache."""
HELD, LONG = 0.8, 10
"""Share of an end's readings, and readings, in one run that make the channel stuck there rather than clipped."""


def apart_from_rails(
    same: Bits, readings: FloatArray, ordered: FloatArray, n: IntArray, step: FloatArray, clipping: Clipping
) -> tuple[Bits, Clipping]:
    """The bits of equal neighbours without runs at the ends of clipped channels; the clipping without stuck ends."""
    if not (np.any(clipping.low) or np.any(clipping.high)):
        return same, clipping
    kept, low, high = same.copy(), clipping.low.copy(), clipping.high.copy()
    greatest = ordered[np.arange(n.size), np.maximum(n - 1, 0)]
    together = max(1, TILE // readings.shape[1])
    ends = ((np.less_equal, ordered[:, 0] + step / 2.0, low), (np.greater_equal, greatest - step / 2.0, high))
    for beyond, end, counted in ends:
        railed = np.flatnonzero(counted)
        for first in range(0, railed.size, together):
            some = railed[first : first + together]
            rail = bits.empty(some.size, readings.shape[1])
            bits.put(beyond(_taken(readings, some), end[some, None]), rail)
            held = np.zeros(some.size, dtype=np.bool_)
            at_rail = rail & same[some]
            long = np.flatnonzero(bits.run_of_eight(at_rail))
            longest = bits.longest_run(at_rail[long]) + 1
            held[long] = longest >= np.maximum(HELD * counted[some[long]], LONG)
            kept[some] &= ~np.where(held[:, None], np.uint64(0), rail)
            counted[some[held]] = 0
    return kept, replace(clipping, low=low, high=high)


def _taken(readings: FloatArray, rows: IntArray) -> FloatArray:
    """Some channels, in place where they lie side by side."""
    first, last = int(rows[0]), int(rows[-1])
    return readings[first : last + 1] if last - first == rows.size - 1 else readings[rows]
