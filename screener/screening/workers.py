"""Where blocks are scored: threads that give way to the screen, each with one BLAS thread."""

import os
import threading
from collections.abc import Iterator
from concurrent.futures import Executor, ThreadPoolExecutor
from contextlib import contextmanager

from threadpoolctl import threadpool_limits

NICENESS = 10
"""Workers yield to the thread that draws the screen."""
WAITING = 2
"""Blocks handed out beyond one for each worker, so that none waits for the next."""
LARGEST_BLOCK = 16_000_000
AT_WORK_BYTES = 80 << 20
AT_WORK_SHARE = 1_000
"""Readings of all blocks at work: so many bytes, or this part of the machine's memory where that is more."""


@contextmanager
def thread_workers(jobs: int) -> Iterator[Executor]:
    """A pool of `jobs` threads; leaving it drops what has not started and does not wait for what has."""
    with threadpool_limits(1, "blas"):
        pool = ThreadPoolExecutor(jobs, thread_name_prefix="score", initializer=_give_way)
        try:
            yield pool
        finally:
            pool.shutdown(wait=False, cancel_futures=True)


def bytes_at_work(memory_bytes: int) -> int:
    """The most that the readings of all blocks at work may take together, in a machine with so much memory.

    Scoring takes some five to seven times the readings of a block, so this bounds what the workers take.
    """
    return max(AT_WORK_BYTES, memory_bytes // AT_WORK_SHARE)


def most_in_block(jobs: int, budget: int) -> int:
    """The bytes of readings in a block that leave every worker its own; a block has at least one channel."""
    return min(LARGEST_BLOCK, budget // (jobs + WAITING))


def blocks_at_once(jobs: int, block_bytes: int, budget: int) -> int:
    """How many blocks may be handed out: enough for every worker, as long as their readings keep within the budget."""
    return max(1, min(jobs + WAITING, budget // max(1, block_bytes)))


def usable_cores() -> int:
    """Cores this process may use."""
    return len(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else (os.cpu_count() or 1)


def _give_way() -> None:
    if hasattr(os, "setpriority"):
        os.setpriority(os.PRIO_PROCESS, threading.get_native_id(), NICENESS)
