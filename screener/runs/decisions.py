"""What a person decided about channels: every act is kept with its time and user; the last one not undone holds."""

import getpass
import sqlite3
from collections.abc import Iterable, Mapping
from datetime import UTC, datetime

from screener.runs.text import visible

_HOLDS = """
SELECT decided.position, decided.decision, decided.note, MAX(decided.act)
FROM decided JOIN act ON act.id = decided.act
WHERE act.undone = 0
GROUP BY decided.position
"""
# SQLite takes the other columns of a MAX from the row that has it.


def read_decisions(connection: sqlite3.Connection) -> dict[int, tuple[str | None, str | None]]:
    """Decision and note by channel position, of channels that have either."""
    rows = connection.execute(_HOLDS)
    held = {int(position): (_text(decision), _text(note)) for position, decision, note, _ in rows}
    return {position: words for position, words in held.items() if words != (None, None)}


def store_act(connection: sqlite3.Connection, positions: Iterable[int], given: Mapping[str, str | None]) -> None:
    """Keep a new `decision` or `note` of these channels, the other as it was; what was undone is so for good."""
    held = read_decisions(connection)
    made = datetime.now(UTC).isoformat(timespec="seconds")
    connection.execute("UPDATE act SET undone = 2 WHERE undone = 1")
    act = connection.execute("INSERT INTO act (made, made_by) VALUES (?, ?)", (made, user())).lastrowid
    words = {name: visible(text) or None if text else None for name, text in given.items()}
    rows = []
    for position in positions:
        decision, note = held.get(position, (None, None))
        rows.append((position, act, words.get("decision", decision), words.get("note", note)))
    connection.executemany("INSERT INTO decided (position, act, decision, note) VALUES (?, ?, ?, ?)", rows)


def undo(connection: sqlite3.Connection) -> int:
    """Take back the last act; how many channels it was about, 0 when there is none."""
    return _turn(connection, "SELECT MAX(id) FROM act WHERE undone = 0", 1)


def redo(connection: sqlite3.Connection) -> int:
    """Do again what was undone last; how many channels it is about, 0 when there is nothing."""
    return _turn(connection, "SELECT MIN(id) FROM act WHERE undone = 1", 0)


def user() -> str:
    """Who is at work, as the system knows them; safe to show."""
    try:
        return visible(getpass.getuser())
    except (OSError, KeyError):
        return "unknown"


def _turn(connection: sqlite3.Connection, which: str, undone: int) -> int:
    act = connection.execute(which).fetchone()[0]
    if act is None:
        return 0
    connection.execute("UPDATE act SET undone = ? WHERE id = ?", (undone, act))
    count: int = connection.execute("SELECT COUNT(*) FROM decided WHERE act = ?", (act,)).fetchone()[0]
    return count


def _text(stored: object) -> str | None:
    """A text of the file, safe to show; raises TypeError for anything else."""
    return None if stored is None else visible(stored)  # type: ignore[arg-type]
