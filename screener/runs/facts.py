"""The table, the plan and the versions of a run: how they are stored and read back."""

import json
import os
import sqlite3
from dataclasses import asdict, dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from screener.records import Channel, Control, Plan, Proposal, SetAside, SourceFile, TableFacts
from screener.runs.connection import SCHEMA
from screener.runs.text import visible


@dataclass(frozen=True, slots=True)
class Origin:
    """What a run file was made from, by what, and when."""

    facts: TableFacts
    plan: Plan
    version: str
    null_version: str
    created: str
    """UTC, ISO 8601."""


def store_origin(connection: sqlite3.Connection, facts: TableFacts, plan: Plan, versions: tuple[str, str]) -> None:
    """Write what is known before anything is scored; versions are those of the tool and of its null table."""
    execute, executemany = connection.execute, connection.executemany
    created = datetime.now(UTC).isoformat(timespec="seconds")
    execute("INSERT INTO version (schema, tool, null_table, created) VALUES (?, ?, ?, ?)", (SCHEMA, *versions, created))
    execute(
        "INSERT INTO run (plan, table_path, table_format, table_rows, fingerprint, dialect) VALUES (?, ?, ?, ?, ?, ?)",
        (
            json.dumps(asdict(plan)),
            os.fsencode(facts.path),
            facts.format,
            facts.rows,
            facts.fingerprint,
            visible(facts.dialect),
        ),
    )
    executemany("INSERT INTO remark (position, sentence) VALUES (?, ?)", enumerate(map(visible, facts.remarks)))
    executemany(
        "INSERT INTO set_aside (position, name, reason) VALUES (?, ?, ?)",
        ((k, visible(column.name), visible(column.reason)) for k, column in enumerate(facts.set_aside)),
    )
    executemany(
        "INSERT INTO channel (position, name, unit, below, above) VALUES (?, ?, ?, ?, ?)",
        ((c.position, visible(c.name), visible(c.unit) or None, c.below, c.above) for c in facts.channels),
    )
    executemany(
        "INSERT INTO proposal (position, value, channels, cells) VALUES (?, ?, ?, ?)",
        ((k, visible(one.value), one.channels, one.cells) for k, one in enumerate(facts.proposals)),
    )
    executemany(
        "INSERT INTO source_file (position, name, first_row, rows) VALUES (?, ?, ?, ?)",
        ((k, visible(file.name), file.first_row, file.rows) for k, file in enumerate(facts.files)),
    )


def read_origin(connection: sqlite3.Connection) -> Origin:
    """Read it back; values of the wrong kind raise ValueError or TypeError."""
    tool, null_table, created = _one_row(connection, "SELECT tool, null_table, created FROM version")
    (plan,) = _one_row(connection, "SELECT plan FROM run")
    return Origin(_read_facts(connection), plan_from_json(plan), visible(tool), visible(null_table), visible(created))


def plan_from_json(text: str) -> Plan:
    """The plan written by `json.dumps(asdict(plan))`; raises ValueError or TypeError for any other."""
    values = json.loads(text)
    defaults = asdict(Plan())
    if not isinstance(values, dict) or not values.keys() <= defaults.keys():
        raise ValueError("its plan has settings that this version does not know")
    checked = {name: _like(defaults[name], value, name) for name, value in values.items()}
    plan = Plan(**checked)
    if not (plan.family.isprintable() and plan.positions.isprintable()):
        raise ValueError("its plan names something unprintable")
    return plan


def _like(default: object, value: object, name: str) -> Any:
    """The value as the type of the setting's default; JSON has lists for tuples and may have 1 for 1.0."""
    if isinstance(default, Control) and isinstance(value, str):
        return Control(value)
    if isinstance(default, tuple) and isinstance(value, list) and all(isinstance(item, str) for item in value):
        return tuple(value)
    if isinstance(default, float) and isinstance(value, int | float) and not isinstance(value, bool):
        return float(value)
    if type(value) is not type(default) or isinstance(default, tuple):
        raise TypeError(f"the plan's {name} is {value!r}")
    return value


def _read_facts(connection: sqlite3.Connection) -> TableFacts:
    path, form, rows, fingerprint, dialect = _one_row(
        connection, "SELECT table_path, table_format, table_rows, fingerprint, dialect FROM run"
    )
    channels = connection.execute("SELECT position, name, unit, below, above FROM channel ORDER BY position")
    proposals = connection.execute("SELECT value, channels, cells FROM proposal ORDER BY position")
    files = connection.execute("SELECT name, first_row, rows FROM source_file ORDER BY position")
    set_aside = connection.execute("SELECT name, reason FROM set_aside ORDER BY position")
    remarks = connection.execute("SELECT sentence FROM remark ORDER BY position")
    return TableFacts(
        path=Path(os.fsdecode(path)),
        format=visible(form),
        rows=int(rows),
        channels=tuple(
            Channel(position, visible(name), visible(unit or ""), int(below), int(above))
            for position, name, unit, below, above in channels
        ),
        set_aside=tuple(SetAside(visible(name), visible(reason)) for name, reason in set_aside),
        fingerprint=visible(fingerprint),
        remarks=tuple(visible(sentence) for (sentence,) in remarks),
        dialect=visible(dialect),
        proposals=tuple(Proposal(visible(value), int(count), int(cells)) for value, count, cells in proposals),
        files=tuple(SourceFile(visible(name), int(first), int(count)) for name, first, count in files),
    )


def _one_row(connection: sqlite3.Connection, query: str) -> tuple[Any, ...]:
    row: tuple[Any, ...] | None = connection.execute(query).fetchone()
    if row is None:
        raise ValueError("it does not say what was run")
    return row
