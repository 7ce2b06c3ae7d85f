"""The straightest member of a family with two shapes, found slowly: scipy's quantiles, a scan, scipy's optimiser."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy import optimize, stats

from screener.stats.families import Family
from screener.stats.positions import plotting_positions

Array = NDArray[np.float64]

SCIPY = {"beta": stats.beta, "F": stats.f}

LATTICE = 41
"""Places along each coordinate that are scanned."""

STARTS = 4
"""Local maxima of the scan that the optimiser starts from, the highest first."""

SAMPLES: dict[str, Callable[[np.random.Generator, tuple[int, int]], Array]] = {
    "normal": lambda rng, size: rng.standard_normal(size),
    "uniform": lambda rng, size: rng.random(size),
    "exponential": lambda rng, size: rng.standard_exponential(size),
    "two clusters": lambda rng, size: rng.standard_normal(size) + 6.0 * (rng.random(size) < 0.4),
}
"""Samples of other families, by what they are called."""


def own_sample(family: Family, shapes: tuple[float, ...], rng: np.random.Generator, size: tuple[int, int]) -> Array:
    """Samples of a member by numpy's generators."""
    draw = rng.beta if family.name == "beta" else rng.f
    return draw(shapes[0], shapes[1], size)


def quantiles(family: Family, n: int, steps: Array) -> Array:
    """Quantiles at the plotting positions, float64[G, n], of the members at places on the family's grid, [G, 2]."""
    member = SCIPY[family.name](*(shape[:, None] for shape in family.shapes.at(steps)))
    lower = plotting_positions(n)[: n // 2]
    middle = member.ppf(np.full(n % 2, 0.5))
    return np.concatenate([member.ppf(lower), middle, member.isf(lower[::-1])], axis=1)


@dataclass(frozen=True, slots=True)
class Scan:
    """All members of a family on a lattice over the region that its shapes are sought in, for samples of n."""

    family: Family
    n: int
    steps: Array
    """[G, 2]"""
    unit: Array
    """[G, n] quantiles of mean 0 and length 1."""


def scan(family: Family, n: int) -> Scan:
    """The lattice, with its edges."""
    axes = [np.linspace(0.0, count - 1.0, LATTICE) for count in family.shapes.counts]
    steps = np.stack([axis.ravel() for axis in np.meshgrid(*axes, indexing="ij")], axis=1)
    return Scan(
        family, n, steps, np.concatenate([unit(quantiles(family, n, part)) for part in np.split(steps, LATTICE)])
    )


def unit(values: Array) -> Array:
    """Rows of mean 0 and length 1."""
    centred = values - values.mean(axis=-1, keepdims=True)
    return np.asarray(centred / np.sqrt((centred**2).sum(axis=-1, keepdims=True)), dtype=np.float64)


def straightest_r(scanned: Scan, sample: Array) -> float:
    """The greatest r of a sorted sample, by definition, with any member of the region."""
    readings = unit(sample)
    r = (scanned.unit @ readings).reshape(LATTICE, LATTICE)
    around = np.pad(r, 1, constant_values=-np.inf)
    beside = [around[1 + i : 1 + i + LATTICE, 1 + j : 1 + j + LATTICE] for i in (-1, 0, 1) for j in (-1, 0, 1)]
    tops = np.flatnonzero((r >= np.max(beside, axis=0)).ravel())
    tops = tops[np.argsort(-r.ravel()[tops])][:STARTS]
    last = np.array(scanned.family.shapes.counts) - 1.0

    def short(part: Array) -> float:
        return 1.0 - float((unit(quantiles(scanned.family, scanned.n, (part * last)[None, :])) @ readings)[0])

    ends = [
        optimize.minimize(
            short,
            scanned.steps[top] / last,
            method="L-BFGS-B",
            bounds=[(0.0, 1.0)] * 2,
            options={"ftol": 1e-14, "gtol": 1e-9},
        )
        for top in tops
    ]
    return 1.0 - min(end.fun for end in ends)
