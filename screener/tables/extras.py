"""Libraries that only some formats need: imported when such a file is met, named with their extra when they lack."""

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from screener.errors import ScreenerError, TableError


@contextmanager
def installed(extra: str, path: Path) -> Iterator[None]:
    """Turns a failing import of the library that reads a file into one sentence with its extra.

    Raises:
        TableError: the library is not installed.
    """
    try:
        yield
    except ModuleNotFoundError as error:
        raise TableError(
            f"Couldn't read {str(path)!r}: that takes {error.name}, which is not installed. "
            f"Install it with: pip install 'screener[{extra}]'"
        ) from error


@contextmanager
def understood(path: Path, kind: str) -> Iterator[None]:
    """Turns whatever a library raises about a damaged file into one sentence; such libraries raise anything.

    Raises:
        TableError: it raised.
    """
    try:
        yield
    except ScreenerError:
        raise
    except Exception as error:
        why = "the file is damaged, cut off or of an unknown version"
        raise TableError(f"Couldn't read {str(path)!r} as {kind}: {why}.") from error
