"""What the user names: one file, several files of one layout, standard input, or an address."""

import re
import sys
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from screener.errors import TableError
from screener.tables.spool import Spool

STDIN = Path("-")
_ADDRESS = re.compile(r"^(https?|s3|s3a|gs|gcs|az|abfss?|hf):/+(?=[^/])")
_GLOB = re.compile(r"[*?\[]")
_CHUNK_BYTES = 1 << 20


@dataclass(frozen=True, slots=True)
class Source:
    """Where a table is read from."""

    path: Path
    """As the user is shown it."""
    files: tuple[Path, ...]
    """The files to read, in order."""
    address: str = ""
    """Where the table is, when it is on no disk of this machine."""
    spool: Spool | None = None
    """What keeps the files when they are copies."""


def source_named(path: Path) -> Source:
    """What a path given by the user stands for.

    Raises:
        TableError: no file has a name of this pattern, or standard input cannot be read.
    """
    if path == STDIN:
        spool = Spool()
        return Source(Path("stdin"), (spool.keep(_standard_input()),), spool=spool)
    if address := address_of(path):
        return Source(path, (), address)
    if _GLOB.search(path.name) and not path.exists():
        files = tuple(sorted((one for one in path.parent.glob(path.name) if one.is_file()), key=_in_counting_order))
        if not files:
            raise TableError(f"Couldn't read {str(path)!r}: there is no file of that name or pattern.")
        return Source(path, files)
    return Source(path, (path,))


def address_of(path: Path) -> str:
    """The address that a path was made from, which lost a slash in it; empty when it is none."""
    found = _ADDRESS.match(str(path))
    return _ADDRESS.sub(rf"{found[1]}://", str(path)) if found else ""


def _in_counting_order(path: Path) -> list[tuple[int, str]]:
    """`run_2` before `run_10`."""
    parts = re.findall(r"\d+|\D+", path.name)
    return [(int(part), "") if part.isdigit() else (-1, part) for part in parts]


def _standard_input() -> Iterator[bytes]:
    if sys.stdin is None or sys.stdin.isatty():
        raise TableError(
            "Couldn't read '-': nothing is sent to standard input. Send a table, as in `... | screener -`."
        )
    while piece := sys.stdin.buffer.read(_CHUNK_BYTES):
        yield piece
