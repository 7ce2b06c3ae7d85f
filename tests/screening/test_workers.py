"""Where blocks are scored."""

import os
import threading
import time

import pytest
from threadpoolctl import threadpool_info

from screener.screening.workers import NICENESS, blocks_at_once, thread_workers, usable_cores


def test_matrix_products_get_one_thread_while_blocks_are_scored() -> None:
    def threads() -> list[int]:
        return [library["num_threads"] for library in threadpool_info() if library["user_api"] == "blas"]

    before = threads()
    with thread_workers(2) as executor:
        assert set(executor.submit(threads).result()) == {1}
    assert threads() == before


def test_workers_give_way_to_the_thread_that_draws() -> None:
    def niceness() -> int:
        return os.getpriority(os.PRIO_PROCESS, threading.get_native_id())

    mine = niceness()
    with thread_workers(1) as executor:
        assert executor.submit(niceness).result() == NICENESS
    assert niceness() == mine


def test_leaving_does_not_wait_for_the_block_in_hand_and_drops_the_rest() -> None:
    release, began = threading.Event(), threading.Event()

    def block_in_hand() -> None:
        began.set()
        release.wait()

    with thread_workers(1) as executor:
        first = executor.submit(block_in_hand)
        second = executor.submit(time.time)
        began.wait()
    try:
        assert not first.done()
        assert second.cancelled()
    finally:
        release.set()
    first.result()


def test_only_the_cores_of_this_process_count() -> None:
    assert 1 <= usable_cores() <= (os.cpu_count() or 1)
    if hasattr(os, "sched_setaffinity"):
        allowed = os.sched_getaffinity(0)
        os.sched_setaffinity(0, {min(allowed)})
        try:
            assert usable_cores() == 1
        finally:
            os.sched_setaffinity(0, allowed)


@pytest.mark.parametrize(
    ("jobs", "block_bytes", "memory_bytes", "blocks"),
    [
        (2, 4_000_000, 8 << 30, 4),
        (8, 4_000_000, 8 << 30, 10),
        (8, 40_000_000, 8 << 30, 2),
        (8, 400_000_000, 8 << 30, 1),
        (64, 4_000_000, 8 << 30, 20),
        (64, 4_000_000, 512 << 30, 66),
    ],
)
def test_so_many_blocks_are_handed_out_as_workers_need_and_memory_allows(
    jobs: int, block_bytes: int, memory_bytes: int, blocks: int
) -> None:
    assert blocks_at_once(jobs, block_bytes, memory_bytes) == blocks
