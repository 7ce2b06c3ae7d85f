"""The run file: everything a run knows, in one SQLite file, stored as it happens."""

from __future__ import annotations

import os
import secrets
import sqlite3
from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from pathlib import Path
from types import TracebackType
from typing import TYPE_CHECKING, Self

import polars as pl

from screener.errors import RunFileError
from screener.records import BlockScores, Confirmation, Decision, Plan, Span, TableFacts
from screener.runs import connection as sqlite
from screener.runs import decisions
from screener.runs.confirmations import read_confirmation, store_confirmation
from screener.runs.facts import read_origin, store_origin
from screener.runs.failures import explained, explained_content, refusal
from screener.runs.migrations import migrated
from screener.runs.results import (
    read_by_file,
    read_decided,
    read_fits,
    read_in_order,
    read_outermost,
    read_points,
    read_reason,
    read_results,
    read_strips,
)
from screener.runs.scores import store_failure, store_scores
from screener.runs.view import read_view, store_view

if TYPE_CHECKING:
    from screener.records import FloatArray, IntArray


class RunFile:
    """An open run file. It belongs to the thread that opened it; other threads and programs open their own."""

    def __init__(self, path: Path, connection: sqlite3.Connection) -> None:
        self.path = path
        self._connection = connection
        self._ready_to_write = False
        with explained_content(path):
            origin = read_origin(connection)
        self.facts: TableFacts = origin.facts
        self.plan: Plan = origin.plan
        self.version: str = origin.version
        self.null_version: str = origin.null_version
        self.created: str = origin.created
        """UTC, ISO 8601."""

    @classmethod
    def create(cls, path: Path, facts: TableFacts, plan: Plan, *, version: str, null_version: str) -> Self:
        """A new run file, whole or not there at all; versions are those of the tool and of its null table.

        Raises: RunFileError when something of that name exists, or cannot be made there.
        """
        with explained("create", path):
            if os.path.lexists(path):
                raise _taken(path)
            orphans = sqlite.companions(path)
            draft = path.with_name(f".{secrets.token_hex(6)}.run-new")
            try:
                _lay_out(draft, facts, plan, (version, null_version))
                _remove_orphans(orphans, path)
                _move_to_new_name(draft, path)
            finally:
                draft.unlink(missing_ok=True)
        return cls.open(path)

    @classmethod
    def open(cls, path: Path, *, read_only: bool = False, patience: float = sqlite.PATIENCE) -> Self:
        """An existing run file; patience is how many seconds to wait whenever another program has locked it.

        Raises: RunFileError when it is missing, no run file, of another schema, damaged, or locked.
        """
        with explained_content(path, "open"):
            connection = sqlite.open_checked(path, migrated, read_only=read_only, patience=patience)
        try:
            return cls(path, connection)
        except BaseException:
            connection.close()
            raise

    @property
    def finished(self) -> bool:
        """Whether every span was tried, as of now: another program may be finishing it."""
        with explained_content(self.path):
            return bool(self._connection.execute("SELECT finished FROM run").fetchone()[0])

    def store(self, scores: BlockScores) -> None:
        """Keep a block; once this returns, it outlives the program."""
        with self._writing() as connection:
            store_scores(connection, scores, self.plan.positions)

    def store_failure(self, span: Span, message: str) -> None:
        """Keep why a block could not be scored; its channels are not scored, for this reason, until it is stored."""
        with self._writing() as connection:
            store_failure(connection, span, message)

    def finish(self) -> None:
        """Mark the run as finished, and leave one file unless somebody else is reading it: then the last one does."""
        with self._writing() as connection:
            connection.execute("UPDATE run SET finished = 1")
        with explained("write", self.path):
            sqlite.leave_wal(self._connection)
        self._ready_to_write = False

    def done(self) -> set[Span]:
        """The spans stored; a span that failed is not among them, so that a resumed run tries it again."""
        with explained_content(self.path):
            spans = self._connection.execute("SELECT first, stop FROM span WHERE failure IS NULL")
            return {Span(int(first), int(stop)) for first, stop in spans}

    def channels_done(self) -> set[int]:
        """The positions of the channels of those spans, which may overlap when runs of other cuts went on with it."""
        return {position for span in self.done() for position in range(span.first, span.stop)}

    def results(self) -> pl.DataFrame:
        """One row per channel tried so far, in table order: `position` and the columns of RESULT_COLUMNS."""
        with explained_content(self.path):
            return read_results(self._connection, self.plan)

    def fits(self, position: int) -> pl.DataFrame:
        """One row per family for the channel at this position: FIT_COLUMNS, in the order of the registry."""
        with explained_content(self.path):
            return read_fits(self._connection, position)

    def reason(self, position: int) -> str:
        """Why the channel at this position is not scored, whatever the family; empty where it is."""
        with explained_content(self.path):
            return read_reason(self._connection, position)

    def points(self, position: int) -> FloatArray:
        """The sorted readings kept of the channel, at `stats.points.kept_ranks(n)`; empty when not scored."""
        with explained_content(self.path):
            return read_points(self._connection, position)

    def in_order(self, position: int) -> FloatArray:
        """The readings kept of the channel in row order, for `stats.row_order.row_order`; empty when none are."""
        with explained_content(self.path):
            return read_in_order(self._connection, position)

    def by_file(self, position: int) -> FloatArray:
        """n, mean and standard deviation of the channel in each of `facts.files`; empty when they are not kept."""
        with explained_content(self.path):
            return read_by_file(self._connection, position, len(self.facts.files))

    def outermost(self, position: int) -> IntArray:
        """The rows (0-based) of the outermost readings of the channel, lowest first; empty when they are not kept."""
        with explained_content(self.path):
            return read_outermost(self._connection, position)

    def strips(self) -> pl.DataFrame:
        """One row per channel scored: `position` and `strip`, digits from the low to the high tail."""
        with explained_content(self.path):
            return read_strips(self._connection)

    def decisions(self) -> pl.DataFrame:
        """One row per channel that has a decision or a note: `position`, `decision`, `note`."""
        with explained_content(self.path):
            return read_decided(self._connection)

    def decide(self, positions: Sequence[int], decision: Decision | None) -> None:
        """Keep what was decided about these channels, None to take back any decision; in one act."""
        with self._writing() as connection:
            decisions.store_act(connection, positions, {"decision": decision})

    def annotate(self, positions: Sequence[int], note: str) -> None:
        """Keep a note on these channels, empty for none; in one act."""
        with self._writing() as connection:
            decisions.store_act(connection, positions, {"note": note})

    def undo(self) -> int:
        """Take back the last act; how many channels it was about, 0 when there is none."""
        with self._writing() as connection:
            return decisions.undo(connection)

    def redo(self) -> int:
        """Do again what was undone last; how many channels it is about, 0 when there is nothing."""
        with self._writing() as connection:
            return decisions.redo(connection)

    def confirmation(self, position: int) -> Confirmation | None:
        """What samples of the channel's own process said of its r; None when it was never confirmed."""
        with explained_content(self.path):
            return read_confirmation(self._connection, position)

    def store_confirmation(self, position: int, confirmation: Confirmation) -> None:
        """Keep it, in place of an earlier one of the channel."""
        with self._writing() as connection:
            store_confirmation(connection, position, confirmation)

    def view(self) -> dict[str, str]:
        """Where the user was, as last kept; anything may be missing."""
        with explained_content(self.path):
            return read_view(self._connection)

    def store_view(self, state: Mapping[str, str]) -> None:
        """Keep where the user is."""
        with self._writing() as connection:
            store_view(connection, state)

    def close(self) -> None:
        """Close it; whoever closes last leaves one file, also when the run is not finished."""
        self._connection.close()
        sqlite.settle(self.path)

    def __enter__(self) -> Self:
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, at: TracebackType | None) -> None:
        self.close()

    @contextmanager
    def _writing(self) -> Iterator[sqlite3.Connection]:
        """One transaction. The journal is chosen at the first one, so that a review leaves the file as it is."""
        with explained("write", self.path):
            if not self._ready_to_write:
                sqlite.use_wal(self._connection)
                self._ready_to_write = True
            with sqlite.transaction(self._connection):
                yield self._connection


def is_run_file(path: Path) -> bool:
    """Whether the file says that it is a run file, of any schema; false for what is missing or unreadable."""
    try:
        return path.is_file() and sqlite.application_id(path) == sqlite.APPLICATION_ID
    except (sqlite3.Error, OSError, RunFileError):
        return False


def _lay_out(draft: Path, facts: TableFacts, plan: Plan, versions: tuple[str, str]) -> None:
    draft.touch(exist_ok=False)
    connection = sqlite.connect(draft, "rw")
    try:
        connection.executescript(sqlite.schema())
        with sqlite.transaction(connection):
            store_origin(connection, facts, plan, versions)
    finally:
        connection.close()


def _remove_orphans(orphans: Mapping[Path, tuple[int, int]], path: Path) -> None:
    """Remove what a killed program left beside a run file that was then removed: SQLite would put it into the new one.

    Only what was there before the new file could have companions of its own.
    """
    for companion, identity in orphans.items():
        if not os.path.lexists(path) and sqlite.companions(path).get(companion) == identity:
            companion.unlink(missing_ok=True)


def _move_to_new_name(draft: Path, path: Path) -> None:
    """A hard link never replaces what is there; where the file system has none, look once more and rename."""
    try:
        path.hardlink_to(draft)
    except FileExistsError:
        raise _taken(path) from None
    except OSError:
        if os.path.lexists(path):
            raise _taken(path) from None
        draft.rename(path)


def _taken(path: Path) -> RunFileError:
    if path.is_dir():
        return refusal("create", path, "it is a folder", "Give the name of a file in it with -o.")
    return refusal("create", path, "something of that name exists", "Give another name with -o, or remove it.")
