"""What a person decides about channels is kept at once, with who and when, and can be taken back."""

import sqlite3
from contextlib import closing
from datetime import UTC, datetime
from pathlib import Path

import pytest

from screener.records import Decision
from screener.runs import RunFile
from tests.runs.synthetic import block, stored_run


def held(run: RunFile) -> list[tuple[str | None, str | None]]:
    """Decision and note of every channel."""
    return list(run.results().select("decision", "note").iter_rows())


def test_a_decision_stands_in_the_results_at_once_and_for_other_programs(tmp_path: Path) -> None:
    with stored_run(tmp_path / "a.run", block(0, 4)) as run:
        run.decide([1, 3], Decision.LEAVE_OUT)
        with RunFile.open(tmp_path / "a.run", read_only=True) as other:
            assert held(other) == [(None, None), ("leave out", None), (None, None), ("leave out", None)]


def test_decision_and_note_do_not_touch_each_other(tmp_path: Path) -> None:
    with stored_run(tmp_path / "a.run", block(0, 2)) as run:
        run.decide([0], Decision.USE)
        run.annotate([0, 1], "seal changed\x1b[2J")
        run.decide([0], Decision.TRANSFORM)
        assert held(run) == [("use transformed", "seal changed\\x1b[2J"), (None, "seal changed\\x1b[2J")]
        run.decide([0], None)
        run.annotate([0], "")
        assert held(run)[0] == (None, None)


def test_acts_are_undone_last_first_and_done_again_in_their_order(tmp_path: Path) -> None:
    with stored_run(tmp_path / "a.run", block(0, 3)) as run:
        run.decide([0, 1], Decision.USE)
        run.decide([1], Decision.LOOK_AGAIN)
        both = held(run)
        assert run.undo() == 1
        assert [decision for decision, _ in held(run)] == ["use as it is", "use as it is", None]
        assert run.undo() == 2
        assert [decision for decision, _ in held(run)] == [None] * 3
        assert run.undo() == 0
        assert (run.redo(), run.redo(), run.redo()) == (2, 1, 0)
        assert held(run) == both


def test_a_new_act_ends_what_could_be_done_again(tmp_path: Path) -> None:
    with stored_run(tmp_path / "a.run", block(0, 3)) as run:
        run.decide([0], Decision.USE)
        run.undo()
        run.decide([1], Decision.LEAVE_OUT)
        assert run.redo() == 0
        assert run.undo() == 1
        assert held(run) == [(None, None)] * 3


def test_decisions_outlive_a_block_that_is_scored_again(tmp_path: Path) -> None:
    with stored_run(tmp_path / "a.run", block(0, 3)) as run:
        run.decide([2], Decision.LEAVE_OUT)
        run.store(block(0, 3))
        assert held(run)[2] == ("leave out", None)


def test_time_and_user_are_kept_with_every_act(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("LOGNAME", "ada")
    before = datetime.now(UTC).replace(microsecond=0)
    with stored_run(tmp_path / "a.run", block(0, 3)) as run:
        run.decide([2], Decision.LEAVE_OUT)
    with closing(sqlite3.connect(tmp_path / "a.run")) as connection:
        ((made, made_by),) = connection.execute("SELECT made, made_by FROM act")
    assert made_by == "ada"
    assert before <= datetime.fromisoformat(made) <= datetime.now(UTC)


def test_the_view_comes_back(tmp_path: Path) -> None:
    with stored_run(tmp_path / "a.run", block(0, 3)) as run:
        assert run.view() == {}
        run.store_view({"channel": "sensor_2", "sort": "p"})
        run.store_view({"channel": "sensor_1", "filter": "r < 0.9"})
    with RunFile.open(tmp_path / "a.run", read_only=True) as run:
        assert run.view() == {"channel": "sensor_1", "filter": "r < 0.9"}
