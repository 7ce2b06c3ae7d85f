"""Detection limits: readings known only to lie beyond a value, such as `<0.5` and `>100`."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray


@dataclass(frozen=True, slots=True)
class Limit:
    """The detection limits of one side of a column."""

    cells: int
    """Cells that lie beyond a limit."""
    value: float
    """The innermost limit: the greatest of `<0.5` and `<0.2`, the least of `>100` and `>200`."""
    at: int
    """Cells that lie beyond this very limit."""


def known_beyond(
    readings: NDArray[np.float64], columns: Sequence[str], limits: Mapping[str, Limit], side: int
) -> NDArray[np.int64] | None:
    """How many of each column's outermost readings are only known to lie beyond its limit, int64[columns].

    `side` is -1 for limits below, 1 for those above. Readings that lie beyond the innermost limit of several count
    too: where the others lie among them is not known. None where no column has a limit.
    """
    limited = {at: limits[column] for at, column in enumerate(columns) if column in limits}
    if not limited:
        return None
    counts = np.zeros(len(columns), dtype=np.int64)
    for at, limit in limited.items():
        outside, edge = side * readings[at], side * limit.value
        beyond = np.count_nonzero(outside > edge) + limit.at
        # A code for a missing reading may have taken some of them away again.
        counts[at] = min(beyond, np.count_nonzero(outside >= edge))
    return counts
