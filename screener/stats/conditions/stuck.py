"""Stuck stretches: runs of equal readings longer than the step and serial dependence explain.

If a reading equals the one before with probability q, whatever happened earlier, a record of n readings holds n q^(L-1)
runs of at least L equal ones. q is taken large, from the step (an AR(1) that starts in the middle of its commonest
value), from the commonest value's share, and from how often runs of two go on to three.
"""

from dataclasses import dataclass

import numpy as np
from scipy.special import ndtr

from screener.stats.conditions import bits
from screener.stats.conditions.bits import Bits
from screener.stats.conditions.counting import FloatArray, IntArray

CHANCE = 1e-4
"""Expected number of runs in a record from which a run counts as stuck."""
SHORTEST = 5
"""No shorter run counts."""
LADDER = 5
"""Bits up to which runs are counted one length after the other; few channels have longer ones."""
FEWEST_RUNS = 20
"""Runs needed to say how often they go on."""


@dataclass(frozen=True, slots=True)
class Stuck:
    """Runs of equal readings of each of C channels."""

    longest: IntArray
    """[C] readings in the longest run of equal neighbours; 1 where no two are equal, 0 without readings."""
    explained: IntArray
    """[C] readings in the longest run that the step and serial dependence explain."""
    readings: IntArray
    """[C] readings in longer runs."""


def find_stuck(same: Bits, n: IntArray, step: FloatArray, rho: FloatArray, commonest: FloatArray) -> Stuck:
    """Stuck stretches given the bits of equal neighbours.

    step is in standard deviations, rho the autocorrelation at lag 1, commonest the largest share of one value, all [C].
    """
    longest, inside = np.minimum(n, 1), np.zeros(n.size, dtype=np.int64)
    explained = np.full(n.size, SHORTEST, dtype=np.int64)
    equal = np.flatnonzero(np.any(same != 0, axis=1))
    together = bits.together(same)
    for first in range(0, equal.size, together):
        some = equal[first : first + together]
        bits_from = bits.beginnings(same[some], LADDER)
        longest[some] = np.count_nonzero(bits_from, axis=1) + 1
        longer = np.flatnonzero(bits_from[:, -1])
        longest[some[longer]] = bits.longest_run(same[some[longer]]) + 1
        explained[some] = _explained(n[some], _stays(bits_from, step[some], rho[some], commonest[some]))
        beyond = some[longest[some] > explained[some]]
        if beyond.size:
            inside[beyond] = _inside_runs(same[beyond], explained[beyond])
    return Stuck(longest, explained, inside)


def _stays(bits_from: IntArray, step: FloatArray, rho: FloatArray, commonest: FloatArray) -> FloatArray:
    """The probability that a reading equals the one before, at most, [c]."""
    follows = np.clip(np.nan_to_num(rho), 0.0, 0.9999)
    by_step = 2.0 * ndtr(0.5 * step / np.sqrt(1.0 - follows**2)) - 1.0
    seen = np.where(step > 0, np.maximum(by_step, commonest), 0.0)
    return np.clip(np.maximum(seen, _goes_on(bits_from)), 1e-3, 0.9999)


def _goes_on(bits_from: IntArray) -> FloatArray:
    """The share of the runs of two readings that go on to three, or, each time, of those of three to five, [c].

    0 where there are too few to say. Runs are counted, not readings, so that a few long ones do not matter: a run of L
    bits has one more place from which k bits are set than from which k + 1 are.
    """
    runs = bits_from[:, :-1] - bits_from[:, 1:]
    of_two, of_three, of_five = runs[:, 0], runs[:, 1], runs[:, 3]
    once = np.where(of_two >= FEWEST_RUNS, of_three / np.maximum(of_two, 1), 0.0)
    twice = np.where(of_three >= FEWEST_RUNS, np.sqrt(of_five / np.maximum(of_three, 1)), 0.0)
    return np.maximum(once, twice)


def _explained(n: IntArray, stays: FloatArray) -> IntArray:
    """Readings in the longest run that is no surprise, [c]."""
    longest = 1.0 + np.log(np.maximum(n, 1) / CHANCE) / -np.log(stays)
    return np.maximum(np.ceil(longest), SHORTEST).astype(np.int64)


def _inside_runs(same: Bits, explained: IntArray) -> IntArray:
    """Readings in runs of equal ones longer than explained, [c]."""
    rows = 64 * same.shape[1]
    equal = np.zeros((len(same), rows + 2), dtype=np.int8)
    equal[:, 1:-1] = bits.unpacked(same, rows)
    change = np.diff(equal, axis=1)
    channel, first = np.nonzero(change == 1)
    length = np.nonzero(change == -1)[1] - first + 1
    return np.bincount(channel, np.where(length > explained[channel], length, 0), len(same)).astype(np.int64)
