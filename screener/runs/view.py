"""Where the user was on the screen, so that opening a run again comes back to it."""

import json
import sqlite3
from collections.abc import Mapping

from screener.runs.text import visible


def read_view(connection: sqlite3.Connection) -> dict[str, str]:
    """Texts by name, safe to show; raises ValueError or TypeError when they are none."""
    row = connection.execute("SELECT state FROM view").fetchone()
    state = json.loads(row[0]) if row else {}
    if not isinstance(state, dict):
        raise TypeError("its view is no object")
    return {visible(name): visible(text) for name, text in state.items()}


def store_view(connection: sqlite3.Connection, state: Mapping[str, str]) -> None:
    """Keep these texts in place of the ones before."""
    connection.execute("INSERT OR REPLACE INTO view (id, state) VALUES (1, ?)", (json.dumps(dict(state)),))
