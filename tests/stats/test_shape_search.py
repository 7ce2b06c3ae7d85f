"""The best of two shapes against scipy's optimiser, and the search on surfaces with known tops."""

from collections.abc import Callable

import numpy as np
import pytest
from numpy.typing import NDArray
from straightest import SAMPLES, own_sample, scan, straightest_r

from screener.stats.correlation import fit_families
from screener.stats.correlation.surface import axis, highest, values_at
from screener.stats.families import family_named

Array = NDArray[np.float64]

COUNTS = (20, 24)
AXES = (axis(COUNTS[0]), axis(COUNTS[1]))


@pytest.mark.parametrize(
    ("name", "own"),
    [("beta", ((0.5, 3.0), (0.7, 0.7), (8.0, 3.0), (30.0, 40.0))), ("F", ((2.0, 3.0), (4.0, 8.0), (30.0, 200.0)))],
)
@pytest.mark.parametrize(("n", "samples"), [(20, 6), (200, 2)])
def test_r_is_the_greatest_of_all_members_to_a_millionth(
    name: str, own: tuple[tuple[float, ...], ...], n: int, samples: int
) -> None:
    family, rng, size = family_named(name), np.random.default_rng(n), (samples, n)
    drawn = [own_sample(family, shapes, rng, size) for shapes in own] + [draw(rng, size) for draw in SAMPLES.values()]
    ordered = np.sort(np.concatenate(drawn), axis=1)
    r = fit_families(ordered, np.full(len(ordered), n), [family], "filliben").r[:, 0]
    scanned = scan(family, n)
    best = np.array([straightest_r(scanned, sample) for sample in ordered])
    assert r == pytest.approx(best, abs=1e-6)


def on_points(height: Callable[[Array, Array], Array]) -> Array:
    """One surface, [1, N, M], given by its height at two coordinates."""
    return height(AXES[0].points[:, None], AXES[1].points[None, :])[None]


@pytest.mark.parametrize(
    ("top", "expected"),
    [
        ((0.3, -0.2), (0.3, -0.2)),
        # Beyond an edge the best place is on it: where the ridge across both coordinates crosses the edge.
        ((0.3, -1.4), (0.3 - 0.8 * 0.4, -1.0)),
        ((1.5, 0.1), (1.0, 0.1 + 0.8 * 0.5)),
        ((1.6, 1.6), (1.0, 1.0)),
        # On a point, and on an edge.
        ((float(AXES[0].points[7]), float(AXES[1].points[11])), (float(AXES[0].points[7]), float(AXES[1].points[11]))),
        ((-1.0, 0.5), (-1.0, 0.5)),
    ],
)
def test_the_top_of_a_slanting_ridge_is_found_within_the_square(
    top: tuple[float, float], expected: tuple[float, float]
) -> None:
    def height(x: Array, y: Array) -> Array:
        across, along = x - top[0], y - top[1]
        return 1.0 - 0.1 * (across**2 + along**2 + 1.6 * across * along)

    value, place = highest(on_points(height), AXES)
    x, y = np.meshgrid(np.linspace(-1, 1, 401), np.linspace(-1, 1, 401), indexing="ij")
    scanned = height(x, y)
    assert value[0] >= scanned.max() - 1e-9
    assert value[0] == pytest.approx(float(height(place[0, 0], place[0, 1])), abs=1e-12)
    assert place[0] == pytest.approx(expected, abs=1e-3)


@pytest.mark.parametrize("higher", [1e-5, -1e-5])
def test_the_higher_of_two_tops_is_found(higher: float) -> None:
    def height(x: Array, y: Array) -> Array:
        first = np.exp(-6.0 * ((x - 0.6) ** 2 + (y + 0.5) ** 2))
        return first + (1.0 + higher) * np.exp(-6.0 * ((x + 0.5) ** 2 + (y - 0.55) ** 2))

    _, place = highest(on_points(height), AXES)
    assert place[0] == pytest.approx((-0.5, 0.55) if higher > 0 else (0.6, -0.5), abs=0.01)


def test_values_between_points_are_those_of_a_smooth_surface() -> None:
    def height(x: Array, y: Array) -> Array:
        return np.exp(0.8 * x * y) * np.cos(2.0 * x - y)

    places = np.random.default_rng(0).uniform(-1.0, 1.0, (50, 2))
    places[0] = AXES[0].points[3], AXES[1].points[5]
    (found,) = values_at((on_points(height),), AXES, places)
    assert found == pytest.approx(height(places[:, 0], places[:, 1]), abs=1e-12)


def test_with_one_coordinate_the_higher_of_two_tops_is_found() -> None:
    line = (axis(64), axis(1))
    x = line[0].points
    surface = (np.exp(-9.0 * (x - 0.4) ** 2) + 1.001 * np.exp(-9.0 * (x + 0.6) ** 2))[None, :, None]
    value, place = highest(surface, line)
    fine = np.linspace(-1.0, 1.0, 400_001)
    expected = (np.exp(-9.0 * (fine - 0.4) ** 2) + 1.001 * np.exp(-9.0 * (fine + 0.6) ** 2)).max()
    assert value[0] == pytest.approx(expected, abs=1e-9)
    assert place[0, 0] == pytest.approx(-0.6, abs=1e-3)
