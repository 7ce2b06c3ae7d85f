"""What is said when a run file cannot be used: one sentence each, with the way out."""

import errno
import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from polars.exceptions import PolarsError

from screener.errors import RunFileError
from screener.runs.text import visible

_KEPT = "What was scored so far is kept."
_FULL = ("the disk is full", f"Free some space, then run the same command again. {_KEPT}")
_FORBIDDEN = ("you may not write there", "Give another place, or work on a copy in a folder of your own.")

_BY_SQLITE_CODE = {
    sqlite3.SQLITE_BUSY: ("another program keeps it locked", "Wait for that program or close it, then try again."),
    sqlite3.SQLITE_LOCKED: ("another program keeps it locked", "Wait for that program or close it, then try again."),
    sqlite3.SQLITE_FULL: _FULL,
    sqlite3.SQLITE_IOERR: (
        "the disk failed or has no room left",
        f"Check the disk, then run the command again. {_KEPT}",
    ),
    sqlite3.SQLITE_READONLY: _FORBIDDEN,
    sqlite3.SQLITE_PERM: _FORBIDDEN,
    sqlite3.SQLITE_CANTOPEN: ("it or its folder can't be opened", "Check the name and the permissions of both."),
}

_BY_ERRNO = {
    errno.EACCES: _FORBIDDEN,
    errno.EPERM: _FORBIDDEN,
    errno.EROFS: _FORBIDDEN,
    errno.ENOSPC: _FULL,
    errno.EDQUOT: _FULL,
    errno.EFBIG: _FULL,
    errno.ENOENT: ("there is no such folder", "Make the folder, or give another place."),
    errno.ENOTDIR: ("there is no such folder", "Make the folder, or give another place."),
    errno.ENAMETOOLONG: ("the name is too long", "Give a shorter name."),
}


def refusal(action: str, path: Path, why: str, way_out: str) -> RunFileError:
    """The error that says what could not be done, to which run file, why, and the way out."""
    return RunFileError(f"Couldn't {action} run file {str(path)!r}: {why}. {way_out}")


def damage(action: str, path: Path, detail: object) -> RunFileError:
    """The error for a run file whose content is not what this program writes."""
    why = f"it is damaged ({visible(str(detail))})"
    return refusal(action, path, why, "Take a copy from before, or remove it and run `screener score` again.")


def why_refused(error: OSError) -> tuple[str, str]:
    """Why the operating system refused, and the way out."""
    told = _BY_ERRNO.get(error.errno or 0)
    return told or (error.strerror or str(error), "Give another place.")


@contextmanager
def explained(action: str, path: Path) -> Iterator[None]:
    """Turn failures of the file, the disk or the store into a RunFileError; our own mistakes pass."""
    try:
        yield
    except (sqlite3.ProgrammingError, sqlite3.InterfaceError):
        raise
    except sqlite3.Error as error:
        told = _BY_SQLITE_CODE.get(_primary_code(error))
        raise (refusal(action, path, *told) if told else damage(action, path, error)) from error
    except OSError as error:
        raise refusal(action, path, *why_refused(error)) from error


@contextmanager
def explained_content(path: Path, action: str = "read") -> Iterator[None]:
    """Like `explained`, for reading: values of the wrong kind are the file's fault too."""
    try:
        with explained(action, path):
            yield
    except (ValueError, TypeError, KeyError, OverflowError, RecursionError, PolarsError) as error:
        raise damage(action, path, error) from error


def _primary_code(error: sqlite3.Error) -> int:
    """Extended result codes keep the primary one in the low byte; errors of the Python layer have none."""
    code: int = getattr(error, "sqlite_errorcode", 0)
    return code & 0xFF
