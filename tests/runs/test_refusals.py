"""Every run file that cannot be used is refused in one sentence with the way out."""

import random
import re
import sqlite3
import struct
from collections.abc import Callable, Iterator
from contextlib import AbstractContextManager, closing, contextmanager
from pathlib import Path

import numpy as np
import pytest

from screener.errors import RunFileError
from screener.runs import RunFile, is_run_file
from tests.runs.synthetic import block, files_in, new_run, stored_run


@contextmanager
def refused(*parts: str) -> Iterator[None]:
    """One line that begins with what could not be done, names the file, ends with the way out."""
    with pytest.raises(RunFileError) as caught:
        yield
    message = str(caught.value)
    assert re.fullmatch(r"Couldn't (open|create|read|write) run file '.*': .+\. [A-Z].+\.", message), message
    for part in parts:
        assert part in message
    assert caught.value.exit_code == 4


def changed(path: Path, *statements: str) -> Path:
    """A run file of eight channels that another hand has changed."""
    stored_run(path, block(0, 8)).close()
    with closing(sqlite3.connect(path)) as connection, connection:
        for statement in statements:
            connection.execute(statement)
    return path


def read_all(path: Path) -> None:
    with RunFile.open(path, read_only=True) as run:
        run.results()
        run.done()
        for position in range(8):
            run.fits(position)
            run.points(position)


def test_a_missing_file(tmp_path: Path) -> None:
    with refused(repr(str(tmp_path / "no.run")), "there is no such file", "`screener score`"):
        RunFile.open(tmp_path / "no.run")
    assert not is_run_file(tmp_path / "no.run")
    assert files_in(tmp_path) == []


def test_a_folder(tmp_path: Path) -> None:
    with refused("it is a folder"):
        RunFile.open(tmp_path)
    with refused("create", "it is a folder", "-o"):
        new_run(tmp_path)
    assert not is_run_file(tmp_path)


@pytest.mark.parametrize(
    "content", [b"", b"a,b\n1,2\n", b"\0" * 4096, b"SQLite format 3\0", b"SQLite format 3\0" * 400]
)
def test_a_file_that_is_no_run_file(tmp_path: Path, content: bytes) -> None:
    (tmp_path / "a.run").write_bytes(content)
    with refused("it is not a run file", "Give a file that `screener score` made."):
        RunFile.open(tmp_path / "a.run")
    assert not is_run_file(tmp_path / "a.run")
    assert (tmp_path / "a.run").read_bytes() == content


def test_a_store_of_another_program(tmp_path: Path) -> None:
    with closing(sqlite3.connect(tmp_path / "a.run")) as connection:
        connection.execute("CREATE TABLE run (plan)")
    with refused("it is not a run file"):
        RunFile.open(tmp_path / "a.run")
    assert not is_run_file(tmp_path / "a.run")


@pytest.mark.parametrize(("schema", "way_out"), [(5, "Use the newer version"), (0, "Run `screener score` again.")])
def test_a_run_file_of_another_schema(tmp_path: Path, schema: int, way_out: str) -> None:
    path = changed(tmp_path / "a.run", f"PRAGMA user_version = {schema}")
    with refused(f"it has schema {schema}, this version needs 4", way_out):
        RunFile.open(path)
    assert is_run_file(path)


@pytest.mark.parametrize(
    "addition",
    [
        "CREATE VIEW extra AS SELECT load_extension('x.so')",
        "CREATE TRIGGER extra AFTER INSERT ON span BEGIN DELETE FROM score; END",
        "CREATE VIRTUAL TABLE extra USING fts5(words)",
        "ALTER TABLE kept_readings RENAME TO others",
    ],
)
def test_a_run_file_that_holds_more_than_tables_or_lacks_one(tmp_path: Path, addition: str) -> None:
    with refused("its tables are not those of a run file"):
        RunFile.open(changed(tmp_path / "a.run", addition))


@pytest.mark.parametrize(
    "change",
    [
        "UPDATE run SET plan = 'family'",
        "UPDATE run SET plan = '[1]'",
        """UPDATE run SET plan = '{"family": 3}'""",
        """UPDATE run SET plan = '{"control": "none"}'""",
        """UPDATE run SET plan = '{"channels": [1]}'""",
        """UPDATE run SET plan = '{"alpha": true}'""",
        """UPDATE run SET plan = '{"command": "rm"}'""",
        r"""UPDATE run SET plan = '{"family": "\u001b[2J"}'""",
        "UPDATE run SET plan = replace(hex(zeroblob(50000)), '0', '[')",
        "UPDATE run SET table_rows = 'many'",
        "UPDATE run SET table_path = 3",
        "UPDATE channel SET name = x'ff00'",
        "UPDATE channel SET name = CAST(x'ff00' AS TEXT)",
        "UPDATE remark SET sentence = x'00'",
        "UPDATE score SET n = 'all'",
        "UPDATE score SET reason = x'00'",
        "UPDATE fit SET r = 'straight'",
        "UPDATE fit SET p = x'00'",
        "UPDATE fit SET extrapolated = 'so'",
        "UPDATE kept_readings SET readings = x'0011'",
        "UPDATE kept_readings SET readings = 'abc'",
        "UPDATE span SET first = 'x' WHERE first = 0",
        "DELETE FROM run",
        "DELETE FROM version",
        "ALTER TABLE fit DROP COLUMN p",
    ],
)
def test_a_run_file_with_values_of_another_kind(tmp_path: Path, change: str) -> None:
    with refused("it is damaged"):
        read_all(changed(tmp_path / "a.run", change))


@pytest.mark.parametrize("share", [0.2, 0.5, 0.9])
def test_a_run_file_cut_short(tmp_path: Path, share: float) -> None:
    path = changed(tmp_path / "a.run")
    content = path.read_bytes()
    path.write_bytes(content[: int(len(content) * share)])
    with refused("it is damaged"):
        read_all(path)


def test_a_run_file_with_flipped_bytes_is_read_or_refused_but_never_worse(tmp_path: Path) -> None:
    content = changed(tmp_path / "a.run").read_bytes()
    chance, outcomes = random.Random(8), set()
    for trial in range(150):
        path, wrong = tmp_path / f"{trial}.run", bytearray(content)
        for _ in range(chance.choice([1, 30, 1000])):
            wrong[chance.randrange(len(wrong))] = chance.randrange(256)
        path.write_bytes(wrong)
        try:
            read_all(path)
            outcomes.add("read")
        except RunFileError as error:
            assert "\n" not in str(error)
            assert str(error).isprintable()
            outcomes.add("refused")
    assert outcomes == {"read", "refused"}


def test_a_name_that_is_taken(tmp_path: Path) -> None:
    new_run(tmp_path / "a.run").close()
    (tmp_path / "dangling.run").symlink_to(tmp_path / "nowhere")
    for name in ("a.run", "dangling.run"):
        with refused("create", "something of that name exists", "-o"):
            new_run(tmp_path / name)
    assert files_in(tmp_path) == ["a.run", "dangling.run"]


def test_a_folder_that_does_not_exist_and_a_name_too_long(tmp_path: Path) -> None:
    with refused("create", "there is no such folder"):
        new_run(tmp_path / "nowhere" / "a.run")
    with refused("create", "the name is too long"):
        new_run(tmp_path / ("a" * 300 + ".run"))
    assert files_in(tmp_path) == []


def test_a_locked_run_file_is_waited_for_and_then_refused(tmp_path: Path) -> None:
    path = changed(tmp_path / "a.run")
    with closing(sqlite3.connect(path, isolation_level=None)) as other:
        other.execute("BEGIN EXCLUSIVE")
        with refused("open", "another program keeps it locked", "try again"):
            RunFile.open(path, patience=0.05)
        other.execute("COMMIT")
        with RunFile.open(path, patience=0.05) as run:
            other.execute("BEGIN IMMEDIATE")
            with refused("write", "another program keeps it locked"):
                run.store(block(0, 4))
            other.execute("COMMIT")
            run.store(block(0, 4))


def test_a_full_disk_leaves_what_was_stored(
    tmp_path: Path, file_size_limit: Callable[[int], AbstractContextManager[None]]
) -> None:
    path = tmp_path / "a.run"
    with stored_run(path, block(0, 4), channels=4000) as run:
        room = max(file.stat().st_size for file in tmp_path.iterdir())
        with file_size_limit(room), refused("write", "no room left", "What was scored so far is kept."):
            run.store(block(4, 4000))
        assert len(run.results()) == 4
        run.store(block(4, 8))
        np.testing.assert_array_equal(run.points(5), block(5, 6).points[0])
    with file_size_limit(100), refused("create"):
        new_run(tmp_path / "b.run")
    assert files_in(tmp_path) == ["a.run"]


def test_the_header_says_what_the_file_is(tmp_path: Path) -> None:
    """At the offsets that the published SQLite file format gives, so that `file` and others can tell."""
    header = changed(tmp_path / "a.run").read_bytes()[:100]
    assert struct.unpack_from(">I", header, 68) == (0x5343524E,)
    assert struct.unpack_from(">I", header, 60) == (4,)
