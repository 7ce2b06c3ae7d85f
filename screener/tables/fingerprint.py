"""A fingerprint of a file's content.

Up to `WHOLE_BYTES` every byte counts. A larger file is known by its size, its time of change and 64 pieces of 1 MB
spread evenly over it, so that a table of many gigabytes is not read twice; an edit between those pieces
is noticed by the time of change.
"""

import hashlib
from pathlib import Path

WHOLE_BYTES = 256 << 20
_PIECES = 64
_PIECE_BYTES = 1 << 20


def fingerprint(path: Path, *, whole_bytes: int = WHOLE_BYTES) -> str:
    """The fingerprint, led by the way it was made: `whole:` or `sampled:`."""
    size = path.stat().st_size
    if size > whole_bytes:
        return f"sampled:{_sampled(path, size)}"
    return f"whole:{_whole(path)}"


def _whole(path: Path) -> str:
    digest = hashlib.sha256()
    with path.open("rb") as file:
        while piece := file.read(_PIECE_BYTES):
            digest.update(piece)
    return digest.hexdigest()


def _sampled(path: Path, size: int) -> str:
    digest = hashlib.sha256()
    digest.update(f"{size} {path.stat().st_mtime_ns} ".encode())
    last = max(0, size - _PIECE_BYTES)
    with path.open("rb") as file:
        for piece in range(_PIECES):
            file.seek(last * piece // (_PIECES - 1))
            digest.update(file.read(_PIECE_BYTES))
    return digest.hexdigest()
