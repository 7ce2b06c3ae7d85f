"""The 95 % simultaneous band: its coverage in fitted samples, by a simulation of its own."""

import numpy as np
import pytest
from scipy import stats

from screener.stats.band import BEHIND, LEVELS, SIZES, band, has_band, local_level
from screener.stats.families import FAMILIES, family_named
from screener.stats.points import kept_ranks
from screener.stats.positions import plotting_positions

SAMPLES = 2000
LAWS = {"normal": stats.norm, "logistic": stats.logistic, "double exponential": stats.laplace}
LAWS |= {"largest extreme value": stats.gumbel_r, "smallest extreme value": stats.gumbel_l}


@pytest.mark.parametrize("n", [12, 70, 700])
@pytest.mark.parametrize("name", LAWS)
def test_all_readings_of_95_in_100_fitted_samples_lie_within(name: str, n: int) -> None:
    readings = np.sort(LAWS[name].rvs(loc=3.0, scale=2.0, size=(SAMPLES, n), random_state=n), axis=1)
    standard = LAWS[name].ppf(plotting_positions(n))
    slope = (readings @ (standard - standard.mean())) / (np.var(standard) * n)
    location = readings.mean(axis=1) - slope * standard.mean()
    low, high = band(family_named(name), n)
    fitted = ((readings - location[:, None]) / slope[:, None])[:, kept_ranks(n)]
    share = ((fitted >= low) & (fitted <= high)).all(axis=1).mean()
    # Three standard errors of this simulation, and as many of the tabled level's own.
    assert share == pytest.approx(0.95, abs=3 * np.sqrt(0.95 * 0.05 * (1 / SAMPLES + 1 / 10_000)) + 0.002)


def test_the_band_has_the_quantiles_of_the_beta_distribution() -> None:
    n, rank = 20, np.arange(1, 21)
    level = local_level("normal", n)
    low, high = band(family_named("normal"), n)
    np.testing.assert_allclose(low, stats.norm.ppf(stats.beta(rank, n + 1 - rank).ppf(level / 2)), rtol=1e-9)
    np.testing.assert_allclose(high, stats.norm.ppf(stats.beta(rank, n + 1 - rank).isf(level / 2)), rtol=1e-9)


@pytest.mark.parametrize("n", [3, 10, 33, 1000, 100_000, 5_000_000])
def test_the_ends_rise_and_enclose_the_expected_values(n: int) -> None:
    for family in filter(has_band, FAMILIES):
        low, high = band(family, n)
        expected = family.quantile(plotting_positions(n)[kept_ranks(n)])
        assert np.all(low < expected)
        assert np.all(expected < high)
        assert np.all(np.diff(low) > 0)
        assert np.all(np.diff(high) > 0)


def test_levels_are_tabled_for_every_family_with_a_band() -> None:
    assert set(LEVELS) == set(BEHIND.values())
    assert {len(levels) for levels in LEVELS.values()} == {len(SIZES)}
