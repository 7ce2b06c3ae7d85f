"""The scatter of r when a channel is measured again, by simulation."""

from typing import Any

import numpy as np
import pytest
from made_channels import autoregression
from scipy import stats

from screener.stats.points import kept_ranks
from screener.stats.positions import plotting_positions
from screener.stats.r_error import change_p, r_error, worth

PAIRS = 400
LAWS: dict[str, Any] = {"normal": stats.norm(), "uniform": stats.uniform(), "exponential": stats.expon()}
LAWS |= {"gamma": stats.gamma(9)}
CRITICAL = {200: 0.9932, 5000: 0.99966}
"""At alpha .05, from NIST/SEMATECH at n = 200 and its continuation."""


@pytest.mark.parametrize("n", CRITICAL)
@pytest.mark.parametrize("law", LAWS)
def test_of_channels_measured_twice_few_have_changed_by_chance(law: str, n: int) -> None:
    standard, ranks = stats.norm.ppf(plotting_positions(n)), kept_ranks(n)
    readings = np.sort(LAWS[law].rvs(size=(2 * PAIRS, n), random_state=n), axis=1)
    r = np.array([np.corrcoef(channel, standard)[0, 1] for channel in readings])
    error = np.array([r_error(c[ranks], ranks, n, standard[ranks], CRITICAL[n]) for c in readings])
    p = change_p(r[:PAIRS] - r[PAIRS:], np.hypot(error[:PAIRS], error[PAIRS:]))
    assert np.mean(p < 0.05) < 0.11
    assert np.mean(p < 0.001) < 0.01


@pytest.mark.parametrize("coefficient", [0.5, 0.9])
@pytest.mark.parametrize("law", ["normal", "exponential", "uniform"])
def test_of_channels_that_follow_themselves_few_have_changed_by_chance_either(law: str, coefficient: float) -> None:
    n = 2000
    standard, ranks = stats.norm.ppf(plotting_positions(n)), kept_ranks(n)
    latent = autoregression(np.random.default_rng(7), PAIRS, n, (coefficient,)) * np.sqrt(1 - coefficient**2)
    readings = np.sort(LAWS[law].ppf(stats.norm.cdf(latent)), axis=1)
    r = np.array([np.corrcoef(channel, standard)[0, 1] for channel in readings])
    # r of normal channels in this condition gives the critical value that matching would find.
    normal = np.sort(autoregression(np.random.default_rng(8), PAIRS, n, (coefficient,)), axis=1)
    critical = float(np.quantile([np.corrcoef(channel, standard)[0, 1] for channel in normal], 0.05))
    tau_4 = (1 + coefficient**4) / (1 - coefficient**4)
    independent = worth(n, n / tau_4)
    assert independent == pytest.approx(n * (1 - coefficient**2) / (1 + coefficient**2))
    error = np.array([r_error(c[ranks], ranks, n, standard[ranks], critical, independent) for c in readings])
    half = PAIRS // 2
    p = change_p(r[:half] - r[half:], np.hypot(error[:half], error[half:]))
    assert np.mean(p < 0.05) < 0.09
    assert np.mean(p < 0.001) < 0.015


@pytest.mark.parametrize("law", ["uniform", "exponential", "gamma"])
def test_away_from_the_family_the_error_is_the_scatter_of_r(law: str) -> None:
    n = 5000
    standard, ranks = stats.norm.ppf(plotting_positions(n)), kept_ranks(n)
    readings = np.sort(LAWS[law].rvs(size=(300, n), random_state=1), axis=1)
    r = np.array([np.corrcoef(channel, standard)[0, 1] for channel in readings])
    error = [r_error(channel[ranks], ranks, n, standard[ranks], CRITICAL[n]) for channel in readings]
    assert np.median(error) == pytest.approx(r.std(), rel=0.2)


def test_equal_readings_have_no_error() -> None:
    ranks = kept_ranks(20)
    assert np.isnan(r_error(np.ones(20), ranks, 20, stats.norm.ppf(plotting_positions(20)), 0.95))


def test_the_probability_of_a_difference_is_that_of_the_normal() -> None:
    np.testing.assert_allclose(change_p(np.array([1.96, -3.0]), np.ones(2)), 2 * stats.norm.sf([1.96, 3.0]))
