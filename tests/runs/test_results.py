"""What the results say of each channel."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from scipy.stats import false_discovery_control

from screener.records import RESULT_COLUMNS, Control, Plan
from tests.runs.synthetic import block, new_run, stored_run, unfitted


def test_the_columns_and_their_kinds_are_those_of_the_contract(tmp_path: Path) -> None:
    with new_run(tmp_path / "a.run") as run:
        empty = run.results()
        run.store(block(0, 8))
        for results in (empty, run.results()):
            assert results.columns == ["position", *RESULT_COLUMNS]
            assert results.dtypes[0] == pl.Int64
            assert [kind.to_python() for kind in results.dtypes[1:]] == list(RESULT_COLUMNS.values())
        assert empty.is_empty()


def test_rows_stand_in_table_order_whatever_order_they_were_stored_in(tmp_path: Path) -> None:
    with stored_run(tmp_path / "a.run", block(5, 8), block(0, 2), block(2, 4)) as run:
        results = run.results()
        assert results["position"].to_list() == [0, 1, 2, 3, 5, 6, 7]
        assert results["channel"].to_list() == [f"sensor_{k}" for k in (0, 1, 2, 3, 5, 6, 7)]
        assert results["unit"].to_list() == [None, "bar", None, "bar", "bar", None, "bar"]


def test_a_channel_is_flagged_when_r_lies_below_its_critical_value_and_not_when_at_it(tmp_path: Path) -> None:
    scores = block(0, 3)
    scores.r[:, 0] = [0.97, 0.98, np.nextafter(0.98, 0)]
    scores.critical_r[:, 0] = 0.98
    with stored_run(tmp_path / "a.run", scores) as run:
        assert run.results()["verdict"].to_list() == ["flagged", "clear", "flagged"]


def test_the_verdict_is_on_the_family_of_the_plan(tmp_path: Path) -> None:
    scores = block(0, 8)
    with stored_run(tmp_path / "a.run", scores, plan=Plan(family="Cauchy")) as run:
        results = run.results()
        assert results["family"].to_list() == ["Cauchy"] * 8
        assert results["r"].to_list() == scores.r[:, 2].tolist()
        expected = [
            "flagged" if r < c else "clear" for r, c in zip(scores.r[:, 2], scores.critical_r[:, 2], strict=True)
        ]
        assert results["verdict"].to_list() == expected
        assert {"flagged", "clear"} == set(expected)


def test_a_channel_that_is_not_scored_keeps_its_r_but_no_value_of_a_test(tmp_path: Path) -> None:
    scores = replace(block(0, 8), reasons=("", "drifting") + ("",) * 6, closest=np.zeros(8, dtype=np.int64))
    with stored_run(tmp_path / "a.run", scores) as run:
        judged, drifting = run.results().head(2).iter_rows(named=True)
        fits = run.fits(1)
        assert (run.reason(0), run.reason(1)) == ("", "drifting")
    assert (drifting["reason"], drifting["verdict"], drifting["r"]) == ("drifting", "not scored", scores.r[1, 0])
    blank = ("critical_r", "plain_critical_r", "p", "q", "closest", "closest_r", "closest_p")
    assert [drifting[name] for name in blank] == [None] * len(blank)
    assert None not in [judged[name] for name in blank]
    assert fits["r"].to_list() == scores.r[1].tolist()
    assert fits.select("critical_r", "plain_critical_r", "p").null_count().row(0) == (fits.height,) * 3


def test_q_agrees_with_scipy_over_the_channels_scored(tmp_path: Path) -> None:
    scores = unfitted(block(0, 8), 3, reason="all readings missing")
    with stored_run(tmp_path / "a.run", scores) as run:
        q = run.results()["q"]
    others = [0, 1, 2, 4, 5, 6, 7]
    assert q[3] is None
    np.testing.assert_allclose(q.gather(others).to_numpy(), false_discovery_control(scores.p[others, 0]), rtol=1e-12)


def test_a_channel_with_a_reason_does_not_count_among_the_tests_though_it_has_a_p(tmp_path: Path) -> None:
    scores = replace(block(0, 3), reasons=("", "drifting", ""))
    with stored_run(tmp_path / "a.run", scores) as run:
        results = run.results()
    assert results["verdict"][1] == "not scored"
    np.testing.assert_allclose(results["q"].gather([0, 2]), false_discovery_control(scores.p[[0, 2], 0]), rtol=1e-12)
    assert results["q"][1] is None


def test_under_control_of_the_false_discovery_rate_a_flag_means_that_q_is_below_alpha(tmp_path: Path) -> None:
    scores = block(0, 4)
    scores.p[:, 0] = [0.001, 0.04, 0.03, 0.9]
    with stored_run(tmp_path / "a.run", scores, plan=Plan(alpha=0.05, control=Control.FDR)) as run:
        results = run.results()
    q = false_discovery_control(scores.p[:, 0])
    assert results["verdict"].to_list() == ["flagged" if value < 0.05 else "clear" for value in q]
    assert results["verdict"].to_list() == ["flagged", "clear", "clear", "clear"]


def test_departure_size_is_the_rms_distance_from_the_line(tmp_path: Path) -> None:
    """By definition: the residual of the standardised order statistics on the standardised quantiles."""
    rng = np.random.default_rng(5)
    readings, quantiles = np.sort(rng.normal(size=50)), np.sort(rng.normal(size=50))
    x = (readings - readings.mean()) / readings.std()
    m = (quantiles - quantiles.mean()) / quantiles.std()
    slope = (x * m).mean()
    scores = block(0, 3)
    scores.r[:, 0] = [np.corrcoef(x, m)[0, 1], 1.0, np.nextafter(1.0, 2.0)]
    with stored_run(tmp_path / "a.run", scores) as run:
        size = run.results()["departure_size"].to_list()
    assert size[0] == pytest.approx(np.sqrt(np.mean((x - slope * m) ** 2)), rel=1e-9)
    assert size[1:] == [0.0, 0.0]


def test_a_channel_outside_the_support_is_not_scored_and_says_of_which_family(tmp_path: Path) -> None:
    scores = unfitted(block(0, 3), 1, note="outside support")
    with stored_run(tmp_path / "a.run", scores, plan=Plan(family="Weibull")) as run:
        row = run.results().row(1, named=True)
    assert row["verdict"] == "not scored"
    assert row["reason"] == "outside the support of Weibull"
    assert [row[name] for name in ("r", "critical_r", "p", "q", "departure_size")] == [None] * 5


@pytest.mark.parametrize(
    ("reason", "note", "shown"),
    [
        ("constant", "", "constant"),
        ("constant", "outside support", "constant"),
        ("", "too short", "too short"),
        ("", "", "no fit of normal"),
    ],
)
def test_a_channel_that_is_not_scored_says_why(tmp_path: Path, reason: str, note: str, shown: str) -> None:
    with stored_run(tmp_path / "a.run", unfitted(block(0, 2), 0, note=note, reason=reason)) as run:
        results = run.results()
    assert results["verdict"][0] == "not scored"
    assert results["reason"].to_list() == [shown, None]


def test_a_channel_without_critical_value_is_never_clear(tmp_path: Path) -> None:
    scores = block(0, 2)
    scores.critical_r[0, 0] = scores.p[0, 0] = np.nan
    with stored_run(tmp_path / "a.run", scores) as run:
        row = run.results().row(0, named=True)
    assert (row["verdict"], row["reason"]) == ("not scored", "no critical value for normal")
    assert row["r"] == scores.r[0, 0]


def test_each_channel_is_judged_on_the_family_it_is_held_against(tmp_path: Path) -> None:
    scores = block(0, 3)
    with stored_run(tmp_path / "a.run") as run:
        run.store(replace(scores, held=np.array([2, 0, 1])))
        results = run.results()
    assert results["family"].to_list() == ["Cauchy", "normal", "Weibull"]
    assert results["r"].to_list() == [scores.r[0, 2], scores.r[1, 0], scores.r[2, 1]]


def test_the_closest_family_comes_with_its_r_and_p(tmp_path: Path) -> None:
    scores = block(0, 3)
    with stored_run(tmp_path / "a.run") as run:
        run.store(replace(scores, closest=np.array([1, -1, 2])))
        results = run.results()
    assert results["closest"].to_list() == ["Weibull", None, "Cauchy"]
    assert results["closest_r"].to_list() == [scores.r[0, 1], None, scores.r[2, 2]]
    assert results["closest_p"].to_list() == [scores.p[0, 1], None, scores.p[2, 2]]
