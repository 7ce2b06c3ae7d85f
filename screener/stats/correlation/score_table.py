"""Quantile functions tabled on the probability grid: one column for each family without shapes."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from screener.stats.correlation.logit_grid import LOWER, UPPER
from screener.stats.families import family_named
from screener.stats.families.family import FloatArray

MEDIAN = np.array([0.5])


@dataclass(frozen=True, slots=True)
class ScoreTable:
    """K quantile functions, each less its median."""

    columns: FloatArray
    """[2 (grid - start), K] lower half first."""
    median: FloatArray
    """[K]"""


@lru_cache(maxsize=32)
def score_table(names: tuple[str, ...], start: int) -> ScoreTable:
    """The named families on the grid from its point start."""
    families = [family_named(name) for name in names]
    median = np.array([family.quantile(MEDIAN)[0] for family in families])
    branches = [family.branches or (family.quantile, family.quantile) for family in families]
    columns = [np.concatenate([below(LOWER[start:]), above(UPPER[start:])]) for below, above in branches]
    return ScoreTable(np.stack(columns, axis=1) - median, median)
