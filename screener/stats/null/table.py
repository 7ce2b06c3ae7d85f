"""A table of null distributions of r over n, read in both directions: p of r, and critical r at alpha."""

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr, ndtri

from screener.stats.families.family import FloatArray
from screener.stats.null.grid import DEVIATES, PROBABILITIES
from screener.stats.null.tail import tail_excess, tail_share


@dataclass(frozen=True, slots=True)
class NullRow:
    """The null distribution of r for one family at one n."""

    log_gap: FloatArray
    """[probabilities] ln(1 - r) at each tabled p, decreasing."""
    tail_shape: float
    tail_scale: float
    floor: float
    """p below this is extrapolated."""

    def critical(self, alpha: float) -> float:
        """The r that falls below with probability alpha under the null."""
        if alpha < PROBABILITIES[0]:
            excess = tail_excess(np.array(alpha / PROBABILITIES[0]), self.tail_shape, self.tail_scale)
            return float(-np.expm1(self.log_gap[0] + excess))
        return float(-np.expm1(np.interp(ndtri(alpha), DEVIATES, self.log_gap)))

    def p(self, r: FloatArray) -> FloatArray:
        """P(r_null <= r), same shape as r; above 0, below 1, never decreasing in r; NaN where r is."""
        gap = np.log(np.maximum(1.0 - r, 1e-16))
        deviate = np.interp(-gap, -self.log_gap, DEVIATES)
        slope = (DEVIATES[-1] - DEVIATES[-2]) / (self.log_gap[-2] - self.log_gap[-1])
        deviate += np.maximum(self.log_gap[-1] - gap, 0.0) * slope
        body = np.asarray(ndtr(np.minimum(deviate, 8.0)), dtype=np.float64)
        excess = np.maximum(gap - self.log_gap[0], 0.0)
        tail = PROBABILITIES[0] * tail_share(excess, self.tail_shape, self.tail_scale)
        return np.where(excess > 0.0, np.maximum(tail, 1e-300), body)

    def p_against(self, r: FloatArray, alpha: float) -> FloatArray:
        """p of r, made to agree with the critical value to the last bit: p < alpha exactly where r < critical."""
        p = self.p(r)
        below = r < self.critical(alpha)
        agreed = np.where(below, np.minimum(p, np.nextafter(alpha, 0.0)), np.maximum(p, alpha))
        return np.where(np.isnan(r), np.nan, agreed)


@dataclass(frozen=True, slots=True)
class NullTable:
    """Null distributions of F families at N sample sizes, for one rule of plotting positions."""

    families: tuple[str, ...]
    rule: str
    sizes: NDArray[np.int64]
    """[N] increasing."""
    log_gap: FloatArray
    """[F, N, probabilities]"""
    tail_shape: FloatArray
    """[F, N]"""
    tail_scale: FloatArray
    """[F, N]"""
    floor: FloatArray
    """[N] smallest p that was counted, not fitted."""
    samples: NDArray[np.int64]
    """[N] samples simulated."""
    version: str
    rows: dict[tuple[str, int], NullRow] = field(default_factory=dict, repr=False, compare=False)
    """Rows already interpolated."""

    def row(self, family: str, n: int) -> NullRow:
        """The null distribution of a tabled family at any n from the first size up, smooth in ln n."""
        key = (family, n)
        if key not in self.rows:
            self.rows[key] = self._interpolated(self.families.index(family), n)
        return self.rows[key]

    def _interpolated(self, family: int, n: int) -> NullRow:
        nodes, weights = interpolation(self.sizes, n)
        gap = np.minimum.accumulate(weights @ self.log_gap[family, nodes])
        nearest = int(nodes[np.argmax(weights)])
        return NullRow(
            log_gap=gap,
            tail_shape=float(self.tail_shape[family, nearest]),
            tail_scale=float(self.tail_scale[family, nearest]),
            floor=float(self.floor[nodes].max()),
        )


def interpolation(sizes: NDArray[np.int64], n: int) -> tuple[NDArray[np.int64], FloatArray]:
    """Which nodes, and with which weights, give the value at n: cubic in ln n between sizes, straight beyond the last.

    Beyond the last size the trend is the least-squares line through the last four nodes, moved to meet the last.
    """
    x = np.log(sizes.astype(np.float64))
    at = np.log(float(n))
    exact = np.flatnonzero(sizes == n)
    if exact.size:
        return exact, np.ones(1)
    if n > sizes[-1]:
        nodes = np.arange(max(0, sizes.size - 4), sizes.size)
        centred = x[nodes] - x[nodes].mean()
        weights = (at - x[-1]) * centred / (centred @ centred)
        weights[-1] += 1.0
        return nodes, weights
    first = int(np.clip(np.searchsorted(sizes, n) - 2, 0, max(0, sizes.size - 4)))
    nodes = np.arange(first, min(first + 4, sizes.size))
    apart = x[nodes][:, None] - x[nodes] + np.eye(nodes.size)
    ratios = (at - x[nodes] + np.zeros_like(apart)) / apart
    np.fill_diagonal(ratios, 1.0)
    return nodes, ratios.prod(axis=1)
