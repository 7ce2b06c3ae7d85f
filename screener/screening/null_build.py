"""Building null tables part by part: in parallel, seeded, and resumable after a stop."""

import os
import threading
import zipfile
from collections.abc import Iterator, Mapping
from concurrent.futures import Future, ThreadPoolExecutor, as_completed
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray
from threadpoolctl import threadpool_limits

from screener.stats.null.packing import Arrays, Task


@dataclass(frozen=True, slots=True)
class PartBuilt:
    """One part is simulated."""

    name: str
    done: int
    total: int
    work_done: float
    """Share of all readings that are to be simulated, 0 to 1."""


def build(tasks: Mapping[str, Task], folder: Path, jobs: int) -> Iterator[PartBuilt]:
    """Simulate what the folder does not hold, costliest first; stopping the iteration keeps every finished part."""
    folder.mkdir(parents=True, exist_ok=True)
    missing = [task for task in tasks.values() if _stored(task, folder) is None]
    work = sum(task.readings for task in tasks.values())
    done = work - sum(task.readings for task in missing)
    with threadpool_limits(1, "blas"):
        pool = ThreadPoolExecutor(jobs)
        try:
            costliest_first = sorted(missing, key=lambda task: -task.readings)
            running: dict[Future[None], Task] = {pool.submit(_simulate, task, folder): task for task in costliest_first}
            for count, future in enumerate(as_completed(running), start=len(tasks) - len(missing) + 1):
                future.result()
                done += running[future].readings
                yield PartBuilt(running[future].name, count, len(tasks), done / work)
        finally:
            pool.shutdown(wait=False, cancel_futures=True)


def parts(tasks: Mapping[str, Task], folder: Path) -> dict[str, Arrays]:
    """The parts of a finished build, by key."""
    found = {key: _stored(task, folder) for key, task in tasks.items()}
    return {key: part for key, part in found.items() if part is not None}


def write_arrays(arrays: Mapping[str, NDArray[np.generic]], path: Path) -> None:
    """Write arrays as a compressed file, whole or not at all."""
    path.parent.mkdir(parents=True, exist_ok=True)
    partial = path.with_name(f"{path.name}.{os.getpid()}-{threading.get_native_id()}.partial")
    with partial.open("wb") as stream:
        np.savez_compressed(stream, allow_pickle=False, **dict(arrays))
    partial.replace(path)


def _simulate(task: Task, folder: Path) -> None:
    write_arrays(task.make(), _path(task, folder))


def _path(task: Task, folder: Path) -> Path:
    return folder / f"{task.name}.npz"


def _stored(task: Task, folder: Path) -> Arrays | None:
    """A finished part; a damaged one counts as missing."""
    try:
        with _path(task, folder).open("rb") as stream, np.load(stream) as arrays:
            return dict(arrays)
    except (OSError, ValueError, EOFError, zipfile.BadZipFile):
        return None
