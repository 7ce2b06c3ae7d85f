"""Clipping, stuck stretches, repeated values, drift and gaps of simulated channels."""

import numpy as np
import pytest
from made_channels import Readings, autoregression, conditions, rounded


def normal(n: int, *, channels: int = 200, step: float = 0.0, seed: int = 1) -> Readings:
    rng = np.random.default_rng([seed, n, round(1000 * step)])
    readings = rng.standard_normal((channels, n))
    return rounded(rng, readings, step) if step else readings


def clipped(readings: Readings, share: float) -> Readings:
    """Readings above their own upper quantile put at it."""
    return np.minimum(readings, np.quantile(readings, 1.0 - share, axis=1, keepdims=True, method="higher"))


@pytest.mark.parametrize(
    ("n", "share"), [(50, 0.05), (50, 0.2), (200, 0.05), (1000, 0.01), (1000, 0.2), (10_000, 0.01)]
)
def test_clipping_of_unrounded_readings_is_found_exactly(n: int, share: float) -> None:
    readings = clipped(normal(n), share)
    found = conditions(readings)
    at_top = np.sum(readings == readings.max(axis=1, keepdims=True), axis=1)
    assert np.array_equal(found.clipped_high, at_top)
    assert not found.clipped_low.any()
    turned = conditions(-readings)
    assert np.array_equal(turned.clipped_low, at_top)
    assert not turned.clipped_high.any()


@pytest.mark.parametrize(
    ("n", "step", "share", "least"),
    [
        (200, 0.1, 0.2, 0.95),
        (200, 0.5, 0.2, 0.9),
        (1000, 0.1, 0.05, 0.95),
        (1000, 0.25, 0.05, 0.9),
        (1000, 1.0, 0.2, 0.9),
        (10_000, 0.1, 0.01, 0.95),
        (10_000, 0.25, 0.05, 0.9),
        (10_000, 1.0, 0.05, 0.9),
    ],
)
def test_clipping_of_rounded_readings_is_found(n: int, step: float, share: float, least: float) -> None:
    found = conditions(clipped(normal(n, step=step), share))
    assert np.mean(found.clipped_high > 0) >= least
    assert np.mean(found.clipped_low > 0) <= 0.01


@pytest.mark.parametrize("step", [0.0, 0.1, 0.25])
@pytest.mark.parametrize("law", ["uniform", "exponential", "t"])
def test_other_laws_are_not_called_clipped(law: str, step: float) -> None:
    rng = np.random.default_rng(5)
    drawn: dict[str, Readings] = {
        "uniform": rng.random((200, 1000)) * np.sqrt(12.0),
        "exponential": rng.exponential(size=(200, 1000)),
        "t": rng.standard_t(5, (200, 1000)),
    }
    found = conditions(rounded(rng, drawn[law], step) if step else drawn[law])
    assert np.mean((found.clipped_low > 0) | (found.clipped_high > 0)) <= 0.02


@pytest.mark.parametrize("step", [0.0, 0.1, 0.5])
@pytest.mark.parametrize("coefficient", [0.0, 0.9])
def test_a_stuck_stretch_is_found(step: float, coefficient: float) -> None:
    rng = np.random.default_rng(6)
    readings = autoregression(rng, 100, 2000, (coefficient,)) * np.sqrt(1.0 - coefficient**2)
    readings = rounded(rng, readings, step) if step else readings
    readings[:, 600:900] = readings[:, 600:601]
    found = conditions(readings)
    assert np.mean(found.stuck >= 300) >= 0.98
    assert np.all(found.longest_run >= 300)
    assert np.median(found.stuck) <= 305
    assert not found.repeated.any()


def test_several_stuck_stretches_are_added_up() -> None:
    readings = normal(2000, channels=1)
    for first in (100, 500, 1500):
        readings[0, first : first + 40] = readings[0, first]
    found = conditions(readings)
    assert (found.longest_run[0], found.stuck[0]) == (40, 120)


def test_a_pair_of_equal_neighbours_is_not_stuck() -> None:
    readings = normal(500, channels=1)
    readings[0, 31] = readings[0, 30]
    found = conditions(readings)
    assert (found.longest_run[0], found.stuck[0]) == (2, 0)


@pytest.mark.parametrize("step", [0.0, 0.1, 0.25])
def test_a_value_filled_in_here_and_there_is_a_repeated_value(step: float) -> None:
    rng = np.random.default_rng(7)
    readings = normal(2000, step=step, channels=100)
    filled = readings[:, :1] * 0.0 + np.quantile(readings, 0.3, axis=1, keepdims=True, method="nearest")
    away = rng.random(readings.shape) < 0.2
    found = conditions(np.where(away, filled, readings))
    assert np.mean(found.repeated > 0) >= 0.98
    said = found.repeated > 0
    assert found.repeated_value[said] == pytest.approx(filled[said, 0], abs=1e-9)
    assert found.repeated[said] == pytest.approx(np.sum(away, axis=1)[said], rel=0.2)


def test_a_sharp_peak_is_no_repeated_value() -> None:
    rng = np.random.default_rng(8)
    found = conditions(rounded(rng, rng.laplace(size=(200, 1000)) / np.sqrt(2.0), 0.5))
    assert not found.repeated.any()


def test_random_walks_drift() -> None:
    walks = np.cumsum(np.random.default_rng(9).standard_normal((300, 2000)), axis=1)
    assert np.mean(conditions(walks).drifting) >= 0.8


@pytest.mark.parametrize("coefficient", [0.0, 0.6, 0.9])
def test_a_trend_drifts_and_its_rise_is_told(coefficient: float) -> None:
    readings = autoregression(np.random.default_rng(10), 200, 4000, (coefficient,)) * np.sqrt(1.0 - coefficient**2)
    found = conditions(readings + np.linspace(1.0, -1.0, 4000))
    assert np.mean(found.drifting) >= (0.95 if coefficient < 0.9 else 0.5)
    assert np.mean(found.rise) == pytest.approx(-2.0, abs=0.1)


@pytest.mark.parametrize(("n", "coefficient"), [(1000, 0.9), (4000, 0.9), (200, 0.6)])
def test_channels_about_a_level_do_not_drift(n: int, coefficient: float) -> None:
    found = conditions(autoregression(np.random.default_rng(n), 500, n, (coefficient,)))
    assert np.mean(found.drifting) <= 0.01


def test_a_gap_is_found_among_scattered_missing_readings() -> None:
    rng = np.random.default_rng(11)
    readings = normal(2000)
    readings[rng.random(readings.shape) < 0.1] = np.nan
    scattered = conditions(readings)
    assert np.mean(scattered.gaps) <= 0.01
    readings[:, 300:360] = np.nan
    found = conditions(readings)
    assert np.all(found.gaps)
    assert np.all(found.longest_gap >= 60)
    assert np.median(found.longest_gap) <= 62
    assert np.array_equal(found.missing, np.sum(np.isnan(readings), axis=1))
