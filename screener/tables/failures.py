"""What the reading libraries raise about a file, as one sentence."""

import csv
import zlib
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import polars as pl

from screener.errors import PlanError, TableError
from screener.tables.formats import Kind
from screener.tables.names import visible

ADDRESS = "an address"


@contextmanager
def readable(path: Path | str, what: str) -> Iterator[None]:
    """Turns what the reading libraries raise about a file, or an address, into one sentence.

    Raises:
        TableError: something inside could not read the file.
    """
    try:
        yield
    except (EOFError, zlib.error) as error:
        raise TableError(f"Couldn't read {str(path)!r}: the file is damaged or cut off.") from error
    except (OSError, csv.Error, pl.exceptions.PolarsError, pl.exceptions.PanicException) as error:
        raise TableError(f"Couldn't read {str(path)!r} as {what}: {_said(error, what)}") from error


@contextmanager
def named(copy: Path, shown: str) -> Iterator[None]:
    """Turns the name of a temporary copy, in sentences about it, into that of what was copied.

    Raises:
        TableError, PlanError: something inside did, about the copy.
    """
    try:
        yield
    except (TableError, PlanError) as error:
        raise type(error)(str(error).replace(repr(str(copy)), shown).replace(repr(copy.name), shown)) from error


def _said(error: BaseException, what: str) -> str:
    if what.startswith(Kind.NDJSON) and not isinstance(error, OSError):
        return "every line must be one JSON object, and its values numbers, texts or null."
    first_line = visible((str(error).strip() or type(error).__name__).splitlines()[0])[:200].rstrip(".")
    if what == ADDRESS:
        return f"{first_line}. Check the address and the network."
    if '`"' in first_line:
        return "a quotation mark is not closed. Mend the line or remove the mark."
    return f"{first_line}. The file may be damaged or cut off; write it again."
