"""A fingerprint of a file's content.

Up to `WHOLE_BYTES` every byte counts. A larger file is known by its size, its time of change and 64 pieces of 256 kB
spread evenly over it, so that a large table is not read twice; an edit between those pieces
is noticed by the time of change.
"""

import hashlib
from collections.abc import Sequence
from pathlib import Path

WHOLE_BYTES = 64 << 20
_PIECES = 64
_PIECE_BYTES = 1 << 20
_SAMPLED_BYTES = 1 << 18


def fingerprint(path: Path, *, size: int | None = None, whole_bytes: int = WHOLE_BYTES) -> str:
    """The fingerprint of the first `size` bytes, led by the way it was made: `whole:` or `sampled:`."""
    size = path.stat().st_size if size is None else size
    if size > whole_bytes:
        return f"sampled:{_sampled(path, size)}"
    return f"whole:{_whole(path, size)}"


def joined(prints: Sequence[str]) -> str:
    """One fingerprint of several contents in their order."""
    return prints[0] if len(prints) == 1 else f"several:{hashlib.sha256(' '.join(prints).encode()).hexdigest()}"


def _whole(path: Path, size: int) -> str:
    digest = hashlib.sha256()
    with path.open("rb") as file:
        while size > 0 and (piece := file.read(min(size, _PIECE_BYTES))):
            digest.update(piece)
            size -= len(piece)
    return digest.hexdigest()


def _sampled(path: Path, size: int) -> str:
    digest = hashlib.sha256()
    digest.update(f"{size} {path.stat().st_mtime_ns} ".encode())
    last = max(0, size - _SAMPLED_BYTES)
    with path.open("rb") as file:
        for piece in range(_PIECES):
            file.seek(last * piece // (_PIECES - 1))
            digest.update(file.read(_SAMPLED_BYTES))
    return digest.hexdigest()
