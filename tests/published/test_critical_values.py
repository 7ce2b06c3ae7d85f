"""Critical values and p against published tables and formulas."""

import math

import numpy as np
import pytest
from handbook import r_of, series, table
from scipy.stats import norm

from screener.stats.families import family_named
from screener.stats.null.packing import shipped_nulls
from screener.stats.null.simulate import simulated_log_gap

NIST_N, NIST_ALPHA, NIST_R = table("nist_normal_filliben")


def critical(n: int, alpha: float, family: str = "normal") -> float:
    return shipped_nulls().plain.critical(family, n, alpha)


@pytest.mark.parametrize("row", range(NIST_N.size), ids=[f"n={n}" for n in NIST_N])
def test_shipped_table_gives_the_handbook_critical_values(row: int) -> None:
    # NIST/SEMATECH e-Handbook 1.3.6.7.6, itself simulated: good to .0015 at 1 %, .001 at 5 %, .0002 from n = 100.
    n = int(NIST_N[row])
    for alpha, published in zip(NIST_ALPHA, NIST_R[row], strict=True):
        tolerance = 0.0002 if n >= 100 else {0.01: 0.0015, 0.05: 0.001}[float(alpha)]
        if (n, alpha) == (120, 0.01):
            # The printed .9841 is out of line with its neighbours; the next test settles it.
            tolerance = 0.0003
        assert critical(n, float(alpha)) == pytest.approx(published, abs=tolerance)


def test_the_one_handbook_value_out_of_line_is_settled_by_plain_simulation() -> None:
    # n = 120 at 1 %: printed .9841; 200,000 samples of numpy's normal generator, sorted, by the definition of r.
    rng = np.random.default_rng(120)
    u = (np.arange(1, 121) - 0.3175) / 120.365
    u[0], u[-1] = 1 - 0.5 ** (1 / 120), 0.5 ** (1 / 120)
    expected = norm.ppf(u)
    r = []
    for _ in range(10):
        sample = np.sort(rng.standard_normal((20_000, 120)), axis=1)
        sample -= sample.mean(axis=1, keepdims=True)
        r.append(sample @ expected / np.sqrt((sample**2).sum(axis=1) * (expected @ expected)))
    assert critical(120, 0.01) == pytest.approx(np.quantile(np.concatenate(r), 0.01), abs=0.0002)


def simulated_quantiles(family: str, n: int, rule: str, p: np.ndarray, samples: int = 20_000) -> np.ndarray:
    gaps = simulated_log_gap([family_named(family)], n, rule, samples, np.random.default_rng(7))[0]
    return np.asarray(-np.expm1(np.quantile(gaps, 1.0 - p)))


@pytest.mark.parametrize("n", [3, 5, 10, 20, 30, 50, 75, 100])
def test_blom_positions_give_the_percent_points_of_looney_and_gulledge(n: int) -> None:
    # Looney & Gulledge 1985, table 2, within .002 from 1 % to 10 %.
    sizes, probability, published = table("looney_gulledge_1985_normal_blom")
    wanted = (probability >= 0.01) & (probability <= 0.10)
    found = simulated_quantiles("normal", n, "blom", probability[wanted], samples=200_000)
    assert found == pytest.approx(published[sizes == n][0, wanted], abs=0.002)


@pytest.mark.parametrize("n", [10, 20, 50, 100, 200, 500, 1000])
def test_gringorten_positions_give_the_percent_points_of_vogel(n: int) -> None:
    # Vogel 1986, table 2: 1000 (1 - r) for the Gumbel distribution, within 3 % at 5 % and above, else 7 %.
    # The 20,000 samples here add up to 2 % at 5 % and 4 % below, taken as two standard errors.
    sizes, probability, published = table("vogel_1986_gumbel_gringorten")
    found = 1000.0 * (1.0 - simulated_quantiles("largest extreme value", n, "gringorten", probability))
    relative = np.where(probability >= 0.05, 0.05, 0.11)
    assert np.all(np.abs(found / published[sizes == n][0] - 1.0) < relative)


@pytest.mark.parametrize(("n", "rule"), [(5, "blom"), (10, "blom"), (20, "hazen"), (50, "hazen"), (200, "hazen")])
def test_weibull_plot_gives_the_quantiles_of_park(n: int, rule: str) -> None:
    # Park 2017: r on ln x, blom positions up to n = 10 and hazen above, within .001; .0005 more for these samples.
    sizes, probability, published = table("park_2017_weibull_plot")
    found = simulated_quantiles("Weibull", n, rule, probability, samples=200_000)
    assert found == pytest.approx(published[sizes == n][0], abs=0.0015)


@pytest.mark.parametrize("n", [15, 30, 100, 500, 2000])
def test_p_under_blom_agrees_with_the_approximation_of_royston(n: int) -> None:
    # Royston 1993: W' = r^2 under blom positions, ln(1 - W') nearly normal; its 5 % point is good to about .001.
    r = float(simulated_quantiles("normal", n, "blom", np.array([0.05]), samples=40_000)[0])
    u = math.log(math.log(n)) - math.log(n)
    v = math.log(math.log(n)) + 2.0 / math.log(n)
    deviate = (math.log(1.0 - r * r) + 1.2725 - 1.0521 * u) / (1.0308 - 0.26758 * v)
    assert norm.sf(deviate) == pytest.approx(0.05, abs=0.006)


def test_handbook_verdicts_hold() -> None:
    # 1.4.2.1.3: randn lies between the 1 % and the 5 % value; 1.4.2.2.3: randu is rejected as normal, not as uniform.
    n = series("randn").size
    assert critical(n, 0.01) < r_of("randn", "normal") < critical(n, 0.05)
    assert r_of("randu", "normal") < critical(500, 0.01)
    assert r_of("randu", "uniform") > critical(500, 0.05, "uniform")
    # 1.4.2.4.3: soulen is rejected by the table, whose readings are taken as unrounded.
    assert r_of("soulen", "normal") < critical(700, 0.01)
    # 1.3.6.7.6: n = 50, r = .985 is not rejected at 5 %.
    assert critical(50, 0.05) < 0.985


def test_at_seventy_readings_normal_ones_stay_at_or_above_0_983() -> None:
    # Common practice, no source.
    assert critical(70, 0.05) == pytest.approx(0.983, abs=0.0015)
