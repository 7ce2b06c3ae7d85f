"""tau_3, tau_4 and the effective number of readings of simulated channels."""

import numpy as np
import pytest
from made_channels import autoregression, conditions, true_tau

from screener.stats.conditions import autocorrelation

MODELS = [(0.3,), (0.6,), (0.9,), (-0.7,), (1.2, -0.5), (0.3, 0.4), (0.0, 0.8), (1.5, -0.8)]


@pytest.mark.parametrize(("n", "bias"), [(50, 0.03), (200, 0.002), (1000, 0.0005), (10_000, 0.0001)])
def test_tau_of_independent_readings_is_near_one(n: int, bias: float) -> None:
    found = conditions(np.random.default_rng(n).standard_normal((1000 if n <= 1000 else 200, n)))
    assert abs(np.mean(found.tau_4) - 1.0) <= bias
    assert abs(np.mean(found.tau_3) - 1.0) <= 5 * bias
    assert np.all(found.tau_4 >= 1.0)


@pytest.mark.parametrize(("n", "tolerance"), [(200, 0.2), (1000, 0.06), (4000, 0.04), (10_000, 0.03)])
@pytest.mark.parametrize("model", MODELS)
def test_mean_tau_4_is_near_the_true_one(model: tuple[float, ...], n: int, tolerance: float) -> None:
    rng = np.random.default_rng([n, len(model), round(100 * abs(model[0]))])
    found = conditions(autoregression(rng, 600 if n <= 1000 else 150, n, model))
    assert np.mean(found.tau_4) == pytest.approx(true_tau(model, 4), rel=tolerance)


@pytest.mark.parametrize("model", MODELS)
def test_mean_tau_3_is_near_the_true_one_in_long_records(model: tuple[float, ...]) -> None:
    found = conditions(autoregression(np.random.default_rng(1), 150, 10_000, model))
    assert np.mean(found.tau_3) == pytest.approx(true_tau(model, 3), rel=0.05)


@pytest.mark.parametrize("n", [50, 200])
def test_tau_4_of_short_strongly_dependent_records_is_of_the_right_size(n: int) -> None:
    found = conditions(autoregression(np.random.default_rng(n), 600, n, (0.9,)))
    assert np.mean(found.tau_4) == pytest.approx(true_tau((0.9,), 4), rel=0.25)


@pytest.mark.parametrize("coefficient", [0.97, 0.99])
def test_tau_4_of_slow_channels_is_found_from_sums_of_rows(coefficient: float) -> None:
    found = conditions(autoregression(np.random.default_rng(5), 200, 10_000, (coefficient,)))
    assert np.mean(found.tau_4) == pytest.approx(true_tau((coefficient,), 4), rel=0.06)


def test_tau_4_of_a_lasting_oscillation_is_found_lag_by_lag() -> None:
    model = (1.9, -0.99)
    found = conditions(autoregression(np.random.default_rng(6), 60, 10_000, model))
    assert np.mean(found.tau_4) == pytest.approx(true_tau(model, 4), rel=0.15)


@pytest.mark.parametrize("period", [10, 30, 50, 100, 500])
def test_a_sine_under_noise_lowers_the_effective_n(period: int) -> None:
    rng = np.random.default_rng(period)
    phase = rng.random((200, 1))
    swing = np.sqrt(2.0) * np.sin(2.0 * np.pi * (np.arange(4000) / period + phase))
    found = conditions(swing + rng.standard_normal((200, 4000)))
    lag = np.arange(1, 1001)
    true = 1.0 + 2.0 * np.sum((0.5 * np.cos(2.0 * np.pi * lag / period)) ** 4)
    # Estimated from sums of 64 rows, a swing of 500 rows looks a little smaller than it is.
    assert 0.75 * true <= np.mean(found.tau_4) <= 1.1 * true


@pytest.mark.parametrize("coefficient", [0.6, 0.9])
def test_missing_readings_leave_tau_4_as_it_is(coefficient: float) -> None:
    rng = np.random.default_rng(7)
    readings = autoregression(rng, 200, 4000, (coefficient,))
    whole = np.mean(conditions(readings).tau_4)
    readings[rng.random(readings.shape) < 0.2] = np.nan
    readings[:, 700:900] = np.nan
    assert np.mean(conditions(readings).tau_4) == pytest.approx(whole, rel=0.03)


def test_every_second_reading_missing_is_no_dependence() -> None:
    readings = np.random.default_rng(8).standard_normal((200, 2000))
    readings[:, ::2] = np.nan
    found = conditions(readings)
    assert np.mean(found.serial) <= 0.01
    assert np.mean(found.tau_4) == pytest.approx(1.0, abs=0.002)


def test_the_first_order_coefficient_is_recovered() -> None:
    for coefficient in (-0.7, 0.6, 0.9):
        found = conditions(autoregression(np.random.default_rng(9), 100, 10_000, (coefficient,)))
        assert np.mean(found.ar) == pytest.approx(coefficient, abs=0.02)
        assert np.all(found.serial)


def test_effective_n_of_independent_readings_is_n() -> None:
    found = conditions(np.random.default_rng(10).standard_normal((500, 300)))
    independent = ~found.serial
    assert np.mean(independent) >= 0.99
    assert np.all(found.n_effective[independent] == 300)
    assert np.all(found.ar[independent] == 0.0)


@pytest.mark.parametrize("rows", [5, 50, 129, 1000])
def test_autocorrelation_agrees_with_its_definition(rows: int) -> None:
    readings = 5.0 + np.random.default_rng(rows).standard_normal((3, rows))
    less = readings - readings.mean(axis=1, keepdims=True)
    for channel, off in enumerate(less):
        defined = np.correlate(off, off, "full")[rows - 1 :] / np.sum(off**2)
        assert autocorrelation(readings)[channel] == pytest.approx(defined, abs=1e-12)


def test_autocorrelation_with_missing_readings_averages_over_known_pairs() -> None:
    rng = np.random.default_rng(11)
    readings = rng.standard_normal((1, 60))
    readings[0, [3, 4, 5, 30, 59]] = np.nan
    off = readings[0] - np.nanmean(readings[0])
    for lag in (1, 2, 7, 40):
        pairs = off[:-lag] * off[lag:]
        defined = np.nanmean(pairs) / np.nanmean(off**2) * (60 - lag) / 60
        assert autocorrelation(readings)[0, lag] == pytest.approx(defined, abs=1e-12)


def test_lag_one_in_a_block_is_the_mean_of_known_pairs() -> None:
    rng = np.random.default_rng(12)
    readings = rng.standard_normal((4, 1003))
    readings[1:, ::7] = np.nan
    readings[2, 40] = np.inf
    for channel, rho in enumerate(conditions(readings).rho_1):
        finite = np.where(np.isfinite(readings[channel]), readings[channel], np.nan)
        off = finite - np.nanmean(finite)
        assert rho == pytest.approx(np.nanmean(off[1:] * off[:-1]) / np.nanmean(off**2), abs=1e-5)
