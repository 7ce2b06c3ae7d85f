"""Gaps: runs of missing readings longer than readings missing here and there would make."""

from dataclasses import dataclass

import numpy as np

from screener.stats.conditions import bits
from screener.stats.conditions.bits import Bits
from screener.stats.conditions.counting import IntArray

CHANCE = 1e-3
"""Expected number of runs in a record from which a run is no chance."""
SHORTEST = 5
"""No shorter run counts."""


@dataclass(frozen=True, slots=True)
class Gaps:
    """Runs of missing readings of each of C channels."""

    longest: IntArray
    """[C] 0 where none is missing."""
    explained: IntArray
    """[C] the longest run that scattered missing readings would make."""


def find_gaps(absent: Bits, n: IntArray, rows: int) -> Gaps:
    """Gaps given the bits of missing readings."""
    longest = np.zeros(n.size, dtype=np.int64)
    some = np.flatnonzero((n < rows) & (n > 0))
    if some.size:
        longest[some] = bits.longest_run(absent[some])
    share = np.clip((rows - n - longest + 1) / np.maximum(rows - longest + 1, 1), 1e-6, 0.999)
    run = np.log(max(rows, 1) / CHANCE) / -np.log(share)
    return Gaps(longest, np.maximum(np.ceil(run), SHORTEST).astype(np.int64))
