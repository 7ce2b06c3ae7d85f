"""The null distributions of r of all families, for one rule of plotting positions."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.families import Family
from screener.stats.families.family import FloatArray
from screener.stats.null.matched import MatchedTable
from screener.stats.null.shaped import ShapedTable
from screener.stats.null.table import NullRows, NullTable

IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Nulls:
    """Tables of the families without shapes, which share one, and of each family with shapes."""

    rule: str
    version: str
    plain: NullTable
    shaped: Mapping[str, ShapedTable]
    """By the family's name."""
    matched: MatchedTable | None
    """The normal family's under rounding and serial dependence; None where it was not simulated for this rule."""

    def rows(self, family: Family, n: IntArray, steps: FloatArray) -> tuple[NullRows, IntArray]:
        """The nulls of a family for channels of n readings, int64[C], and which of them is each channel's.

        `steps`, float64[C, 2], are estimated shapes in steps of the family's grid.
        """
        if family.shape_count:
            rows = self.shaped[family.name].rows(n, steps[:, : family.shape_count])
            return rows, np.arange(n.size)
        sizes, row = np.unique(n, return_inverse=True)
        return self.plain.rows(family.null_name, sizes), row.astype(np.int64)
