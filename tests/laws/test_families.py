"""Laws that hold for every family."""

import mpmath
import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import stats

from screener.stats.correlation import fit_families
from screener.stats.families import FAMILIES, Axis, Family
from screener.stats.ordering import sort_in_place

mpmath.mp.dps = 50

TAILS = np.array([1e-9, 1e-6, 1e-3, 0.01, 0.1, 0.3, 0.5, 0.7, 0.9, 0.99, 0.999, 1 - 1e-6, 1 - 1e-9])

REFERENCE = {
    "normal": stats.norm,
    "logistic": stats.logistic,
    "double exponential": stats.laplace,
    "Cauchy": stats.cauchy,
    "uniform": stats.uniform,
    "exponential": stats.expon,
    "Rayleigh": stats.rayleigh,
    "Maxwell-Boltzmann": stats.maxwell,
    "half-normal": stats.halfnorm,
    "largest extreme value": stats.gumbel_r,
    "smallest extreme value": stats.gumbel_l,
    "lognormal": stats.norm,
    "Weibull": stats.gumbel_l,
    "log-logistic": stats.logistic,
}
"""The same family in scipy; for a family on the log axis, the distribution of ln x."""

CUMULATIVE = {
    "normal": mpmath.ncdf,
    "logistic": lambda x: 1 / (1 + mpmath.exp(-x)),
    "double exponential": lambda x: mpmath.exp(x) / 2 if x < 0 else 1 - mpmath.exp(-x) / 2,
    "Cauchy": lambda x: mpmath.atan(x) / mpmath.pi + mpmath.mpf(1) / 2,
    "uniform": lambda x: x,
    "exponential": lambda x: -mpmath.expm1(-x),
    "Rayleigh": lambda x: -mpmath.expm1(-(x**2) / 2),
    "Maxwell-Boltzmann": lambda x: mpmath.gammainc(mpmath.mpf(3) / 2, 0, x**2 / 2, regularized=True),
    "half-normal": lambda x: mpmath.erf(x / mpmath.sqrt(2)),
    "largest extreme value": lambda x: mpmath.exp(-mpmath.exp(-x)),
    "smallest extreme value": lambda x: -mpmath.expm1(-mpmath.exp(x)),
}
"""Distribution functions from their textbook definitions, for 50-digit arithmetic."""
CUMULATIVE |= {
    "lognormal": CUMULATIVE["normal"],
    "Weibull": CUMULATIVE["smallest extreme value"],
    "log-logistic": CUMULATIVE["logistic"],
}

every_family = pytest.mark.parametrize("family", FAMILIES, ids=lambda family: family.name)


def r_of(readings: NDArray[np.float64], family: Family) -> NDArray[np.float64]:
    ordered = np.atleast_2d(readings).copy()
    n = sort_in_place(ordered)
    return fit_families(ordered, n, [family], "filliben").r[:, 0]


def own_sample(family: Family, n: int, seed: int) -> NDArray[np.float64]:
    sample = family.quantile(np.random.default_rng(seed).random(n))
    return np.exp(sample) if family.axis is Axis.LOG else sample


@every_family
def test_quantiles_agree_with_scipy(family: Family) -> None:
    # Above the median by the survival function, where scipy's own ppf of the half-normal loses eight digits.
    scipy_family = REFERENCE[family.name]
    reference = np.where(TAILS < 0.5, scipy_family.ppf(TAILS), scipy_family.isf(1 - TAILS))
    assert family.quantile(TAILS) == pytest.approx(reference, rel=1e-12, abs=1e-14)


@every_family
def test_quantiles_return_to_their_probability_in_fifty_digits(family: Family) -> None:
    for u, x in zip(TAILS, family.quantile(TAILS), strict=True):
        back = CUMULATIVE[family.name](mpmath.mpf(float(x)))
        exact = mpmath.mpf(float(u))
        assert abs(back - exact) <= 1e-10 * min(exact, 1 - exact) + mpmath.mpf(2) ** -52 * 4 * exact


@every_family
def test_quantiles_increase(family: Family) -> None:
    u = np.linspace(1e-9, 1 - 1e-9, 100_001)
    assert np.all(np.diff(family.quantile(u)) > 0)


@every_family
def test_r_of_the_exact_quantiles_is_one(family: Family) -> None:
    from screener.stats.positions import plotting_positions

    exact = family.quantile(plotting_positions(200))
    readings = np.exp(exact) if family.axis is Axis.LOG else exact
    assert r_of(readings, family)[0] == pytest.approx(1.0, abs=1e-10)


@every_family
def test_r_ignores_location_and_scale(family: Family) -> None:
    sample = own_sample(family, 300, seed=3)
    moved = sample**2.5 * 7.0 if family.axis is Axis.LOG else sample * 2.5 + 7.0
    assert r_of(moved, family)[0] == pytest.approx(r_of(sample, family)[0], abs=1e-10)


@every_family
def test_own_samples_are_rejected_at_the_stated_rate(family: Family) -> None:
    from screener.stats.null.packing import shipped_table

    samples, n, alpha = 4000, 60, 0.05
    readings = np.stack([own_sample(family, n, seed) for seed in range(samples)])
    share = np.mean(r_of(readings, family) < shipped_table().critical(family.null_name, n, alpha))
    assert share == pytest.approx(alpha, abs=4 * np.sqrt(alpha * (1 - alpha) / samples))


@every_family
def test_one_channel_alone_scores_as_it_does_among_many(family: Family) -> None:
    rng = np.random.default_rng(5)
    readings = np.exp(rng.standard_normal((101, 257)))
    readings[3, 10:30] = np.nan
    together = r_of(readings, family)
    alone = np.array([r_of(channel, family)[0] for channel in readings])
    assert np.array_equal(together, alone)
