"""Run files in places that may not be written to are read, and refused only for writing."""

import shutil
import sqlite3
from collections.abc import Callable
from contextlib import AbstractContextManager, closing
from pathlib import Path

import pytest

from screener.errors import RunFileError
from screener.runs import RunFile, is_run_file
from tests.runs.synthetic import block, files_in, new_run, stored_run

OrdinaryUser = Callable[[], AbstractContextManager[None]]


def sealed(folder: Path) -> None:
    """As on a read-only medium."""
    for file in folder.iterdir():
        file.chmod(0o444)
    folder.chmod(0o555)


def test_no_run_file_is_made_in_a_folder_that_may_not_be_written_to(
    shared_folder: Path, ordinary_user: OrdinaryUser
) -> None:
    sealed(shared_folder)
    with ordinary_user(), pytest.raises(RunFileError, match=r"Couldn't create run file .*: you may not write there"):
        new_run(shared_folder / "a.run")
    assert files_in(shared_folder) == []


@pytest.mark.parametrize("read_only", [True, False])
@pytest.mark.parametrize("journal", ["DELETE", "WAL"])
def test_a_run_file_on_a_read_only_medium_is_read(
    shared_folder: Path, ordinary_user: OrdinaryUser, read_only: bool, journal: str
) -> None:
    path = shared_folder / "a.run"
    stored_run(path, block(0, 8)).close()
    with closing(sqlite3.connect(path)) as connection:
        assert connection.execute(f"PRAGMA journal_mode = {journal}").fetchone() == (journal.lower(),)
    sealed(shared_folder)
    with ordinary_user():
        assert is_run_file(path)
        with RunFile.open(path, read_only=read_only) as run:
            assert run.results()["r"].to_list() == block(0, 8).r[:, 0].tolist()
            assert run.points(3).tolist() == block(3, 4).points[0].tolist()
    assert files_in(shared_folder) == ["a.run"]


def test_a_run_file_on_a_read_only_medium_is_not_written(shared_folder: Path, ordinary_user: OrdinaryUser) -> None:
    path = shared_folder / "a.run"
    stored_run(path, block(0, 4)).close()
    sealed(shared_folder)
    with (
        ordinary_user(),
        RunFile.open(path) as run,
        pytest.raises(RunFileError, match=r"Couldn't write run file .*: you may not write there"),
    ):
        run.store(block(4, 8))


def test_results_that_stand_beside_a_copied_run_file_are_never_passed_over_in_silence(
    tmp_path: Path, shared_folder: Path, ordinary_user: OrdinaryUser
) -> None:
    with stored_run(tmp_path / "a.run", block(0, 4)) as run:
        shutil.copy(tmp_path / "a.run", shared_folder)
        shutil.copy(tmp_path / "a.run-wal", shared_folder)
        assert len(run.results()) == 4
    sealed(shared_folder)
    with ordinary_user(), pytest.raises(RunFileError, match=r"Couldn't open run file"):
        RunFile.open(shared_folder / "a.run", read_only=True)
    shared_folder.chmod(0o755)
    with RunFile.open(shared_folder / "a.run", read_only=True) as copied:
        assert len(copied.results()) == 4


def test_a_run_that_somebody_else_is_writing_is_read_without_permission_to_write(
    shared_folder: Path, ordinary_user: OrdinaryUser
) -> None:
    with stored_run(shared_folder / "a.run", block(0, 4)) as run:
        sealed(shared_folder)
        with ordinary_user(), RunFile.open(shared_folder / "a.run", read_only=True) as read:
            assert len(read.results()) == 4
            run.store(block(4, 8))
            assert len(read.results()) == 8
        shared_folder.chmod(0o755)


def test_a_run_file_that_may_not_be_read_is_refused(shared_folder: Path, ordinary_user: OrdinaryUser) -> None:
    path = shared_folder / "a.run"
    stored_run(path, block(0, 4)).close()
    path.chmod(0)
    with ordinary_user():
        assert not is_run_file(path)
        with pytest.raises(RunFileError, match=r"Couldn't open run file .*: it or its folder can't be opened"):
            RunFile.open(path)
