"""The resolution step of simulated channels."""

import numpy as np
import pytest
from made_channels import Readings, conditions, rounded


def simulated(step: float, n: int, *, offset: float = 0.0, channels: int = 100) -> Readings:
    rng = np.random.default_rng([n, round(1e6 * step)])
    return offset + rounded(rng, rng.standard_normal((channels, n)), step)


@pytest.mark.parametrize("n", [50, 200, 1000, 10_000])
@pytest.mark.parametrize("step", [0.02, 0.05, 0.1, 0.25, 0.5, 1.0])
@pytest.mark.parametrize("offset", [0.0, 12_345.6])
def test_a_step_is_found(n: int, step: float, offset: float) -> None:
    found = conditions(simulated(step, n, offset=offset)).step
    right = np.mean(np.abs(found - step) <= 1e-6 * step)
    assert right >= (0.9 if step * np.sqrt(n) < 0.5 else 0.98)


@pytest.mark.parametrize("step", [0.1, 0.0305, 0.001, 10 / 4096, 2.5e-7, 3e5])
def test_a_step_is_found_through_the_noise_of_decimals(step: float) -> None:
    rng = np.random.default_rng(7)
    counts = np.rint(rng.normal(4000.0, 12.0, (50, 2000)))
    found = conditions(counts * step).step
    assert found == pytest.approx(np.full(50, step), rel=1e-9)


def test_counts_of_0_0305_printed_to_three_decimals_have_that_step() -> None:
    rng = np.random.default_rng(8)
    printed = np.round(np.rint(rng.normal(300.0, 10.0, (100, 2000))) * 0.0305, 3)
    found = conditions(printed).step
    # Printing moves the ends by up to 0.0005 each, over some 50 steps.
    assert np.mean(np.abs(found - 0.0305) < 2.5e-5) >= 0.99


def test_readings_stored_in_single_precision_keep_their_step() -> None:
    rng = np.random.default_rng(9)
    stored = (np.rint(rng.normal(2100.0, 9.0, (50, 1000))) * 0.1).astype(np.float32).astype(np.float64)
    assert conditions(stored).step == pytest.approx(np.full(50, 0.1), rel=1e-5)


@pytest.mark.parametrize("n", [200, 1000, 10_000])
@pytest.mark.parametrize("step", [0.02, 0.1, 0.5])
def test_one_per_cent_off_the_lattice_does_not_hide_it(n: int, step: float) -> None:
    rng = np.random.default_rng(n)
    readings = simulated(step, n)
    off = rng.random(readings.shape) < 0.01
    found = conditions(np.where(off, rng.standard_normal(readings.shape), readings)).step
    assert np.mean(np.abs(found - step) <= 1e-6 * step) >= 0.95


@pytest.mark.parametrize("n", [20, 50, 200, 1000, 10_000])
def test_unrounded_channels_have_no_step(n: int) -> None:
    rng = np.random.default_rng(n)
    found = conditions(rng.standard_normal((400, n)))
    assert not found.step.any()
    assert not found.rounded.any()


def test_a_lattice_with_values_left_out_keeps_its_step() -> None:
    rng = np.random.default_rng(3)
    counts = np.rint(rng.normal(0.0, 20.0, (50, 2000)))
    even_or_third = np.where((counts % 2 == 0) | (counts % 3 == 0), counts, counts + 1)
    assert np.all(conditions(even_or_third).step == 1.0)


def test_a_step_too_fine_to_matter_is_not_called_rounded() -> None:
    assert not conditions(simulated(0.005, 1000)).rounded.any()
    assert conditions(simulated(0.05, 1000)).rounded.all()


@pytest.mark.parametrize("missing", [0.02, 0.5])
def test_missing_readings_do_not_change_the_step(missing: float) -> None:
    rng = np.random.default_rng(4)
    readings = simulated(0.25, 400)
    readings[rng.random(readings.shape) < missing] = np.nan
    assert conditions(readings).step == pytest.approx(np.full(100, 0.25), rel=1e-9)
