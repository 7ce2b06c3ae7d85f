"""Laws that hold for every family, at typical shapes."""

from collections.abc import Callable
from typing import Any

import mpmath
import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import stats

from screener.stats.correlation import Fits, fit_families
from screener.stats.families import FAMILIES, Axis, Family
from screener.stats.null.packing import shipped_nulls
from screener.stats.ordering import sort_in_place
from screener.stats.positions import plotting_positions

mpmath.mp.dps = 50

Readings = NDArray[np.float64]
Member = tuple[Family, tuple[float, ...]]

TAILS = np.array([1e-9, 1e-6, 1e-3, 0.01, 0.1, 0.3, 0.5, 0.7, 0.9, 0.99, 0.999, 1 - 1e-6, 1 - 1e-9])

REFERENCE: dict[str, Callable[..., Any]] = {
    "normal": stats.norm,
    "logistic": stats.logistic,
    "double exponential": stats.laplace,
    "Cauchy": stats.cauchy,
    "Student t": stats.t,
    "uniform": stats.uniform,
    "beta": stats.beta,
    "exponential": stats.expon,
    "gamma": stats.gamma,
    "lognormal": stats.norm,
    "Weibull": stats.gumbel_l,
    "log-logistic": stats.logistic,
    "Rayleigh": stats.rayleigh,
    "Maxwell-Boltzmann": stats.maxwell,
    "half-normal": stats.halfnorm,
    "F": stats.f,
    "largest extreme value": stats.gumbel_r,
    "smallest extreme value": stats.gumbel_l,
    "generalized extreme value": lambda xi: stats.genextreme(-xi),
    "Tukey lambda": stats.tukeylambda,
}
"""The same family in scipy; for a family on the log axis, the distribution of ln x."""


def incomplete_beta(x: Any, a: float, b: float) -> Any:
    return mpmath.betainc(a, b, 0, x, regularized=True)


def student(x: Any, nu: float) -> Any:
    tail = incomplete_beta(nu / (nu + x * x), mpmath.mpf(nu) / 2, mpmath.mpf(1) / 2) / 2
    return tail if x < 0 else 1 - tail


CUMULATIVE: dict[str, Callable[..., Any]] = {
    "normal": mpmath.ncdf,
    "logistic": lambda x: 1 / (1 + mpmath.exp(-x)),
    "double exponential": lambda x: mpmath.exp(x) / 2 if x < 0 else 1 - mpmath.exp(-x) / 2,
    "Cauchy": lambda x: mpmath.atan(x) / mpmath.pi + mpmath.mpf(1) / 2,
    "Student t": student,
    "uniform": lambda x: x,
    "beta": incomplete_beta,
    "exponential": lambda x: -mpmath.expm1(-x),
    "gamma": lambda x, k: mpmath.gammainc(k, 0, x, regularized=True),
    "Rayleigh": lambda x: -mpmath.expm1(-(x**2) / 2),
    "Maxwell-Boltzmann": lambda x: mpmath.gammainc(mpmath.mpf(3) / 2, 0, x**2 / 2, regularized=True),
    "half-normal": lambda x: mpmath.erf(x / mpmath.sqrt(2)),
    "F": lambda x, d1, d2: incomplete_beta(d1 * x / (d1 * x + d2), mpmath.mpf(d1) / 2, mpmath.mpf(d2) / 2),
    "largest extreme value": lambda x: mpmath.exp(-mpmath.exp(-x)),
    "smallest extreme value": lambda x: -mpmath.expm1(-mpmath.exp(x)),
    "generalized extreme value": lambda x, xi: mpmath.exp(
        -((1 + xi * x) ** (-1 / mpmath.mpf(xi)) if xi else mpmath.exp(-x))
    ),
}
"""Distribution functions from their textbook definitions, for 50-digit arithmetic."""
CUMULATIVE |= {
    "lognormal": CUMULATIVE["normal"],
    "Weibull": CUMULATIVE["smallest extreme value"],
    "log-logistic": CUMULATIVE["logistic"],
}

MEMBERS: list[Member] = [(family, shapes) for family in FAMILIES for shapes in family.typical]
every_member = pytest.mark.parametrize(
    ("family", "shapes"), MEMBERS, ids=[" ".join(map(str, (family.name, *shapes))) for family, shapes in MEMBERS]
)
every_family = pytest.mark.parametrize("family", FAMILIES, ids=lambda family: family.name)


def fit(readings: Readings, family: Family) -> Fits:
    ordered = np.atleast_2d(readings).copy()
    n = sort_in_place(ordered)
    return fit_families(ordered, n, [family], "filliben")


def own_sample(family: Family, shapes: tuple[float, ...], size: tuple[int, ...], seed: int) -> Readings:
    sample = family.quantile(np.random.default_rng(seed).random(size), *shapes)
    return np.exp(sample) if family.axis is Axis.LOG else sample


@every_member
def test_quantiles_agree_with_scipy(family: Family, shapes: tuple[float, ...]) -> None:
    # Above the median by the survival function, where scipy's own ppf of the half-normal loses eight digits.
    reference = REFERENCE[family.name]
    member: Any = reference(*shapes) if shapes else reference
    expected = np.where(TAILS < 0.5, member.ppf(TAILS), member.isf(1 - TAILS))
    assert family.quantile(TAILS, *shapes) == pytest.approx(expected, rel=1e-9, abs=1e-12)


@every_member
def test_quantiles_return_to_their_probability_in_fifty_digits(family: Family, shapes: tuple[float, ...]) -> None:
    if family.name == "Tukey lambda":
        # Defined by its quantile function alone, here in 50 digits.
        for u, x in zip(TAILS, family.quantile(TAILS, *shapes), strict=True):
            p, power = mpmath.mpf(float(u)), mpmath.mpf(shapes[0])
            exact = (p**power - (1 - p) ** power) / power if power else mpmath.log(p / (1 - p))
            assert abs(exact - float(x)) <= 1e-7 * abs(exact) + 1e-14
        return
    for u, x in zip(TAILS, family.quantile(TAILS, *shapes), strict=True):
        exact, rounding = mpmath.mpf(float(u)), abs(float(x)) * 4 * 2.0**-52
        low, high = (CUMULATIVE[family.name](mpmath.mpf(float(x) + d), *shapes) for d in (-rounding, rounding))
        # The quantile itself is only known to the last bits of a double, which near a bound can be much of the tail.
        slack = 1e-9 * min(exact, 1 - exact) + mpmath.mpf(2) ** -52 * 8 * exact
        assert low - slack <= exact <= high + slack


@every_member
def test_quantiles_increase(family: Family, shapes: tuple[float, ...]) -> None:
    u = np.linspace(1e-6, 1 - 1e-6, 20_001)
    assert np.all(np.diff(family.quantile(u, *shapes)) > 0)


@every_member
def test_r_of_the_exact_quantiles_is_one(family: Family, shapes: tuple[float, ...]) -> None:
    exact = family.quantile(plotting_positions(200), *shapes)
    readings = np.exp(exact) if family.axis is Axis.LOG else exact
    assert fit(readings, family).r[0, 0] == pytest.approx(1.0, abs=(0.0, 1e-7, 1e-5)[len(shapes)] or 1e-10)


@every_member
def test_r_ignores_location_and_scale(family: Family, shapes: tuple[float, ...]) -> None:
    sample = own_sample(family, shapes, (300,), seed=3)
    moved = sample**2.5 * 7.0 if family.axis is Axis.LOG else sample * 2.5 + 7.0
    assert fit(moved, family).r[0, 0] == pytest.approx(fit(sample, family).r[0, 0], abs=1e-9)


@every_member
def test_own_samples_are_rejected_at_the_stated_rate(family: Family, shapes: tuple[float, ...]) -> None:
    samples, n, alpha = 4000, 60, 0.05
    fits = fit(own_sample(family, shapes, (samples, n), seed=1), family)
    rows, row = shipped_nulls().rows(family, np.full(samples, n), fits.steps[:, 0])
    share = np.mean(fits.r[:, 0] < rows.critical(alpha)[row])
    # Families with shapes are tabled by the estimated shape, held to 4 to 6 %.
    allowed = 0.01 if shapes else 0.0
    assert share == pytest.approx(alpha, abs=allowed + 3.5 * np.sqrt(alpha * (1 - alpha) / samples))


@every_family
def test_one_channel_alone_scores_as_it_does_among_many(family: Family) -> None:
    rng = np.random.default_rng(5)
    readings = np.exp(rng.standard_normal((101, 257)))
    readings[3, 10:30] = np.nan
    together = fit(readings, family)
    for row, channel in enumerate(readings):
        alone = fit(channel, family)
        assert np.array_equal(together.r[row], alone.r[0])
        assert np.array_equal(together.shapes[row], alone.shapes[0], equal_nan=True)


@every_member
def test_r_is_the_correlation_with_the_member_that_is_reported(family: Family, shapes: tuple[float, ...]) -> None:
    for n in (20, 200, 2000):
        sample = np.sort(own_sample(family, shapes, (n,), seed=n))
        fits = fit(sample, family)
        reported = fits.shapes[0, 0, : family.shape_count]
        quantiles = family.quantile(plotting_positions(n), *reported)
        x = np.log(sample) if family.axis is Axis.LOG else sample
        assert fits.r[0, 0] == pytest.approx(np.corrcoef(x, quantiles)[0, 1], abs=1e-9)
        slope, intercept = np.polyfit(quantiles, x, 1)
        assert fits.scale[0, 0] == pytest.approx(slope, rel=1e-7)
        assert fits.location[0, 0] == pytest.approx(intercept, rel=1e-7, abs=1e-7 * x.std())
