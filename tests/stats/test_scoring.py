"""Scores of a block: what is scored, what is not and why, and how often truly normal channels are flagged."""

import numpy as np
import pytest

from screener.stats.families import FAMILIES, family_named
from screener.stats.null.packing import shipped_nulls
from screener.stats.points import kept_ranks
from screener.stats.scoring import score

NORMAL = [family_named("normal")]


def test_channels_that_cannot_be_scored_say_why() -> None:
    readings = np.full((6, 5), np.nan)
    readings[1] = np.inf
    readings[2, :2] = [1.0, 2.0]
    readings[3] = 7.25
    readings[4] = [1.0, 2.0, -np.inf, 4.0, 9.0]
    readings[5] = [1.0, 2.0, 3.0, 4.0, 9.0]
    scoring = score(readings, FAMILIES, shipped_nulls(), 0.05)
    assert scoring.reasons == (
        "no finite reading",
        "no finite reading",
        "too few readings: 2, at least 3 are needed",
        "constant: all 5 readings are 7.25",
        "",
        "",
    )
    assert scoring.n.tolist() == [0, 0, 2, 5, 4, 5]
    assert scoring.missing.tolist() == [5, 5, 3, 0, 1, 0]
    assert np.all(np.isnan(scoring.p[:4]))
    assert not np.any(np.isnan(scoring.p[4:]))


def test_all_readings_are_kept_for_the_plot_when_few_and_both_tails_when_many() -> None:
    assert kept_ranks(400).tolist() == list(range(400))
    kept = kept_ranks(100_000)
    assert kept.size == 512
    assert np.all(np.diff(kept) > 0)
    assert kept[:64].tolist() == list(range(64))
    assert kept[-64:].tolist() == list(range(99_936, 100_000))


@pytest.mark.parametrize(("n", "channels"), [(10, 20_000), (50, 20_000), (200, 10_000), (1000, 4000), (10_000, 800)])
def test_truly_normal_channels_are_flagged_at_the_stated_rate(n: int, channels: int) -> None:
    readings = 20.0 + 3.0 * np.random.default_rng(n).standard_normal((channels, n))
    for alpha in (0.05, 0.01):
        scoring = score(readings.copy(), NORMAL, shipped_nulls(), alpha)
        flagged = np.mean(scoring.fits.r[:, 0] < scoring.critical_r[:, 0])
        assert flagged == pytest.approx(alpha, abs=3.5 * np.sqrt(alpha * (1 - alpha) / channels))
