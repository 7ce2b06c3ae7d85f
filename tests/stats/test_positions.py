"""Plotting positions by name, by number and exact."""

import numpy as np
import pytest
from scipy import stats

from screener.errors import PlanError
from screener.stats.positions import OFFSETS, RULES, plotting_positions


@pytest.mark.parametrize("rule", RULES)
def test_positions_increase_and_are_symmetric(rule: str) -> None:
    for n in (1, 2, 3, 10, 101):
        u = plotting_positions(n, rule)
        assert u.shape == (n,)
        assert np.all(np.diff(u) > 0)
        assert u == pytest.approx(1.0 - u[::-1], abs=1e-15)


def test_exact_positions_are_the_published_median_ranks() -> None:
    # Median ranks of n = 5, to four digits, as in every table of median ranks (here checked by the Beta quantile).
    assert plotting_positions(5, "exact").round(4).tolist() == [0.1294, 0.3138, 0.5, 0.6862, 0.8706]
    assert plotting_positions(5, "exact") == pytest.approx(stats.beta.ppf(0.5, np.arange(1, 6), np.arange(5, 0, -1)))


def test_filliben_positions_follow_the_handbook_formula() -> None:
    # NIST/SEMATECH e-Handbook 1.3.3.21.
    u = plotting_positions(10)
    assert u[-1] == pytest.approx(0.5**0.1, abs=1e-15)
    assert u[0] == pytest.approx(1 - 0.5**0.1, abs=1e-15)
    assert u[1:-1] == pytest.approx((np.arange(2, 10) - 0.3175) / 10.365, abs=1e-15)


@pytest.mark.parametrize("rule", OFFSETS)
def test_a_bare_number_is_the_a_of_the_formula(rule: str) -> None:
    assert np.array_equal(plotting_positions(20, str(OFFSETS[rule])), plotting_positions(20, rule))


@pytest.mark.parametrize("rule", ["bloom", "1", "-0.1", "nan", ""])
def test_an_unknown_rule_is_refused_with_the_known_ones(rule: str) -> None:
    with pytest.raises(PlanError, match=r"There are no plotting positions .* Known: filliben, exact, hazen"):
        plotting_positions(5, rule)
