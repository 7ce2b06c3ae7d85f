"""Confirmation: a channel against samples in its own autocorrelation."""

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.signal import lfilter

from screener.stats.confirming import Confirming, confirming
from screener.stats.families import FAMILIES, family_named
from screener.stats.null.condition import Condition
from screener.stats.null.confirm import own_log_gaps, own_process
from screener.stats.null.packing import shipped_nulls

NORMAL = [family_named("normal")]


def confirmed(readings: NDArray[np.float64], samples: int = 200) -> float:
    ready = confirming(readings, NORMAL, 0, shipped_nulls(), 0.05)
    assert isinstance(ready, Confirming), ready
    *_, last = ready.results(samples, 0.05, seed=1)
    assert last.samples == samples
    assert last.p == (last.as_small + 1) / (samples + 1)
    return last.p


def second_order(rng: np.random.Generator, n: int, first: float, second: float) -> NDArray[np.float64]:
    """A stationary AR(2) normal series."""
    return np.asarray(lfilter([1.0], [1.0, -first, -second], rng.standard_normal(n + 1000))[1000:], dtype=np.float64)


def test_p_of_channels_that_swing_is_even() -> None:
    rng = np.random.default_rng(1)
    p = np.array([confirmed(second_order(rng, 600, 1.5, -0.8)) for _ in range(120)])
    # Binomial with three standard errors of 120 channels.
    assert np.mean(p < 0.05) <= 0.05 + 0.06
    assert 0.2 - 0.11 <= np.mean(p < 0.2) <= 0.2 + 0.11
    assert np.mean(p) == pytest.approx(0.5, abs=0.08)


def test_a_skew_channel_that_follows_itself_is_not_confirmed_as_normal() -> None:
    rng = np.random.default_rng(2)
    assert confirmed(np.exp(0.5 * second_order(rng, 1000, 0.6, 0.0))) == 1 / 201


def test_samples_have_the_autocorrelation_of_the_channel() -> None:
    rng = np.random.default_rng(3)
    readings = second_order(rng, 20_000, 1.2, -0.5)
    process = own_process(readings, Condition("normal", (), "filliben", 20_000, 0, 0, 0.0, 1.0), 0.0)
    around = np.fft.irfft(process.amplitude**2, process.length)
    # Of an AR(2), rho_1 = a / (1 - b) and rho_2 = a rho_1 + b (Box, Jenkins & Reinsel, Time Series Analysis, ch. 3).
    assert around[:3] == pytest.approx([1.0, 0.8, 1.2 * 0.8 - 0.5], abs=0.03)


def test_missing_rows_stay_missing_in_the_samples() -> None:
    rng = np.random.default_rng(4)
    readings = rng.standard_normal(500)
    readings[100:300] = np.nan
    process = own_process(readings, Condition("normal", (), "filliben", 300, 0, 0, 0.0, 1.0), 0.0)
    assert np.all(np.isfinite(own_log_gaps(process, 20, rng)))


def test_what_cannot_be_scored_says_why() -> None:
    said = confirming(np.full(100, 3.0), NORMAL, 0, shipped_nulls(), 0.05)
    assert said == "constant: all 100 readings are 3"
    place = [family.name for family in FAMILIES].index("lognormal")
    below_zero = confirming(np.random.default_rng(5).normal(size=100), FAMILIES, place, shipped_nulls(), 0.05)
    assert below_zero == "readings outside the support of the lognormal family"
