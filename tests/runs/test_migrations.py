"""Run files of earlier schemas are brought to this one, or refused in a sentence; nothing in them is lost."""

import sqlite3
from collections.abc import Callable
from contextlib import AbstractContextManager, closing
from pathlib import Path

import polars as pl
import pytest

from screener.errors import RunFileError
from screener.records import Decision
from screener.runs import RunFile
from screener.runs.connection import schema
from tests.runs.synthetic import block, files_in, stored_run

SCHEMA_1 = Path(__file__).with_name("schema_1.sql").read_text()
"""The layout of run files before decisions, row order, strips and views were kept."""


def old_run(path: Path) -> pl.DataFrame:
    """A run file of schema 1 made from one of today; its results, without what could not be in it."""
    today = path.with_suffix(".today")
    with stored_run(today, block(0, 5)) as run:
        results = run.results()
    with closing(sqlite3.connect(path)) as connection:
        connection.executescript(SCHEMA_1)
        connection.execute("ATTACH ? AS today", (str(today),))
        for (name,) in connection.execute("SELECT name FROM main.sqlite_master WHERE type = 'table'").fetchall():
            columns = ", ".join(column[1] for column in connection.execute(f"PRAGMA main.table_info({name})"))
            connection.execute(f"INSERT INTO main.{name} ({columns}) SELECT {columns} FROM today.{name}")
        connection.commit()
    today.unlink()
    return results


@pytest.mark.parametrize("read_only", [True, False])
def test_a_run_of_schema_1_is_migrated_and_shows_what_it_held(tmp_path: Path, *, read_only: bool) -> None:
    results = old_run(tmp_path / "old.run")
    with RunFile.open(tmp_path / "old.run", read_only=read_only) as run:
        assert run.results().equals(results)
        assert run.in_order(0).size == 0
        assert run.strips().is_empty()
    with RunFile.open(tmp_path / "old.run") as run:
        run.decide([2], Decision.USE)
        assert run.results()["decision"][2] == "use as it is"
    assert files_in(tmp_path) == ["old.run"]


def test_a_run_of_schema_2_has_no_figures_by_file_and_is_else_the_same(tmp_path: Path) -> None:
    with stored_run(tmp_path / "old.run", block(0, 5)) as run:
        results = run.results()
    with closing(sqlite3.connect(tmp_path / "old.run")) as connection:
        connection.execute("DROP TABLE by_file")
        connection.execute("PRAGMA user_version = 2")
    with RunFile.open(tmp_path / "old.run", read_only=True) as run:
        assert run.results().equals(results)
        assert run.by_file(0).size == 0


def test_a_migrated_file_has_the_layout_of_a_new_one(tmp_path: Path) -> None:
    old_run(tmp_path / "old.run")
    RunFile.open(tmp_path / "old.run").close()

    def layout(connection: sqlite3.Connection) -> dict[str, set[tuple[str, str]]]:
        names = [name for (name,) in connection.execute("SELECT name FROM sqlite_master WHERE type = 'table'")]
        return {n: {(c[1], c[2]) for c in connection.execute(f"PRAGMA table_info({n})")} for n in names}

    with closing(sqlite3.connect(tmp_path / "old.run")) as old, closing(sqlite3.connect(":memory:")) as new:
        new.executescript(schema())
        assert layout(old) == layout(new)
        assert old.execute("PRAGMA user_version").fetchone() == new.execute("PRAGMA user_version").fetchone()


def test_one_that_may_not_be_written_to_is_refused_with_the_way_out(
    shared_folder: Path, ordinary_user: Callable[[], AbstractContextManager[None]]
) -> None:
    old_run(shared_folder / "old.run")
    (shared_folder / "old.run").chmod(0o444)
    with ordinary_user(), pytest.raises(RunFileError, match=r"has schema 1, .* may not be written to\. Copy it"):
        RunFile.open(shared_folder / "old.run", read_only=True)


def test_one_that_brings_a_trigger_is_refused_before_it_is_migrated(tmp_path: Path) -> None:
    old_run(tmp_path / "old.run")
    with closing(sqlite3.connect(tmp_path / "old.run")) as connection:
        connection.execute("CREATE TRIGGER extra AFTER INSERT ON span BEGIN DELETE FROM score; END")
    with pytest.raises(RunFileError, match="not those of a run file"):
        RunFile.open(tmp_path / "old.run")
    with closing(sqlite3.connect(tmp_path / "old.run")) as connection:
        assert connection.execute("PRAGMA user_version").fetchone() == (1,)
