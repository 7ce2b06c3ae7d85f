"""Autocorrelation of published series."""

import numpy as np
import pytest
from handbook import series

from screener.stats.conditions import autocorrelation, find_conditions
from screener.stats.ordering import sort_in_place

LAG_ONE = [
    # NIST Statistical Reference Datasets: certified to 15 digits.
    ("lew", -0.307304800605679, 1e-14),
    ("michelso", 0.535199668621283, 1e-13),
    # NIST/SEMATECH e-Handbook 1.4.2.1.3 and 1.4.2.4.3, as printed.
    ("randn", 0.045059, 5e-7),
    ("soulen", 0.314802, 5e-7),
]


@pytest.mark.parametrize(("name", "published", "digits"), LAG_ONE)
def test_lag_one_autocorrelation_is_as_published(name: str, published: float, digits: float) -> None:
    assert autocorrelation(series(name)[None, :])[0, 1] == pytest.approx(published, abs=digits)


@pytest.mark.parametrize(("name", "published", "digits"), LAG_ONE)
def test_lag_one_in_the_conditions_of_a_block_agrees_to_single_precision(
    name: str, published: float, digits: float
) -> None:
    readings = series(name)[None, :]
    ordered = readings.copy()
    n = sort_in_place(ordered)
    averaged_over_pairs = published * readings.size / (readings.size - 1)
    found = find_conditions(readings, ordered, n).rho_1[0]
    assert found == pytest.approx(averaged_over_pairs, abs=2e-6 + digits)


def test_soulen_counts_have_their_step() -> None:
    readings = series("soulen")[None, :]
    ordered = readings.copy()
    n = sort_in_place(ordered)
    found = find_conditions(readings, ordered, n)
    assert found.step[0] == pytest.approx(1.0, rel=1e-12)
    assert np.all(readings == np.rint(readings))
    assert found.rounded[0]
    assert found.serial[0]
