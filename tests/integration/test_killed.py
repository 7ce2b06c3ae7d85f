"""`screener score` killed at any moment and started again, and two programs at one run file: the end is the same."""

import random
import sqlite3
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import polars as pl
import pytest

from screener.runs import RunFile, is_run_file

ROWS, CHANNELS = 4_000, 1_200
NOT_COMPARED = {("version", "created")}
"""What two runs of the same table may differ in: when they were begun."""


@pytest.fixture(scope="module")
def table(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A table of some blocks, whose channels are rounded, serial, gappy or none of it."""
    rng = np.random.default_rng(17)
    readings = rng.normal(20.0, 1.0, (ROWS, CHANNELS))
    readings[:, ::3] = readings[:, ::3].round(1)
    readings[1:, 1::5] += 0.5 * readings[:-1, 1::5]
    readings[rng.random(readings.shape) < 0.01] = np.nan
    path = tmp_path_factory.mktemp("killed") / "rig.parquet"
    pl.DataFrame(readings).write_parquet(path, compression="uncompressed")
    return path


@pytest.fixture(scope="module")
def undisturbed(table: Path) -> Path:
    """The run file of a run that nobody disturbed."""
    path = table.with_name("undisturbed.run")
    with scoring(table, path) as process:
        assert process.wait() == 0
    return path


def scoring(table: Path, run: Path) -> subprocess.Popen[bytes]:
    command = [sys.executable, "-m", "screener", "score", str(table), "-o", str(run)]
    return subprocess.Popen(command, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)


def spans_done(run: Path) -> int:
    """How many blocks the run file holds; none while it is not there."""
    if not is_run_file(run):
        return 0
    with RunFile.open(run, read_only=True) as file:
        return len(file.done())


def kill_after(process: subprocess.Popen[bytes], run: Path, blocks: int, seconds: float) -> None:
    """Kill it so long after it has stored so many more blocks, unless it has ended by then."""
    wanted = spans_done(run) + blocks
    while process.poll() is None and spans_done(run) < wanted:
        time.sleep(0.03)
    time.sleep(seconds)
    process.kill()
    process.wait()


def content(run: Path) -> dict[str, list[tuple[object, ...]]]:
    """Every row of every table, in order, but for times."""
    connection = sqlite3.connect(f"file:{run}?mode=ro", uri=True)
    try:
        assert connection.execute("PRAGMA integrity_check").fetchall() == [("ok",)]
        tables = [name for (name,) in connection.execute("SELECT name FROM sqlite_master WHERE type = 'table'")]
        return {name: _rows(connection, name) for name in tables}
    finally:
        connection.close()


def _rows(connection: sqlite3.Connection, table: str) -> list[tuple[object, ...]]:
    columns = [row[1] for row in connection.execute(f"PRAGMA table_info({table})")]
    compared = ", ".join(column for column in columns if (table, column) not in NOT_COMPARED)
    return connection.execute(f"SELECT {compared} FROM {table} ORDER BY {compared}").fetchall()


def test_a_run_killed_again_and_again_ends_bit_for_bit_as_an_undisturbed_one(
    table: Path, undisturbed: Path, tmp_path: Path
) -> None:
    run, chance = tmp_path / "killed.run", random.Random(29)
    whole = len(content(undisturbed)["span"])
    reached = [0]
    while len(reached) < 4 or (reached[-1] < whole - 1 and len(reached) < 9):
        # At any moment of the start, when the run file is made or taken up; or soon after a block was stored.
        blocks, seconds = chance.choice([(0, chance.uniform(0.1, 1.0)), (1, chance.uniform(0.0, 0.1))])
        with scoring(table, run) as process:
            kill_after(process, run, blocks, seconds)
        reached.append(spans_done(run))
        assert process.returncode in {0, -9}
    assert reached == sorted(reached)
    assert any(0 < count < whole for count in reached)
    with scoring(table, run) as process:
        assert process.wait() == 0
    assert content(run) == content(undisturbed)
    # A kill while the run file is laid out may leave the hidden draft.
    assert [path.name for path in tmp_path.iterdir() if path.name[0] != "."] == ["killed.run"]


def test_two_programs_at_one_run_file_end_as_one_alone_also_when_one_is_killed(
    table: Path, undisturbed: Path, tmp_path: Path
) -> None:
    run = tmp_path / "shared.run"
    with scoring(table, run) as first:
        while not is_run_file(run):
            assert first.poll() is None
            time.sleep(0.03)
        with scoring(table, run) as second, scoring(table, run) as third:
            kill_after(third, run, 1, 0.05)
            assert (first.wait(), second.wait()) == (0, 0)
    assert content(run) == content(undisturbed)
    assert [path.name for path in tmp_path.iterdir()] == ["shared.run"]
