"""What is stored in a run file comes back, and it is one file in the end."""

import os
import sqlite3
from dataclasses import replace
from datetime import UTC, datetime
from pathlib import Path

import numpy as np
import pytest
from polars.testing import assert_frame_equal

from screener.records import FIT_COLUMNS, Channel, Control, Plan, SetAside, Span
from screener.runs import RunFile, is_run_file
from screener.runs.connection import use_wal
from tests.runs.synthetic import FAMILIES, PLAN, block, facts, files_in, new_run, stored_run, unfitted


def test_a_run_file_keeps_what_it_was_made_from(tmp_path: Path) -> None:
    new_run(tmp_path / "a.run").close()
    with RunFile.open(tmp_path / "a.run") as run:
        assert run.facts == facts(8)
        assert run.plan == PLAN
        assert (run.version, run.null_version) == ("0.1.0", "null-1")
        assert abs((datetime.now(UTC) - datetime.fromisoformat(run.created)).total_seconds()) < 600
        assert not run.finished


def test_a_plan_keeps_every_setting(tmp_path: Path) -> None:
    plan = Plan("Weibull", 0.001, Control.FDR, "0.4", ("a",), ("b", "c"), ("\t", "n/a"), 99)
    new_run(tmp_path / "a.run", plan=plan).close()
    with RunFile.open(tmp_path / "a.run", read_only=True) as run:
        assert run.plan == plan


def test_scores_come_back_bit_for_bit(tmp_path: Path) -> None:
    scores = block(0, 8)
    with stored_run(tmp_path / "a.run", block(0, 3), block(3, 8)) as run:
        results = run.results()
        assert results["r"].to_list() == scores.r[:, 0].tolist()
        assert results["p"].to_list() == scores.p[:, 0].tolist()
        assert results["plain_critical_r"].to_list() == scores.plain_critical_r[:, 0].tolist()
        assert results["n"].to_list() == scores.n.tolist()
        assert results["missing"].to_list() == scores.missing.tolist()
        fits = run.fits(5)
        assert fits["family"].to_list() == list(FAMILIES)
        for name in ("r", "critical_r", "plain_critical_r", "p", "extrapolated", "location", "scale"):
            assert fits[name].to_list() == getattr(scores, name)[5].tolist(), name
        assert fits["note"].to_list() == [None, None, "flat"]
        np.testing.assert_array_equal(run.points(5), scores.points[5])


def test_the_fits_have_the_columns_of_the_contract(tmp_path: Path) -> None:
    with stored_run(tmp_path / "a.run", block(0, 2)) as run:
        for fits in (run.fits(1), run.fits(7)):
            assert fits.columns == list(FIT_COLUMNS)
            assert [kind.to_python() for kind in fits.dtypes] == list(FIT_COLUMNS.values())
        assert run.fits(7).is_empty()


def test_points_are_the_callers_own_and_empty_for_a_channel_without_any(tmp_path: Path) -> None:
    scores = replace(block(0, 2), points=(np.empty(0), np.array([1.0, 2.0])))
    with stored_run(tmp_path / "a.run", scores) as run:
        assert run.points(0).size == 0
        assert run.points(7).size == 0
        run.points(1).sort()
        assert run.points(1).flags.writeable


def test_missing_numbers_are_stored_as_null_and_nothing_as_a_scalar_of_numpy(tmp_path: Path) -> None:
    stored_run(tmp_path / "a.run", unfitted(block(0, 8), 2, note="outside support")).close()
    connection = sqlite3.connect(tmp_path / "a.run")
    for table, allowed in (("fit", {"integer", "real", "text"}), ("score", {"integer", "text"})):
        columns = [row[1] for row in connection.execute(f"PRAGMA table_info({table})")]
        for column in columns:
            kinds = {row[0] for row in connection.execute(f"SELECT DISTINCT typeof({column}) FROM {table}")}
            assert kinds <= allowed | {"null"}, (table, column)
    assert connection.execute("SELECT count(*) FROM fit WHERE r IS NULL").fetchone() == (len(FAMILIES),)
    assert connection.execute("SELECT DISTINCT typeof(r) FROM fit WHERE position <> 2").fetchall() == [("real",)]
    connection.close()


def test_storing_a_block_again_changes_nothing(tmp_path: Path) -> None:
    with stored_run(tmp_path / "a.run", block(0, 4)) as run:
        once = run.results()
        run.store(block(0, 4))
        assert_frame_equal(run.results(), once)
        assert run.done() == {Span(0, 4)}


def test_a_block_that_failed_is_not_done_and_may_be_stored_later(tmp_path: Path) -> None:
    with stored_run(tmp_path / "a.run", block(0, 2)) as run:
        run.store_failure(Span(2, 4), "Couldn't read channels 'sensor_2' to 'sensor_3'.")
        failed = run.results()
        assert failed["verdict"].to_list()[2:] == ["not scored"] * 2
        assert failed["reason"].to_list()[2:] == ["Couldn't read channels 'sensor_2' to 'sensor_3'."] * 2
        assert failed["n"].to_list()[2:] == [None, None]
        assert run.done() == {Span(0, 2)}
        run.store_failure(Span(2, 4), "Again.")
        assert run.results()["reason"].to_list()[2:] == ["Again."] * 2
        run.store(block(2, 4))
        assert run.results()["reason"].to_list() == [None] * 4
        assert run.done() == {Span(0, 2), Span(2, 4)}


def test_a_failure_never_hides_scores_that_another_program_stored(tmp_path: Path) -> None:
    with stored_run(tmp_path / "a.run", block(0, 2)) as run:
        before = run.results()
        run.store_failure(Span(0, 2), "Out of memory.")
        assert_frame_equal(run.results(), before)
        assert run.done() == {Span(0, 2)}


def test_a_block_is_stored_whole_or_not_at_all(tmp_path: Path) -> None:
    with stored_run(tmp_path / "a.run", block(0, 2)) as run:
        before = run.results()
        with pytest.raises(ValueError, match="zip"):
            run.store(replace(block(2, 4), points=(np.zeros(3),)))
        assert_frame_equal(run.results(), before)
        assert run.done() == {Span(0, 2)}
        run.store(block(2, 4))
        assert len(run.results()) == 4


def test_a_finished_run_is_one_file(tmp_path: Path) -> None:
    run = stored_run(tmp_path / "a.run", block(0, 8))
    assert (tmp_path / "a.run-wal").exists()
    run.finish()
    assert run.finished
    assert files_in(tmp_path) == ["a.run"]
    assert len(run.results()) == 8
    run.close()
    assert files_in(tmp_path) == ["a.run"]


def test_an_interrupted_run_is_one_file_and_goes_on(tmp_path: Path) -> None:
    stored_run(tmp_path / "a.run", block(0, 2)).close()
    assert files_in(tmp_path) == ["a.run"]
    with RunFile.open(tmp_path / "a.run") as run:
        assert not run.finished
        run.store(block(2, 4))
    with RunFile.open(tmp_path / "a.run", read_only=True) as run:
        assert run.done() == {Span(0, 2), Span(2, 4)}


@pytest.mark.parametrize("read_only", [True, False])
def test_the_last_to_close_leaves_one_file(tmp_path: Path, read_only: bool) -> None:
    run = stored_run(tmp_path / "a.run", block(0, 8))
    reader = RunFile.open(tmp_path / "a.run", read_only=read_only)
    assert len(reader.results()) == 8
    run.finish()
    run.close()
    assert reader.finished
    assert len(reader.results()) == 8
    reader.close()
    assert files_in(tmp_path) == ["a.run"]


def test_reviewing_a_run_leaves_it_as_it_is(tmp_path: Path) -> None:
    run = stored_run(tmp_path / "a.run", block(0, 8))
    run.finish()
    run.close()
    before = (tmp_path / "a.run").read_bytes()
    with RunFile.open(tmp_path / "a.run") as reviewed:
        reviewed.results()
        reviewed.fits(3)
    assert (tmp_path / "a.run").read_bytes() == before


def test_where_write_ahead_is_refused_the_run_is_stored_all_the_same(tmp_path: Path) -> None:
    new_run(tmp_path / "a.run").close()
    address = f"{(tmp_path / 'a.run').as_uri()}?vfs=unix-dotfile"
    connection = sqlite3.connect(address, uri=True, isolation_level=None)
    assert not use_wal(connection)
    run = RunFile(tmp_path / "a.run", connection)
    run.store(block(0, 8))
    run.finish()
    assert run.finished
    connection.close()
    with RunFile.open(tmp_path / "a.run", read_only=True) as read:
        assert read.results()["r"].to_list() == block(0, 8).r[:, 0].tolist()


@pytest.mark.parametrize("name", ["a b%20c?d#e.run", "né 机 'x\".run", "line\nbreak.run", os.fsdecode(b"\xff\xfe.run")])
def test_a_path_may_have_odd_characters(tmp_path: Path, name: str) -> None:
    path, table = tmp_path / name, tmp_path / f"{name}.csv"
    RunFile.create(path, facts(2, table), PLAN, version="1", null_version="1").close()
    assert files_in(tmp_path) == [name]
    assert is_run_file(path)
    with RunFile.open(path, read_only=True) as run:
        assert run.facts.path == table


def test_what_could_steer_a_terminal_is_made_visible(tmp_path: Path) -> None:
    table = replace(
        facts(1),
        channels=(Channel(0, "\x1b[31mred\u202eder", "m\u00a0s\x07"),),
        set_aside=(SetAside("a\nb", "text\x9b"),),
        remarks=("\x1b]0;title\x07",),
    )
    RunFile.create(tmp_path / "a.run", table, PLAN, version="1", null_version="1").close()
    with RunFile.open(tmp_path / "a.run") as run:
        assert run.facts.channels == (Channel(0, r"\x1b[31mred\u202eder", "m\u00a0s\\x07"),)
        assert run.facts.set_aside == (SetAside(r"a\nb", r"text\x9b"),)
        assert run.facts.remarks == (r"\x1b]0;title\x07",)


def test_names_written_by_another_hand_are_made_visible_too(tmp_path: Path) -> None:
    stored_run(tmp_path / "a.run", block(0, 2)).close()
    connection = sqlite3.connect(tmp_path / "a.run")
    with connection:
        connection.execute("UPDATE channel SET name = char(27) || '[2J' WHERE position = 1")
        connection.execute("UPDATE fit SET note = char(7) WHERE position = 1")
    connection.close()
    with RunFile.open(tmp_path / "a.run") as run:
        assert run.results()["channel"].to_list() == ["sensor_0", r"\x1b[2J"]
        assert run.fits(1)["note"].to_list() == [r"\x07"] * len(FAMILIES)
