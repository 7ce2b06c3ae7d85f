"""The shape curve against correlations computed one by one."""

import numpy as np
import pytest

from screener.stats.correlation import fit_families
from screener.stats.families import FAMILIES, Family
from screener.stats.points import kept_ranks
from screener.stats.positions import plotting_positions
from screener.stats.shape_curve import shape_curve

ONE_SHAPE = [family for family in FAMILIES if family.shape_count == 1]


@pytest.mark.parametrize("family", ONE_SHAPE, ids=lambda family: family.name)
def test_with_all_readings_kept_the_curve_holds_the_correlations_themselves(family: Family) -> None:
    sample = np.sort(np.random.default_rng(1).gamma(4.0, size=200))
    at, r = shape_curve(sample, 200, family, "filliben")
    shapes = family.shapes.at(np.linspace(0.0, family.shapes.counts[0] - 1.0, at.size)[:, None])[0]
    for place in (0, 57, 200):
        quantiles = family.quantile(plotting_positions(200), shapes[place])
        assert r[place] == pytest.approx(np.corrcoef(sample, quantiles)[0, 1], abs=1e-12)


@pytest.mark.parametrize("family", ONE_SHAPE, ids=lambda family: family.name)
def test_its_top_is_the_r_that_is_reported_also_when_readings_are_thinned(family: Family) -> None:
    n = 20_000
    sample = np.sort(np.random.default_rng(2).gamma(4.0, size=n))
    fits = fit_families(sample[None, :], np.array([n]), [family], "filliben")
    at, r = shape_curve(sample[kept_ranks(n)], n, family, "filliben")
    assert r.max() == pytest.approx(fits.r[0, 0], abs=2e-4)
    first, last, count = family.shapes.axes[0]
    reported = first + fits.steps[0, 0, 0] * (last - first) / (count - 1)
    assert at[np.argmax(r)] == pytest.approx(reported, abs=0.02 * (last - first))
