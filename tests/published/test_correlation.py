"""r of published series."""

import numpy as np
import pytest
from handbook import r_of


@pytest.mark.parametrize(
    ("name", "family", "published", "digits"),
    [
        # Filliben 1975, p. 116: .98538 in the arithmetic of its day; double precision gives .98541.
        ("filliben1975", "normal", 0.98538, 5e-5),
        # NIST/SEMATECH e-Handbook 1.4.2.1.3, printed to three digits.
        ("randn", "normal", 0.996, 5e-4),
        # 1.4.2.2.3
        ("randu", "normal", 0.9771602, 5e-8),
        ("randu", "uniform", 0.9995683, 5e-8),
        # 1.4.2.4.3
        ("soulen", "normal", 0.97484, 5e-6),
    ],
)
def test_r_of_a_published_series_is_as_printed(name: str, family: str, published: float, digits: float) -> None:
    assert r_of(name, family) == pytest.approx(published, abs=digits)


def test_filliben_example_in_double_precision() -> None:
    assert np.round(r_of("filliben1975", "normal"), 5) == 0.98541
