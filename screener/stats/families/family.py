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
class ShapeGrid:
    """The shapes of a family, as a grid that is even in coordinates in which quantiles change smoothly."""

    names: tuple[str, ...]
    """The shape parameters."""
    axes: tuple[tuple[float, float, int], ...]
    """First and last coordinate of each axis, and the points that its places are counted by; one for each shape."""
    parameters: Callable[..., tuple[FloatArray, ...]]
    """The shape parameters at coordinates, one array for each axis."""
    coordinates: Callable[..., tuple[float, ...]]
    """The coordinates of shape parameters: the inverse, for single numbers."""
    nodes: tuple[int, ...]
    """Places along each axis at which quantiles are tabled, enough for r between them to hold eight digits."""
    angle: bool = False
    """The last coordinate is an angle, and its range symmetric in a quarter of a turn."""
    coordinate_name: str = ""
    """What the coordinate of a single shape is, for the axis of a plot."""

    @property
    def counts(self) -> tuple[int, ...]:
        """Points along each axis."""
        return tuple(count for _, _, count in self.axes)

    def at(self, steps: FloatArray) -> tuple[FloatArray, ...]:
        """The shape parameters at places float64[..., axes], in steps from the first point of each axis."""
        pairs = zip(self.axes, np.moveaxis(steps, -1, 0), strict=True)
        return self.parameters(*(first + step * (last - first) / (count - 1) for (first, last, count), step in pairs))

    def steps(self, *shapes: float) -> FloatArray:
        """The place of shape parameters on the grid, float64[axes]; the nearest one when they lie off it."""
        pairs = zip(self.axes, self.coordinates(*shapes), strict=True)
        steps = [(at - first) / (last - first) * (count - 1) for (first, last, count), at in pairs]
        return np.clip(steps, 0.0, np.array(self.counts) - 1.0)

    def smooth(self, places: FloatArray) -> FloatArray:
        """Steps, float64[..., axes], of places from -1 to 1 along each axis, in which quantiles are smoothest.

        For an angle that is the cosine of its double, on either side of which shapes change places.
        """
        part = 0.5 * (places + 1.0)
        if self.angle:
            first, last, _ = self.axes[-1]
            double = np.arccos(-np.cos(2.0 * first) * places[..., -1])
            part[..., -1] = np.clip((0.5 * double - first) / (last - first), 0.0, 1.0)
        return np.asarray(part * (np.array(self.counts) - 1.0), dtype=np.float64)


NO_SHAPES = ShapeGrid((), (), lambda: (), lambda: (), ())


def standard(*shapes: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Centre 0 and width 1, whatever the shapes."""
    return np.zeros_like(shapes[0]), np.ones_like(shapes[0])


@dataclass(frozen=True, slots=True)
class Family:
    """A location-scale family on its axis, with up to two shape parameters."""

    name: str
    support: Support
    quantile: Callable[..., FloatArray]
    """Standard quantiles at probabilities u and, broadcast against them, the shape parameters."""
    arises_from: str
    axis: Axis = Axis.LINEAR
    shapes: ShapeGrid = NO_SHAPES
    centre_and_width: Callable[..., tuple[FloatArray, FloatArray]] = standard
    """In closed form, from the shapes: how quantiles lie and spread, but for factors that change smoothly."""
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
    def shape_count(self) -> int:
        """How many shape parameters it has."""
        return len(self.shapes.names)

    @property
    def null_name(self) -> str:
        """The name under which the null distribution of r is tabled."""
        return self.null_of or self.name
