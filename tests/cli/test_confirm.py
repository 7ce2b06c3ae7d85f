"""`screener show --confirm`: the result is printed, kept, and printed again without the table."""

import sqlite3
from contextlib import closing
from pathlib import Path

from command_line import screener

from screener.runs import RunFile


def test_a_confirmation_is_printed_and_kept_in_the_run_file(table: Path, run_file: Path) -> None:
    outcome = screener("show", run_file, "wait", "--confirm", "200")
    assert outcome.code == 0
    (said,) = (line for line in outcome.out.splitlines() if line.startswith("By 200 samples"))
    assert "of normal in the channel's own autocorrelation: flagged, r 0." in said
    assert said.endswith("0 as small, p 0.0050.")
    table.unlink()
    assert said in screener("show", run_file, "wait").out
    assert "By 200 samples" not in screener("show", run_file, "level_1").out
    with RunFile.open(run_file, read_only=True) as run:
        kept = run.confirmation(2)
        assert kept is not None
        assert (kept.samples, kept.as_small, kept.p) == (200, 0, 1 / 201)
        assert kept.r == run.results()["r"][2]
        assert run.confirmation(0) is None


def test_without_its_table_a_channel_cannot_be_confirmed_and_the_rest_is_shown(table: Path, run_file: Path) -> None:
    table.unlink()
    outcome = screener("show", run_file, "wait", "--confirm", "200")
    assert (outcome.code, outcome.out, len(outcome.complaints)) == (3, "", 1)
    assert "no such file" in outcome.err
    assert screener("show", run_file, "wait").code == 0


def test_a_result_that_cannot_be_kept_is_printed_all_the_same(table: Path, run_file: Path) -> None:
    assert table.exists()
    with closing(sqlite3.connect(run_file, isolation_level=None)) as other:
        other.execute("BEGIN IMMEDIATE")
        outcome = screener("show", run_file, "wait", "--confirm", "100")
    assert outcome.code == 0
    assert "\nBy 100 samples of normal" in outcome.out
    assert len(outcome.complaints) == 1
    assert "another program" in outcome.complaints[0]
    with RunFile.open(run_file, read_only=True) as run:
        assert run.confirmation(2) is None
