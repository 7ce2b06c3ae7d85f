"""Run files of earlier schemas brought up to this one, in place, one transaction a step."""

import sqlite3
from collections.abc import Callable

from screener.runs import connection as sqlite


def migrated(connection: sqlite3.Connection, schema: int) -> None:
    """Bring a run file of an earlier schema to the present one; a step that fails leaves the schema before it."""
    for before in range(schema, sqlite.SCHEMA):
        with sqlite.transaction(connection):
            STEPS[before](connection)
            connection.execute(f"PRAGMA user_version = {before + 1:d}")


def add_what_is_new(connection: sqlite3.Connection) -> None:
    """Add the tables and columns that the file lacks; nothing that is there is changed, nothing of it executed."""
    wanted = sqlite3.connect(":memory:")
    try:
        wanted.executescript(sqlite.schema())
        tables = wanted.execute("SELECT name, sql FROM sqlite_master WHERE type = 'table'").fetchall()
        for name, statement in tables:
            _add_table(connection, name, statement, wanted.execute(f"PRAGMA table_info({name})").fetchall())
    finally:
        wanted.close()


def _add_table(connection: sqlite3.Connection, name: str, statement: str, columns: list[tuple[object, ...]]) -> None:
    """One table, or those of its columns that the file's lacks; names and statements are our own, not the file's."""
    held = {column[1] for column in connection.execute(f"PRAGMA table_info({name})")}
    if not held:
        connection.execute(statement)
    for _, column, kind, required, default, _ in columns:
        if held and column not in held:
            must = f" NOT NULL DEFAULT {default}" if required else ""
            connection.execute(f"ALTER TABLE {name} ADD COLUMN {column} {kind}{must}")


STEPS: dict[int, Callable[[sqlite3.Connection], None]] = dict.fromkeys((1, 2, 3), add_what_is_new)
"""How each earlier schema becomes the next."""
