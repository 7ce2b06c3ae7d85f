"""What several tests of the run file need."""

import os
import resource
import tempfile
from collections.abc import Callable, Iterator
from contextlib import AbstractContextManager, contextmanager
from pathlib import Path

import pytest

NOBODY = 65534


@pytest.fixture
def shared_folder() -> Iterator[Path]:
    """A folder that every user may enter, which the folders of pytest are not."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        folder.chmod(0o755)
        yield folder
        folder.chmod(0o755)


@pytest.fixture
def ordinary_user() -> Callable[[], AbstractContextManager[None]]:
    """A context in which permissions count also for the superuser, to whom none apply."""

    @contextmanager
    def lowered() -> Iterator[None]:
        before = os.geteuid()
        if before == 0:
            os.seteuid(NOBODY)
        try:
            yield
        finally:
            os.seteuid(before)

    return lowered


@pytest.fixture
def file_size_limit() -> Callable[[int], AbstractContextManager[None]]:
    """A context in which no file may grow beyond so many bytes, as on a disk that has no more."""

    @contextmanager
    def limited(size: int) -> Iterator[None]:
        soft, hard = resource.getrlimit(resource.RLIMIT_FSIZE)
        resource.setrlimit(resource.RLIMIT_FSIZE, (size, hard))
        try:
            yield
        finally:
            resource.setrlimit(resource.RLIMIT_FSIZE, (soft, hard))

    return limited
