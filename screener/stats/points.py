"""Which order statistics of a channel are kept so that its quantile plot can be drawn without the table."""

from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

TAIL = 64
"""Readings kept in full at either end."""
MIDDLE = 384
"""Readings kept between the tails, at about even steps of probability."""


@lru_cache(maxsize=512)
def kept_ranks(n: int) -> NDArray[np.int64]:
    """Ranks (0-based, increasing) kept of n sorted readings: all when few, else both tails and a thinned middle."""
    if n <= 2 * TAIL + MIDDLE:
        return np.arange(n)
    middle = np.linspace(TAIL, n - 1 - TAIL, MIDDLE).round().astype(np.int64)
    return np.concatenate([np.arange(TAIL), middle, np.arange(n - TAIL, n)])
