"""Shapes and closest families of published series."""

import numpy as np
import pytest
from handbook import r_of, series

from screener.stats.correlation import Fits, fit_families
from screener.stats.families import FAMILIES, family_named
from screener.stats.families.tukey_lambda import quantile as tukey
from screener.stats.ordering import sort_in_place
from screener.stats.positions import plotting_positions

SYMMETRIC = ("normal", "logistic", "double exponential", "Cauchy", "uniform")


def fits_of(name: str, family: str) -> Fits:
    readings = series(name)[None, :].copy()
    n = sort_in_place(readings)
    return fit_families(readings, n, [family_named(family)], "filliben")


def test_tukey_lambda_of_normal_numbers_peaks_near_a_tenth_with_r_0_997() -> None:
    # NIST/SEMATECH e-Handbook 1.3.3.23: .997, at lambda .099. The curve is flat there: r at .099 is the same to 1e-4.
    fits = fits_of("normal100", "Tukey lambda")
    assert fits.r[0, 0] == pytest.approx(0.997, abs=5e-4)
    ordered = np.sort(series("normal100"))
    at_published = np.corrcoef(ordered, tukey(plotting_positions(ordered.size), 0.099))[0, 1]
    assert 0.0 <= fits.r[0, 0] - at_published < 1e-4
    assert fits.shapes[0, 0, 0] == pytest.approx(0.099, abs=0.05)


@pytest.mark.parametrize(
    ("family", "published", "tolerance"),
    # 1.3.3.23: -1 near Cauchy, 0 logistic, .14 near normal, 1 uniform (and 2, where the curve peaks again).
    [("Cauchy", -1.0, 0.05), ("logistic", 0.0, 1e-3), ("normal", 0.14, 0.01), ("uniform", 1.0, 1e-3)],
)
def test_tukey_lambda_maps_the_symmetric_families(family: str, published: float, tolerance: float) -> None:
    exact = family_named(family).quantile(plotting_positions(1000))[None, :]
    shape = float(fit_families(exact, np.array([1000]), [family_named("Tukey lambda")], "filliben").shapes[0, 0, 0])
    if family == "uniform" and shape > 1.5:
        shape -= 1.0
    assert shape == pytest.approx(published, abs=tolerance)
    u = plotting_positions(1000)
    assert np.corrcoef(tukey(u, 2.0), tukey(u, 1.0))[0, 1] == pytest.approx(1.0, abs=1e-12)


def test_weibull_numbers_of_shape_two_are_found_near_two() -> None:
    # On the log axis the Weibull shape is 1 / scale.
    assert 1.0 / fits_of("randweib", "Weibull").scale[0, 0] == pytest.approx(2.0, abs=0.15)


def test_double_exponential_numbers_are_closest_to_their_own_among_the_symmetric_families() -> None:
    assert max(SYMMETRIC, key=lambda family: r_of("randdex", family)) == "double exponential"


def test_every_family_has_a_finite_r_for_a_positive_series() -> None:
    readings = series("randweib")[None, :].copy()
    fits = fit_families(readings, sort_in_place(readings), FAMILIES, "filliben")
    assert np.all((fits.r > 0.4) & (fits.r <= 1.0))
