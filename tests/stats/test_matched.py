"""The matched null: normal channels that are rounded or follow themselves in time are flagged at the stated rate."""

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.special import ndtri

from screener.stats.correlation import fit_families
from screener.stats.families import FAMILIES, family_named
from screener.stats.null.matched import (
    COEFFICIENTS,
    PROBABILITIES,
    STEPS,
    autoregressive,
    step_weights,
    tau_of,
)
from screener.stats.null.packing import shipped_nulls
from screener.stats.scoring import Scoring, score

NORMAL = [family_named("normal")]


def normal_channels(channels: int, n: int, step: float, coefficient: float, seed: int) -> NDArray[np.float64]:
    rng = np.random.default_rng(seed)
    readings = 40.0 + autoregressive(rng, channels, n, coefficient)
    return step * np.round((readings + step * rng.random((channels, 1))) / step) if step else readings


def flagged(scoring: Scoring, critical: NDArray[np.float64]) -> float:
    judged = np.array([not reason for reason in scoring.reasons])
    return float(np.mean(scoring.fits.r[judged, 0] < critical[judged, 0]))


@pytest.mark.parametrize(
    ("n", "step", "coefficient", "plain_at_least"),
    [(50, 0.5, 0.3, 0.2), (200, 0.25, 0.6, 0.2), (200, 0.0, 0.9, 0.3), (1000, 0.1, 0.9, 0.6), (1000, 0.5, 0.0, 0.99)],
)
def test_normal_channels_are_flagged_at_the_rate_in_their_own_condition(
    n: int, step: float, coefficient: float, plain_at_least: float
) -> None:
    scoring = score(normal_channels(1500, n, step, coefficient, seed=n), NORMAL, shipped_nulls(), 0.05)
    # Between 3 and 6 %, and three standard errors of 1,500 channels.
    assert 0.03 - 0.013 < flagged(scoring, scoring.critical_r) < 0.06 + 0.018
    assert flagged(scoring, scoring.plain_critical_r) > plain_at_least


@pytest.mark.parametrize(
    ("n", "step", "coefficient", "clipped"),
    [
        (200, 0.0, 0.0, 0.2),
        (200, 0.25, 0.3, 0.2),
        (1000, 0.1, 0.6, 0.05),
        (1000, 0.5, 0.0, 0.2),
        (1000, 0.0, 0.9, 0.05),
    ],
)
def test_clipped_normal_channels_are_flagged_at_the_rate(
    n: int, step: float, coefficient: float, clipped: float
) -> None:
    rng = np.random.default_rng(n)
    readings = np.minimum(autoregressive(rng, 600, n, coefficient), ndtri(1.0 - clipped))
    if step:
        readings = step * np.round(readings / step + rng.random((600, 1)))
    scoring = score(readings, NORMAL, shipped_nulls(), 0.05)
    # Between 3 and 6 %, and three standard errors of 600 channels.
    assert 0.03 - 0.02 < flagged(scoring, scoring.critical_r) < 0.06 + 0.029
    assert np.mean(scoring.conditions.clipped_high > 0) > 0.9


@pytest.mark.parametrize("step", [0.0, 0.25, 0.5])
def test_a_uniform_channel_is_not_taken_for_a_clipped_one(step: float) -> None:
    rng = np.random.default_rng(8)
    readings = np.sqrt(12.0) * rng.random((200, 200))
    if step:
        readings = step * np.round(readings / step + rng.random((200, 1)))
    scoring = score(readings, NORMAL, shipped_nulls(), 0.05)
    # The textbook value, and the exactly simulated one, flag all of them.
    assert flagged(scoring, scoring.critical_r) > 0.95 - 0.03


def test_a_channel_without_conditions_keeps_the_textbook_value() -> None:
    scoring = score(normal_channels(300, 500, 0.0, 0.0, seed=1), FAMILIES, shipped_nulls(), 0.05)
    alike = scoring.critical_r[:, 0] == scoring.plain_critical_r[:, 0]
    assert np.mean(alike) > 0.97
    assert np.array_equal(scoring.critical_r[:, 1:], scoring.plain_critical_r[:, 1:], equal_nan=True)


def test_matching_can_be_turned_off() -> None:
    readings = normal_channels(50, 500, 0.5, 0.6, seed=2)
    scoring = score(readings, NORMAL, shipped_nulls(), 0.05, match=False)
    assert np.array_equal(scoring.critical_r, scoring.plain_critical_r)


def test_p_is_below_alpha_exactly_where_r_is_below_the_matched_value() -> None:
    readings = normal_channels(400, 300, 0.4, 0.7, seed=3)
    for alpha in (0.2, 0.05, 0.01, 1e-5):
        scoring = score(readings, NORMAL, shipped_nulls(), alpha)
        assert np.array_equal(scoring.p < alpha, scoring.fits.r < scoring.critical_r)


def test_departures_are_still_found_through_rounding() -> None:
    rng = np.random.default_rng(4)
    skew = np.round(rng.gamma(4.0, size=(100, 1000)) / 0.5) * 0.5
    scoring = score(skew, NORMAL, shipped_nulls(), 0.05)
    assert np.all(scoring.fits.r < scoring.critical_r)


def test_what_does_not_define_a_distribution_is_not_scored() -> None:
    rng = np.random.default_rng(5)
    readings = np.stack(
        [
            np.cumsum(rng.standard_normal(2000)),
            np.where(np.arange(2000) < 1400, 3.5, rng.standard_normal(2000).round(2)),
            rng.integers(0, 3, 2000).astype(float),
        ]
    )
    reasons = score(readings, FAMILIES, shipped_nulls(), 0.05).reasons
    assert "drifting" in reasons[0]
    assert reasons[1].startswith("stuck") or "stuck" in reasons[1]
    assert reasons[2] == "only 3 distinct readings, at least 4 are needed"


@pytest.mark.parametrize(("n", "step", "coefficient"), [(320, 0.22, 0.5), (2200, 0.45, 0.75)])
def test_between_its_nodes_the_table_agrees_with_a_simulation(n: int, step: float, coefficient: float) -> None:
    samples = 4000
    rng = np.random.default_rng(6)
    readings = step * np.round(autoregressive(rng, samples, n, coefficient) / step + rng.random((samples, 1)))
    r = fit_families(np.sort(readings, axis=1), np.full(samples, n), NORMAL, "filliben").r[:, 0]
    table = shipped_nulls().matched
    assert table is not None
    in_sd = step / readings.std(axis=1)
    critical = table.rows(np.full(samples, n), in_sd, np.full(samples, tau_of(coefficient))).critical(0.05)
    assert np.mean(r < critical) == pytest.approx(0.05, abs=0.012)


def test_step_weights_add_up_and_repeat_the_nodes() -> None:
    nodes = step_weights(np.array([0.0, *STEPS]))
    dense = np.zeros((1 + len(STEPS), 1 + len(STEPS)))
    np.put_along_axis(dense, nodes.index, nodes.weight, axis=1)
    assert dense == pytest.approx(np.eye(1 + len(STEPS)), abs=1e-12)
    assert step_weights(np.linspace(0, 1.6, 50)).weight.sum(axis=1) == pytest.approx(np.ones(50))


def test_an_ar1_has_the_stated_autocorrelation() -> None:
    series = autoregressive(np.random.default_rng(7), 200, 4000, 0.6)
    assert series.var() == pytest.approx(1.0, abs=0.01)
    assert np.mean(series[:, 1:] * series[:, :-1]) == pytest.approx(0.6, abs=0.01)
    assert tau_of(0.6) == pytest.approx(1 + 2 * sum(0.6 ** (4 * k) for k in range(1, 200)))


def test_the_grids_are_increasing() -> None:
    for grid in (COEFFICIENTS, STEPS, PROBABILITIES):
        assert np.all(np.diff(grid) > 0)
