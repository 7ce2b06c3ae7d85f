"""What a distribution family is to the rest of the house: data plus one function."""

from collections.abc import Callable
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


class Support(StrEnum):
    """Where the readings of a family can lie, before location and scale."""

    WHOLE_LINE = "whole line"
    HALF_LINE = "half line"
    INTERVAL = "interval"
    POSITIVE = "x > 0"


class Axis(StrEnum):
    """The scale on which the quantile plot of a family is straight."""

    LINEAR = "linear"
    LOG = "log"


@dataclass(frozen=True, slots=True)
class Shape:
    """A shape parameter, and the even grid of a coordinate in which quantiles change smoothly with it."""

    name: str
    grid: tuple[float, float, int]
    """First and last coordinate, and how many there are."""
    value: Callable[[FloatArray], FloatArray]
    """The parameter at a coordinate, same shape."""

    def coordinates(self) -> FloatArray:
        """The grid, float64[count], evenly spaced."""
        first, last, count = self.grid
        return np.linspace(first, last, count)


@dataclass(frozen=True, slots=True)
class Family:
    """A location-scale family on its axis, with up to two shape parameters."""

    name: str
    support: Support
    quantile: Callable[..., FloatArray]
    """Standard quantiles at probabilities u and, broadcast against them, the shape parameters."""
    arises_from: str
    axis: Axis = Axis.LINEAR
    shapes: tuple[Shape, ...] = ()
    typical: tuple[tuple[float, ...], ...] = ((),)
    """Shape parameters at which the laws of all families are tested."""
    diagnostic: bool = False
    """Tells how a channel departs; never named as its distribution."""
    null_of: str = ""
    """The family whose null distribution of r this one shares, as its mirror image or its logarithm; empty: its own."""
    branches: tuple[Callable[[FloatArray], FloatArray], Callable[[FloatArray], FloatArray]] | None = None
    """Where the quantile function has a kink at the median: the formulas below and above, each smooth beyond it."""
    costly: bool = False
    """The quantile function is slow; simulations read it from a fine grid."""

    @property
    def null_name(self) -> str:
        """The name under which the null distribution of r is tabled."""
        return self.null_of or self.name
