"""Many channels at once."""

import numpy as np
import pytest
from scipy.stats import false_discovery_control

from screener.stats.many import adjusted_p, expected_flags

# Benjamini & Hochberg 1995, section 3.2: fifteen p values, of which four are rejected at a rate of 5 %.
PUBLISHED = np.array(
    [0.0001, 0.0004, 0.0019, 0.0095, 0.0201, 0.0278, 0.0298, 0.0344, 0.0459, 0.324, 0.4262, 0.5719, 0.6528, 0.759, 1.0]
)


def test_the_published_example_rejects_four() -> None:
    assert np.count_nonzero(adjusted_p(PUBLISHED) < 0.05) == 4


def test_q_agrees_with_scipy_in_any_order() -> None:
    p = np.random.default_rng(3).permutation(PUBLISHED)
    assert adjusted_p(p) == pytest.approx(false_discovery_control(p), rel=1e-14)


def test_missing_p_stay_missing_and_are_not_counted() -> None:
    p = np.insert(PUBLISHED, 4, np.nan)
    q = adjusted_p(p)
    assert np.isnan(q[4])
    assert np.delete(q, 4) == pytest.approx(adjusted_p(PUBLISHED))
    assert np.all(np.isnan(adjusted_p(np.full(3, np.nan))))


def test_chance_flags_alpha_of_the_scored() -> None:
    assert expected_flags(400, 0.05) == pytest.approx(20.0)
