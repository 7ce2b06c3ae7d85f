"""Temporary files for what does not fit in memory or cannot be read twice.

They live in a folder of the user's own under the system's temporary folder (TMPDIR), one folder a table, and go when
the table does. A folder that a killed program left behind is known by its lock, which nobody holds, and is removed
when the next table is opened.
"""

import errno
import fcntl
import os
import shutil
import tempfile
import time
import weakref
from collections.abc import Iterable, Iterator
from contextlib import contextmanager, suppress
from pathlib import Path

from screener.errors import TableError

_LOCK = "lock"
_SETTLING_SECONDS = 60.0
"""A folder younger than this may be about to be locked."""
_FULL = (errno.ENOSPC, errno.EDQUOT, errno.EFBIG)
_FULL_SAID = ("No space left", "quota exceeded", "File too large", "os error 28", "os error 27")


class Spool:
    """A folder that is removed with this object, at the end of the program, or by the next one."""

    def __init__(self) -> None:
        home = _home()
        with roomy(home / "new"):
            self.folder = Path(tempfile.mkdtemp(dir=home))
            lock = os.open(self.folder / _LOCK, os.O_CREAT | os.O_RDWR, 0o600)
        fcntl.flock(lock, fcntl.LOCK_EX)
        self.remove = weakref.finalize(self, _remove, self.folder, lock)

    def keep(self, pieces: Iterable[bytes]) -> Path:
        """The pieces in a file of this folder.

        Raises:
            TableError: there is no room for them.
        """
        path = self.folder / f"part{len(list(self.folder.iterdir()))}"
        with roomy(self.folder), path.open("wb") as file:
            file.writelines(pieces)
        return path


@contextmanager
def roomy(folder: Path) -> Iterator[None]:
    """Turns the failure to write for want of room into a sentence.

    Raises:
        TableError: the disk is full.
    """
    try:
        yield
    except OSError as error:
        if error.errno not in _FULL and not _says_full(error):
            raise
        raise _no_room(folder) from error
    except Exception as error:
        if not _says_full(error):
            raise
        raise _no_room(folder) from error


def sweep() -> None:
    """Remove what killed programs left behind, if anything."""
    with suppress(OSError):
        home = _place()
        if home.is_symlink() or home.stat().st_uid != os.getuid():
            return
        for folder in home.iterdir():
            with suppress(OSError):
                _remove_if_left(folder)


def _remove_if_left(folder: Path) -> None:
    try:
        lock = os.open(folder / _LOCK, os.O_RDWR)
    except FileNotFoundError:
        if time.time() - folder.stat().st_mtime > _SETTLING_SECONDS:
            shutil.rmtree(folder, ignore_errors=True)
        return
    try:
        fcntl.flock(lock, fcntl.LOCK_EX | fcntl.LOCK_NB)
        shutil.rmtree(folder, ignore_errors=True)
    finally:
        os.close(lock)


def _place() -> Path:
    return Path(tempfile.gettempdir()) / f"screener-{os.getuid()}"


def _home() -> Path:
    """The folder of this user's spools; only the user may enter it."""
    try:
        home = _place()
    except OSError as error:
        raise TableError("Couldn't keep the table: no folder takes temporary files. Set TMPDIR.") from error
    try:
        home.mkdir(mode=0o700, exist_ok=True)
        mine = home.stat().st_uid == os.getuid()
    except OSError as error:
        raise TableError(f"Couldn't make temporary folder {str(home)!r}: {error.strerror}. Set TMPDIR.") from error
    if not mine or home.is_symlink():
        raise TableError(f"Couldn't use temporary folder {str(home)!r}: it belongs to another user. Set TMPDIR.")
    return home


def _remove(folder: Path, lock: int) -> None:
    shutil.rmtree(folder, ignore_errors=True)
    with suppress(OSError):
        os.close(lock)


def _says_full(error: BaseException) -> bool:
    return any(words in str(error) for words in _FULL_SAID)


def _no_room(folder: Path) -> TableError:
    return TableError(
        f"Couldn't keep the table in temporary folder {str(folder.parent)!r}: the disk is full. "
        "Make room, or set TMPDIR to a folder on a larger disk."
    )
