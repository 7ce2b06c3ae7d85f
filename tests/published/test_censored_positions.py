"""Positions of censored samples, and a published series of coarse counts judged with its own step."""

import numpy as np
import pytest
from handbook import series

from screener.stats.correlation import fit_censored
from screener.stats.families import family_named
from screener.stats.families.family import FloatArray
from screener.stats.null.packing import shipped_nulls
from screener.stats.scoring import score

NORMAL = [family_named("normal")]


def product_limit_positions(n: int, uncensored: int, c: float) -> FloatArray:
    """Positions of the lowest readings when those above are censored, by the product over uncensored readings.

    Michael & Schucany 1986, in D'Agostino & Stephens, Goodness-of-Fit Techniques, sec. 11.2 (formula from memory):
    p_i = 1 - (n - c + 1) / (n - 2 c + 1) prod over j <= i of (n - j - c + 1) / (n - j - c + 2).
    """
    j = np.arange(1, uncensored + 1)
    factors = (n - j - c + 1.0) / (n - j - c + 2.0)
    return np.asarray(1.0 - (n - c + 1.0) / (n - 2.0 * c + 1.0) * np.cumprod(factors), dtype=np.float64)


@pytest.mark.parametrize(("n", "censored", "c"), [(20, 4, 0.0), (34, 9, 0.375), (100, 20, 0.3175), (400, 30, 0.44)])
def test_censored_readings_leave_the_others_at_the_published_positions(n: int, censored: int, c: float) -> None:
    ordered = np.sort(np.random.default_rng(n).standard_normal((1, n)), axis=1)
    counts, none, above = np.array([n]), np.array([0]), np.array([censored])
    r = fit_censored(ordered, counts, none, above, NORMAL, str(c)).r[0, 0]
    expected = NORMAL[0].quantile(product_limit_positions(n, n - censored, c))
    assert r == pytest.approx(np.corrcoef(expected, ordered[0, : n - censored])[0, 1], abs=1e-9)


def test_soulen_counts_are_flagged_by_the_textbook_value_and_not_with_their_step() -> None:
    # NIST/SEMATECH e-Handbook 1.4.2.4.3 prints a PPCC of .975 for these 700 counts.
    readings = series("soulen")[None, :]
    scoring = score(readings, NORMAL, shipped_nulls(), 0.05)
    r = scoring.fits.r[0, 0]
    assert r == pytest.approx(0.975, abs=5e-4)
    assert r < scoring.plain_critical_r[0, 0]
    assert r >= scoring.critical_r[0, 0]
    assert scoring.p[0, 0] > 0.05
