"""A run file outlives its writer, and is read while it is written."""

import random
import subprocess
import sys
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest
from polars.testing import assert_frame_equal

from screener.records import Span
from screener.runs import RunFile, is_run_file
from tests.runs.synthetic import block, files_in, new_run
from tests.runs.writer import CHANNELS, SPANS, main

PROJECT = Path(__file__).parents[2]


@contextmanager
def writer(path: Path) -> Iterator[subprocess.Popen[str]]:
    command = [sys.executable, "-m", "tests.runs.writer", str(path)]
    with subprocess.Popen(command, stdout=subprocess.PIPE, text=True, cwd=PROJECT) as process:
        try:
            yield process
        finally:
            process.kill()


def acknowledged(process: subprocess.Popen[str], at_most: int) -> Iterator[Span]:
    """The spans that the writer says it has stored, as it says so; it is killed after some."""
    assert process.stdout is not None
    for count, line in enumerate(process.stdout, start=1):
        yield Span(int(line), int(line) + 2)
        if count == at_most:
            process.kill()


def test_a_writer_killed_at_any_moment_loses_nothing_that_it_acknowledged(tmp_path: Path) -> None:
    """And the run that goes on after every kill ends with the results of one that was left alone."""
    path, chance = tmp_path / "killed.run", random.Random(3)
    said: set[Span] = set()
    for _ in range(7):
        with writer(path) as process:
            for span in acknowledged(process, at_most=chance.randrange(1, 25)):
                said.add(span)
        assert process.returncode != 0
        with RunFile.open(path, read_only=True) as run:
            assert run.done() >= said
            assert len(run.results()) == 2 * len(run.done())
            assert not run.finished
    with writer(path) as process:
        said |= set(acknowledged(process, at_most=0))
        assert process.wait() == 0
    assert said <= set(SPANS)
    main(tmp_path / "alone.run")
    with RunFile.open(path) as killed, RunFile.open(tmp_path / "alone.run") as alone:
        assert killed.finished
        assert killed.done() == set(SPANS)
        assert_frame_equal(killed.results(), alone.results(), check_exact=True)
        for position in range(0, CHANNELS, 97):
            assert killed.points(position).tobytes() == alone.points(position).tobytes()
            assert_frame_equal(killed.fits(position), alone.fits(position), check_exact=True)
    assert files_in(tmp_path) == ["alone.run", "killed.run"]


def test_what_a_killed_writer_left_half_done_is_undone_also_for_who_only_reads(tmp_path: Path) -> None:
    path = tmp_path / "a.run"
    with new_run(path, CHANNELS) as run:
        run.store(block(0, 4))
        before = run.results()
    half_done = """
import os, sqlite3, sys
connection = sqlite3.connect(sys.argv[1], isolation_level=None)
connection.execute("PRAGMA cache_size = 1")
connection.execute("BEGIN IMMEDIATE")
connection.execute("UPDATE channel SET name = name || hex(randomblob(900))")
connection.execute("DELETE FROM score")
os.kill(os.getpid(), 9)
"""
    subprocess.run([sys.executable, "-c", half_done, str(path)], check=False)
    assert files_in(tmp_path) == ["a.run", "a.run-journal"]
    assert is_run_file(path)
    with RunFile.open(path, read_only=True) as run:
        assert_frame_equal(run.results(), before, check_exact=True)
    assert files_in(tmp_path) == ["a.run"]


@pytest.mark.parametrize("journal", ["WAL", "DELETE"])
def test_a_new_run_file_takes_nothing_from_one_that_was_killed_and_removed(tmp_path: Path, journal: str) -> None:
    path = tmp_path / "a.run"
    with new_run(path, CHANNELS) as run:
        run.store(block(0, 4))
    killed = """
import os, sqlite3, sys
connection = sqlite3.connect(sys.argv[1], isolation_level=None)
connection.execute(f"PRAGMA journal_mode = {sys.argv[2]}")
connection.execute("PRAGMA cache_size = 1")
connection.execute("BEGIN IMMEDIATE")
connection.execute("UPDATE channel SET name = name || hex(randomblob(900))")
if sys.argv[2] == "WAL":
    connection.execute("COMMIT")
os.kill(os.getpid(), 9)
"""
    subprocess.run([sys.executable, "-c", killed, str(path), journal], check=False)
    path.unlink()
    assert files_in(tmp_path)
    with new_run(path, CHANNELS) as run, new_run(tmp_path / "alone.run", CHANNELS) as alone:
        run.store(block(0, 8))
        alone.store(block(0, 8))
        assert_frame_equal(run.results(), alone.results(), check_exact=True)
        assert run.facts == alone.facts
    assert files_in(tmp_path) == ["a.run", "alone.run"]


def test_a_reader_sees_whole_blocks_and_only_ever_more_of_them(tmp_path: Path) -> None:
    path = tmp_path / "a.run"
    new_run(path, CHANNELS).close()
    seen = [0]
    with writer(path) as process:
        while process.poll() is None:
            with RunFile.open(path, read_only=True) as run:
                while process.poll() is None and seen[-1] < CHANNELS:
                    seen.append(len(run.results()))
        assert process.returncode == 0
    assert all(count % 2 == 0 for count in seen)
    assert seen == sorted(seen)
    assert any(0 < count < CHANNELS for count in seen)
    with RunFile.open(path) as run:
        assert len(run.results()) == CHANNELS
        assert run.finished
    assert files_in(tmp_path) == ["a.run"]


def test_two_writers_of_one_run_file_end_with_the_results_of_one(tmp_path: Path) -> None:
    path = tmp_path / "a.run"
    new_run(path, CHANNELS).close()
    writers = [threading.Thread(target=main, args=(path,)) for _ in range(2)]
    for each in writers:
        each.start()
    for each in writers:
        each.join()
    main(tmp_path / "alone.run")
    with RunFile.open(path) as shared, RunFile.open(tmp_path / "alone.run") as alone:
        assert shared.finished
        assert_frame_equal(shared.results(), alone.results(), check_exact=True)


def test_closing_a_reader_leaves_the_locks_of_a_writer_in_the_same_program(tmp_path: Path) -> None:
    """POSIX drops every lock of a program when it closes any handle of the file: a second one must not get in."""
    with new_run(tmp_path / "a.run") as run:
        run.store(block(0, 4))
        RunFile.open(tmp_path / "a.run", read_only=True).close()
        RunFile.open(tmp_path / "a.run").close()
        other = "import sys, sqlite3; print(*sqlite3.connect(sys.argv[1]).execute('PRAGMA journal_mode = DELETE'))"
        refused = subprocess.run(
            [sys.executable, "-c", other, str(tmp_path / "a.run")], capture_output=True, text=True, check=False
        )
        assert "database is locked" in refused.stderr
        run.store(block(4, 8))
        assert len(run.results()) == 8
