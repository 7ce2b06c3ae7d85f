"""The null distribution of r for families with shapes, read at the estimated shape.

r is the largest over the shapes, and its distribution depends on the true shape, which is not known. What is tabled is
therefore its distribution given the estimated shape, for samples of true shapes spread over the whole grid; then the
quantiles are moved until samples of every one of those true shapes fall below them at the stated rate.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtri

from screener.stats.correlation.on_grid import carried
from screener.stats.correlation.projection import project
from screener.stats.correlation.shape_search import best_shape, shape_table
from screener.stats.families import Family
from screener.stats.families.family import FloatArray
from screener.stats.null.simulate import CHUNK_READINGS, LOGIT_GRID, sorted_uniforms
from screener.stats.null.table import NullRows, interpolation
from screener.stats.null.tail import fitted_tail, tail_excess
from screener.stats.ordering import differences

IntArray = NDArray[np.int64]

PROBABILITIES: FloatArray = np.concatenate(
    [
        [1e-4, 2e-4, 5e-4, 0.001, 0.002, 0.005, 0.01, 0.015, 0.02, 0.03, 0.04, 0.05, 0.06, 0.08, 0.1, 0.13, 0.16],
        [0.2, 0.25, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.95, 0.98, 0.99],
    ]
)

SIZES = (5, 7, 10, 14, 20, 28, 40, 60, 90, 140, 220, 350, 600, 1000, 2000, 5000, 20_000, 100_000)
"""Sample sizes tabled."""

INNER = {1: 21, 2: 11}
"""Tabled places between the edges of the shape grid, in each of one or two coordinates."""

TRUTHS = {1: 21, 2: 13}
"""True shapes simulated, in each coordinate."""

ANCHORS = (0.01, 0.05, 0.2, 0.5, 0.8, 0.95)
"""Probabilities at which the rates of all true shapes are made equal; between them the correction is interpolated."""

ROUNDS = 60
GAIN = 0.125

TAIL_FROM = 0.01
COUNTED = 50
"""Samples that a tail is fitted to at the least."""

FLOOR = 0.002
"""Probabilities below this are read from the fitted tail."""


def samples_at(n: int, shapes: int) -> int:
    """Samples simulated at n, over all true shapes; twice as many for two shapes, which have more of them."""
    return shapes * int(min(210_000, max(12_000, 5e8 // n)))


@dataclass(frozen=True, slots=True)
class ShapedTable:
    """The null of one family given the estimated shape, at N sample sizes."""

    counts: tuple[int, ...]
    """Points of the family's shape grid in each coordinate."""
    sizes: IntArray
    """[N] increasing."""
    log_gap: FloatArray
    """[N, places, probabilities]"""
    tail_shape: FloatArray
    """[N]"""
    tail_scale: FloatArray
    """[N]"""
    samples: IntArray
    """[N] samples simulated."""

    def rows(self, n: IntArray, steps: FloatArray) -> NullRows:
        """The null of each of C channels, with n int64[C] and estimated shapes float64[C, d] in grid steps."""
        distinct, which = np.unique(n, return_inverse=True)
        weights = interpolation(self.sizes, np.maximum(distinct, self.sizes[0]))
        nearest = np.argmax(weights, axis=1)[which]
        at_n = np.einsum("un,nkp->ukp", weights, self.log_gap)
        members, shares = tabled_places(steps, self.counts)
        gap = np.einsum("cw,cwp->cp", shares, at_n[which[:, None], members])
        return NullRows(
            probabilities=PROBABILITIES,
            log_gap=np.minimum.accumulate(gap, axis=1),
            tail_shape=self.tail_shape[nearest],
            tail_scale=self.tail_scale[nearest],
            floor=np.full(n.size, FLOOR),
        )


@dataclass(frozen=True, slots=True)
class ShapedNode:
    """The null of one family at one n, given the estimated shape."""

    log_gap: FloatArray
    """[places, probabilities] ln(1 - r) at each p, decreasing in p."""
    tail_shape: float
    tail_scale: float


def tabled_places(steps: FloatArray, counts: tuple[int, ...]) -> tuple[IntArray, FloatArray]:
    """Tabled places, int64[C, 2^d], and weights between which estimated shapes, float64[C, d] in grid steps, lie.

    A shape at the edge of the grid is a place of its own: there the maximum of r was not reached.
    """
    inner = INNER[len(counts)]
    members = np.zeros((steps.shape[0], 1), dtype=np.int64)
    weights = np.ones((steps.shape[0], 1))
    for axis, count in enumerate(counts):
        last = count - 1.0
        at = np.clip(steps[:, axis] / last, 0.0, 1.0) * (inner - 1)
        cell = np.minimum(at.astype(np.int64), inner - 2)
        part = at - cell
        low, high = steps[:, axis] < 1e-6, steps[:, axis] > last - 1e-6
        first = np.where(low, 0, np.where(high, inner, cell + 1))
        share = np.where(low, 0.0, np.where(high, 1.0, part))
        index = np.stack([first, first + 1], axis=1)
        both = np.stack([1.0 - share, share], axis=1)
        members = (members[:, :, None] * (inner + 2) + index[:, None, :]).reshape(steps.shape[0], -1)
        weights = (weights[:, :, None] * both[:, None, :]).reshape(steps.shape[0], -1)
    return members, weights


def simulated(
    family: Family, n: int, rule: str, samples: int, rng: np.random.Generator
) -> tuple[FloatArray, FloatArray, IntArray]:
    """ln(1 - r), estimated shape in grid steps, and number of the true shape, of samples of many true shapes."""
    counts = family.shapes.counts
    axes = [np.linspace(0.0, count - 1.0, TRUTHS[len(counts)]) for count in counts]
    truths = np.stack([axis.ravel() for axis in np.meshgrid(*axes, indexing="ij")], axis=1)
    each = max(1, samples // truths.shape[0])
    parts = [simulated_at(family, truth, n, rule, each, rng) for truth in truths]
    gaps, steps = (np.concatenate(part) for part in zip(*parts, strict=True))
    return gaps, steps, np.repeat(np.arange(truths.shape[0]), each)


def simulated_at(
    family: Family, truth: FloatArray, n: int, rule: str, samples: int, rng: np.random.Generator
) -> tuple[FloatArray, FloatArray]:
    """ln(1 - r), float64[samples], and estimated shape, float64[samples, d], of samples of one true shape, [d]."""
    grid = family.quantile(1.0 / (1.0 + np.exp(-LOGIT_GRID)), *family.shapes.at(truth))
    finite = np.isfinite(grid)
    gaps, steps = np.empty(samples), np.empty((samples, truth.size))
    chunk = max(1, CHUNK_READINGS // n)
    for first in range(0, samples, chunk):
        count = min(chunk, samples - first)
        u = sorted_uniforms(rng, count, n)
        ordered = np.interp(np.log(u) - np.log1p(-u), LOGIT_GRID[finite], grid[finite])
        projection = project(ordered, np.full(count, n), np.arange(count), rule, differences)
        for x in carried(projection):
            best = best_shape(x, shape_table(family.name, x.start))
            gaps[first + x.members] = np.log(np.maximum(1.0 - best.r, 1e-16))
            steps[first + x.members] = best.coordinates
    return gaps, steps


def node_from_samples(gaps: FloatArray, steps: FloatArray, truth: IntArray, counts: tuple[int, ...]) -> ShapedNode:
    """The tabled null of simulated ln(1 - r), float64[S], estimated shapes, [S, d], and true shapes, int64[S]."""
    order = np.argsort(-gaps)
    gaps, truth = gaps[order], truth[order]
    members, weights = tabled_places(steps[order], counts)
    places = (INNER[len(counts)] + 2) ** len(counts)
    quantiles = np.stack([_place_quantiles(gaps, members, weights, place) for place in range(places)])
    quantiles = _filled(quantiles)
    shifts = np.stack([_equalising(gaps, members, weights, truth, quantiles, p) for p in ANCHORS], axis=1)
    deviates = ndtri(PROBABILITIES)
    moved = np.stack([np.interp(deviates, ndtri(ANCHORS), shift) for shift in shifts])
    quantiles = quantiles + moved
    threshold = (weights * quantiles[members, int(np.searchsorted(PROBABILITIES, TAIL_FROM))]).sum(axis=1)
    excess = (gaps - threshold)[gaps > threshold]
    if excess.size >= COUNTED:
        xi, sigma = fitted_tail(excess, max(0.1, float(-threshold.max())))
    else:
        # Too few to fit: the exponential tail that the quantiles at 1 % and 5 % suggest.
        near, far = (quantiles[:, int(np.searchsorted(PROBABILITIES, p))] for p in (0.05, 0.01))
        xi, sigma = 0.0, max(1e-3, float((far - near).mean()) / np.log(5.0))
    below = PROBABILITIES < TAIL_FROM
    at_threshold = quantiles[:, int(np.searchsorted(PROBABILITIES, TAIL_FROM))]
    quantiles[:, below] = at_threshold[:, None] + tail_excess(PROBABILITIES[below] / TAIL_FROM, xi, sigma)
    quantiles = np.minimum.accumulate(np.minimum(quantiles, -1e-9), axis=1)
    return ShapedNode(quantiles, xi, sigma + xi * float(tail_excess(PROBABILITIES[0] / TAIL_FROM, xi, sigma)))


def _place_quantiles(gaps: FloatArray, members: IntArray, weights: FloatArray, place: int) -> FloatArray:
    """Weighted quantiles of decreasing gaps at one place; NaN when almost nothing was estimated there."""
    here = np.where(members == place, weights, 0.0).sum(axis=1)
    used = here > 0.0
    total = here.sum()
    if total < 30.0:
        return np.full(PROBABILITIES.size, np.nan)
    rank = (np.cumsum(here[used]) - 0.5 * here[used]) / total
    return np.asarray(np.interp(PROBABILITIES, rank, gaps[used]), dtype=np.float64)


def _filled(quantiles: FloatArray) -> FloatArray:
    """Places at which almost nothing is ever estimated get the least strict quantiles of all."""
    missing = np.isnan(quantiles[:, 0])
    quantiles[missing] = quantiles[~missing].max(axis=0)
    return quantiles


def _equalising(
    gaps: FloatArray, members: IntArray, weights: FloatArray, truth: IntArray, quantiles: FloatArray, p: float
) -> FloatArray:
    """How far the quantile at p must move at each place, so that samples of every true shape exceed it at rate p."""
    start = np.array([np.interp(ndtri(p), ndtri(PROBABILITIES), row) for row in quantiles])
    level = start.copy()
    truths, places = int(truth.max()) + 1, quantiles.shape[0]
    each = np.bincount(truth)
    for _ in range(ROUNDS):
        beyond = np.flatnonzero(gaps > (weights * level[members]).sum(axis=1))
        rate = np.bincount(truth[beyond], minlength=truths) / each
        key = truth[beyond, None] * places + members[beyond]
        near = np.bincount(key.ravel(), weights[beyond].ravel(), truths * places).reshape(truths, places) + 1e-3
        level += GAIN * ((rate / p - 1.0) @ (near / near.sum(axis=0))) * min(1.0, 4.0 * (1.0 - p))
    return np.asarray(level - start, dtype=np.float64)
