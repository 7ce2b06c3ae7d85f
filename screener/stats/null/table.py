"""A table of null distributions of r over n, read in both directions: p of r, and critical r at alpha."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr, ndtri

from screener.stats.families.family import FloatArray
from screener.stats.null.grid import PROBABILITIES
from screener.stats.null.tail import tail_excess, tail_share

IntArray = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class NullRows:
    """The null distributions of r of one family at U sample sizes."""

    probabilities: FloatArray
    """[probabilities] increasing."""
    log_gap: FloatArray
    """[U, probabilities] ln(1 - r) at each tabled p, decreasing."""
    tail_shape: FloatArray
    """[U]"""
    tail_scale: FloatArray
    """[U]"""
    floor: FloatArray
    """[U] p below this is extrapolated."""

    def critical(self, alpha: float) -> FloatArray:
        """The r that falls below with probability alpha under the null, float64[U]."""
        smallest, deviates = self.probabilities[0], ndtri(self.probabilities)
        if alpha < smallest:
            excess = tail_excess(np.array(alpha / smallest), self.tail_shape, self.tail_scale)
            return np.asarray(-np.expm1(self.log_gap[:, 0] + excess), dtype=np.float64)
        deviate = float(ndtri(alpha))
        cell = int(np.clip(np.searchsorted(deviates, deviate) - 1, 0, deviates.size - 2))
        part = (deviate - deviates[cell]) / (deviates[cell + 1] - deviates[cell])
        gap = self.log_gap[:, cell] + part * (self.log_gap[:, cell + 1] - self.log_gap[:, cell])
        return np.asarray(-np.expm1(gap), dtype=np.float64)

    def p(self, r: FloatArray, row: IntArray) -> FloatArray:
        """P(r_null <= r) of r, float64[C], each at its row, int64[C]: above 0, below 1; NaN where r is."""
        deviates = ndtri(self.probabilities)
        gap = np.log(np.maximum(1.0 - r, 1e-16))
        table = self.log_gap[row]
        above = np.count_nonzero(table > gap[:, None], axis=1)
        cell = np.clip(above - 1, 0, deviates.size - 2)
        each = np.arange(r.size)
        drop = table[each, cell] - table[each, cell + 1]
        part = (table[each, cell] - gap) / np.where(drop > 0.0, drop, 1.0)
        deviate = deviates[cell] + part * (deviates[cell + 1] - deviates[cell])
        body = np.asarray(ndtr(np.minimum(deviate, 8.0)), dtype=np.float64)
        excess = np.maximum(gap - table[:, 0], 0.0)
        tail = self.probabilities[0] * tail_share(excess, self.tail_shape[row], self.tail_scale[row])
        p = np.where(excess > 0.0, np.maximum(tail, 1e-300), body)
        return np.where(np.isnan(r), np.nan, p)

    def p_against(self, r: FloatArray, row: IntArray, alpha: float) -> FloatArray:
        """p of r, made to agree with the critical value to the last bit: p < alpha exactly where r < critical."""
        p = self.p(r, row)
        below = r < self.critical(alpha)[row]
        agreed = np.where(below, np.minimum(p, np.nextafter(alpha, 0.0)), np.maximum(p, alpha))
        return np.where(np.isnan(r), np.nan, agreed)


@dataclass(frozen=True, slots=True)
class NullTable:
    """Null distributions of F families at N sample sizes, for one rule of plotting positions."""

    families: tuple[str, ...]
    rule: str
    sizes: IntArray
    """[N] increasing."""
    log_gap: FloatArray
    """[F, N, probabilities]"""
    tail_shape: FloatArray
    """[F, N]"""
    tail_scale: FloatArray
    """[F, N]"""
    floor: FloatArray
    """[N] smallest p that was counted, not fitted."""
    samples: IntArray
    """[N] samples simulated."""
    version: str

    def rows(self, family: str, sizes: IntArray) -> NullRows:
        """The null distributions of a tabled family at any n from the first size up, int64[U], smooth in ln n."""
        place = self.families.index(family)
        weights = interpolation(self.sizes, sizes)
        nearest = np.argmax(weights, axis=1)
        return NullRows(
            probabilities=PROBABILITIES,
            log_gap=np.minimum.accumulate(np.einsum("un,np->up", weights, self.log_gap[place]), axis=1),
            tail_shape=self.tail_shape[place, nearest],
            tail_scale=self.tail_scale[place, nearest],
            floor=self.floor[nearest],
        )

    def critical(self, family: str, n: int, alpha: float) -> float:
        """The critical value of r at one n."""
        return float(self.rows(family, np.array([n])).critical(alpha)[0])


def interpolation(sizes: IntArray, at: IntArray) -> FloatArray:
    """Weights of the tabled sizes at each n, float64[U, N]: cubic in ln n between them, straight beyond the last.

    Beyond the last size the trend is the least-squares line through the last four nodes, moved to meet the last.
    Families share their sizes and all have the n of the same channels, so the weights are kept; they are not to be
    written to.
    """
    return _interpolation(tuple(sizes.tolist()), tuple(at.tolist()))


@lru_cache(maxsize=16)
def _interpolation(tabled: tuple[int, ...], wanted_at: tuple[int, ...]) -> FloatArray:
    sizes, at = np.array(tabled), np.array(wanted_at)
    x, wanted = np.log(sizes.astype(np.float64)), np.log(at.astype(np.float64))
    weights = np.zeros((at.size, sizes.size))
    span = min(4, sizes.size)
    first = np.clip(np.searchsorted(sizes, at) - 2, 0, sizes.size - span)
    nodes = first[:, None] + np.arange(span)
    cubic = np.ones((at.size, span))
    for i in range(span):
        for other in range(span):
            if other != i:
                cubic[:, i] *= (wanted - x[nodes[:, other]]) / (x[nodes[:, i]] - x[nodes[:, other]])
    np.put_along_axis(weights, nodes, cubic, axis=1)
    beyond = np.flatnonzero(at > sizes[-1])
    last = np.arange(sizes.size - span, sizes.size)
    centred = x[last] - x[last].mean()
    weights[beyond] = 0.0
    weights[np.ix_(beyond, last)] = np.outer(wanted[beyond] - x[-1], centred / (centred @ centred))
    weights[beyond, -1] += 1.0
    return weights
