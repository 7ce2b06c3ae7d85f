"""Two runs compared: what became of each channel."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import polars as pl
import pytest

from screener.records import BlockScores, Channel, Decision, Plan, TableFacts
from screener.runs import RunFile, compared
from screener.runs.comparing import COMPARED, by_weight, counts, sentence, unlike
from tests.runs.synthetic import block, facts, unfitted

N = 100


def scores(r: list[float], critical: float = 0.98) -> BlockScores:
    """Channels with these r against the normal, of N readings each."""
    made = block(0, len(r))
    made.r[:, 0], made.critical_r[:, 0] = r, critical
    samples = [np.sort(np.random.default_rng(k).exponential(size=N)) for k in range(len(r))]
    held = np.zeros(len(r), dtype=np.int64)
    return replace(made, n=np.full(len(r), N), held=held, points=tuple(samples))


def run_of(path: Path, names: list[str], made: BlockScores) -> RunFile:
    table: TableFacts = replace(facts(0), channels=tuple(Channel(k, name) for k, name in enumerate(names)))
    run = RunFile.create(path, table, Plan(), version="0", null_version="0")
    run.store(made)
    return run


def changes(rows: pl.DataFrame) -> dict[str, str]:
    return dict(rows.select("channel", "change").iter_rows())


def test_every_fate_of_a_channel_is_told(tmp_path: Path) -> None:
    old_scores = scores([0.99, 0.9, 0.99, 0.9, 0.99, 0.99])
    new_scores = unfitted(scores([0.99, 0.6, 0.9, 0.99, 0.99, 0.99]), 4, reason="constant")
    with (
        run_of(tmp_path / "a.run", ["same", "worse", "worn", "mended", "dead", "gone"], old_scores) as old,
        run_of(tmp_path / "b.run", ["same", "worse", "worn", "mended", "dead", "added"], new_scores) as new,
    ):
        rows = compared(old, new)
    assert rows.columns == list(COMPARED)
    assert changes(rows) == {
        "same": "same",
        "worse": "changed",
        "worn": "newly flagged",
        "mended": "cleared",
        "dead": "no longer scored",
        "added": "new",
        "gone": "missing",
    }
    assert counts(rows)["changed"] == 1
    assert sentence(rows).startswith("7 channels: 1 newly flagged, 1 cleared, 1 changed")
    assert by_weight(rows)["channel"].to_list() == ["worn", "mended", "worse", "dead", "gone", "added", "same"]


def test_a_difference_within_its_error_is_no_change(tmp_path: Path) -> None:
    with (
        run_of(tmp_path / "a.run", ["x", "y"], scores([0.90, 0.91])) as old,
        run_of(tmp_path / "b.run", ["y", "x"], scores([0.92, 0.89])) as new,
    ):
        rows = compared(old, new)
    assert set(changes(rows).values()) == {"same"}
    assert rows["channel"].to_list() == ["y", "x"]
    assert rows["r_difference"].to_list() == pytest.approx([0.01, -0.01])
    assert rows["change_q"].is_not_null().all()


def test_decisions_of_both_runs_stand_side_by_side(tmp_path: Path) -> None:
    with (
        run_of(tmp_path / "a.run", ["x"], scores([0.9])) as old,
        run_of(tmp_path / "b.run", ["x"], scores([0.9])) as new,
    ):
        old.decide([0], Decision.LEAVE_OUT)
        rows = compared(old, new)
    assert rows.row(0, named=True)["decision_before"] == "leave out"
    assert rows.row(0, named=True)["decision_now"] is None


def test_runs_that_were_not_judged_alike_are_told_of(tmp_path: Path) -> None:
    table: TableFacts = replace(facts(0), channels=(Channel(0, "x"),))
    with (
        RunFile.create(tmp_path / "a.run", table, Plan(), version="1", null_version="3") as old,
        RunFile.create(tmp_path / "b.run", table, Plan(), version="1", null_version="3") as alike,
        RunFile.create(
            tmp_path / "c.run", table, Plan(alpha=0.01, missing=("-9",)), version="1", null_version="4"
        ) as new,
    ):
        assert unlike(old, alike) == ""
        assert unlike(old, new) == "Not judged alike: alpha 0.05 and 0.01; missing none and -9; null tables 3 and 4."
