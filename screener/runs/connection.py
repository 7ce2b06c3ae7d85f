"""Connections to a run file, opened so that nothing in a file from elsewhere is ever executed.

Nothing but SQLite may open a run file: closing any other handle of it drops the locks of the whole process.
"""

import sqlite3
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from importlib.resources import files
from pathlib import Path

from screener.errors import RunFileError
from screener.runs.failures import refusal

APPLICATION_ID = 0x5343524E
SCHEMA = 4
PATIENCE = 5.0
"""Seconds to wait for another program's lock."""

Migrate = Callable[[sqlite3.Connection, int], None]
"""Brings a run file of that schema to the present one."""

_TABLES = {
    *("version", "run", "remark", "set_aside", "channel", "proposal", "source_file"),
    *("span", "score", "family", "fit", "kept_readings", "readings_in_order", "by_file", "outermost", "strip"),
    *("confirmation", "act", "decided", "view"),
}


def schema() -> str:
    """The statements that lay out an empty run file."""
    return files("screener.runs").joinpath("schema.sql").read_text(encoding="utf-8")


def connect(path: Path, mode: str, patience: float = PATIENCE) -> sqlite3.Connection:
    """A guarded connection in an SQLite open mode: `ro`, `rw`, `rwc`, or `ro&immutable=1`."""
    address = f"{path.absolute().as_uri()}?mode={mode}"
    connection = sqlite3.connect(address, uri=True, isolation_level=None, timeout=patience)
    connection.execute("PRAGMA trusted_schema = OFF")
    connection.execute("PRAGMA cell_size_check = ON")
    return connection


def open_checked(path: Path, migrate: Migrate, *, read_only: bool, patience: float = PATIENCE) -> sqlite3.Connection:
    """A connection to an existing run file, after looking at nothing but its header and its tables.

    One of an earlier schema is brought to this one by `migrate`, also when it is only to be read.
    """
    if path.is_dir():
        raise refusal("open", path, "it is a folder", "Give the name of a run file.")
    if not path.is_file():
        raise refusal("open", path, "there is no such file", "Check the name, or make one with `screener score`.")
    connection = _connect_readable(path, "ro" if read_only else "rw", patience)
    try:
        version = _checked_schema(connection, path)
        _check_kinds(connection, path)
        if version < SCHEMA:
            _migrate(path, version, migrate)
        _check_tables(connection, path)
    except BaseException:
        connection.close()
        raise
    return connection


def use_wal(connection: sqlite3.Connection) -> bool:
    """Write ahead, so that readers and the writer never wait for each other; false where the file system cannot."""
    mode = ""
    with suppress(sqlite3.OperationalError):
        mode = connection.execute("PRAGMA journal_mode = WAL").fetchone()[0]
    connection.execute("PRAGMA synchronous = NORMAL")
    return mode == "wal"


@contextmanager
def transaction(connection: sqlite3.Connection) -> Iterator[None]:
    """All or nothing; the lock is taken first, so that a wait never ends in a half-read state."""
    connection.execute("BEGIN IMMEDIATE")
    try:
        yield
        connection.execute("COMMIT")
    except BaseException:
        connection.rollback()
        raise


def leave_wal(connection: sqlite3.Connection) -> None:
    """Put everything into the one file; without waiting, so that a reader leaves that to whoever closes last."""
    patience: int = connection.execute("PRAGMA busy_timeout").fetchone()[0]
    connection.execute("PRAGMA busy_timeout = 0")
    with suppress(sqlite3.OperationalError):
        connection.execute("PRAGMA wal_checkpoint(TRUNCATE)").fetchall()
        connection.execute("PRAGMA journal_mode = DELETE").fetchall()
    connection.execute(f"PRAGMA busy_timeout = {patience:d}")


def settle(path: Path) -> None:
    """The same for a file just closed here; quietly nothing where others have it open or it may not be written to."""
    with suppress(sqlite3.Error):
        connection = connect(path, "rw", patience=0.0)
        try:
            if connection.execute("PRAGMA journal_mode").fetchone()[0] == "wal":
                leave_wal(connection)
        finally:
            connection.close()


def application_id(path: Path) -> int:
    """What the header of an SQLite file says about who wrote it; raises sqlite3.Error for other files."""
    connection = _connect_readable(path, "ro", PATIENCE)
    try:
        return _header(connection)[0]
    finally:
        connection.close()


def _connect_readable(path: Path, mode: str, patience: float) -> sqlite3.Connection:
    """A connection that was read from once; in a folder that takes no companions, one that needs none."""
    connection = connect(path, mode, patience)
    try:
        _header(connection)
    except sqlite3.OperationalError as error:
        connection.close()
        if error.sqlite_errorcode == sqlite3.SQLITE_READONLY_ROLLBACK and _rolled_back(path, patience):
            return _connect_readable(path, mode, patience)
        if not _needs_companions(error) or _has_companion(path):
            raise
        return connect(path, "ro&immutable=1", patience)
    except sqlite3.DatabaseError as error:
        connection.close()
        if error.sqlite_errorcode == sqlite3.SQLITE_NOTADB:
            raise _not_a_run_file(path) from error
        raise
    return connection


def _rolled_back(path: Path, patience: float) -> bool:
    """Undo what a killed program left half done, as who may only read cannot; false where it may not be written to."""
    connection = connect(path, "rw", patience)
    try:
        _header(connection)
    except sqlite3.OperationalError:
        return False
    finally:
        connection.close()
    return True


def _needs_companions(error: sqlite3.OperationalError) -> bool:
    return error.sqlite_errorcode & 0xFF in {sqlite3.SQLITE_CANTOPEN, sqlite3.SQLITE_READONLY}


def _has_companion(path: Path) -> bool:
    """Whether a part of the content stands beside the file, where an immutable connection would not look."""
    return any(companion.stat().st_size > 0 for companion in companions(path) if not companion.name.endswith("-shm"))


def companions(path: Path) -> dict[Path, tuple[int, int]]:
    """The files of SQLite that stand beside that one, each with what tells it from a later one of its name."""
    beside = (path.with_name(path.name + ending) for ending in ("-wal", "-journal", "-shm"))
    return {file: (file.stat().st_ino, file.stat().st_mtime_ns) for file in beside if file.is_file()}


def _header(connection: sqlite3.Connection) -> tuple[int, int]:
    """Application id and schema, which stand in the header of the file."""
    application_id: int = connection.execute("PRAGMA application_id").fetchone()[0]
    version: int = connection.execute("PRAGMA user_version").fetchone()[0]
    return application_id, version


def _checked_schema(connection: sqlite3.Connection, path: Path) -> int:
    """The schema of the file, this one or an earlier one."""
    application_id, version = _header(connection)
    if application_id != APPLICATION_ID:
        raise _not_a_run_file(path)
    if version > SCHEMA or version < 1:
        newer = "Use the newer version of screener that wrote it, or run"
        way_out = f"{newer if version > SCHEMA else 'Run'} `screener score` again."
        raise refusal("open", path, f"it has schema {version}, this version needs {SCHEMA}", way_out)
    return version


def _migrate(path: Path, version: int, migrate: Migrate) -> None:
    """Bring the file to this schema through a connection of its own, since the given one may be for reading only."""
    try:
        connection = connect(path, "rw")
        try:
            migrate(connection, version)
        finally:
            connection.close()
    except sqlite3.OperationalError as error:
        if error.sqlite_errorcode & 0xFF not in {sqlite3.SQLITE_READONLY, sqlite3.SQLITE_CANTOPEN}:
            raise
        why = f"it has schema {version}, this version needs {SCHEMA}, and it may not be written to"
        raise refusal("open", path, why, "Copy it to a folder of your own and open the copy.") from error


def _check_kinds(connection: sqlite3.Connection, path: Path) -> None:
    """Raise when the file holds more than tables: views and triggers would run by themselves."""
    held = connection.execute("SELECT type, sql LIKE 'CREATE TABLE%' FROM sqlite_master").fetchall()
    if any(kind not in {"table", "index"} or (kind == "table" and not plain) for kind, plain in held):
        raise _other_tables(path)


def _check_tables(connection: sqlite3.Connection, path: Path) -> None:
    held = {name for (name,) in connection.execute("SELECT name FROM sqlite_master WHERE type = 'table'")}
    if not held >= _TABLES:
        raise _other_tables(path)


def _other_tables(path: Path) -> RunFileError:
    return refusal("open", path, "its tables are not those of a run file", "Run `screener score` again.")


def _not_a_run_file(path: Path) -> RunFileError:
    return refusal("open", path, "it is not a run file", "Give a file that `screener score` made.")
