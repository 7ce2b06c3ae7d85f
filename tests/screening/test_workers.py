"""Where blocks are scored."""

import os
import threading
import time
from pathlib import Path

import pytest
from threadpoolctl import threadpool_info

from screener.records import Channel, TableFacts
from screener.screening.workers import (
    NICENESS,
    blocks_at_once,
    bytes_at_work,
    most_in_block,
    thread_workers,
    usable_cores,
)
from screener.tables import block_bytes, spans


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


@pytest.mark.parametrize("memory_bytes", [4 << 30, 512 << 30])
@pytest.mark.parametrize("jobs", [1, 2, 8, 64])
@pytest.mark.parametrize("rows", [100, 10_000, 1_000_000, 50_000_000])
def test_blocks_at_work_keep_within_a_budget_and_every_worker_has_one_where_that_can_be(
    rows: int, jobs: int, memory_bytes: int
) -> None:
    facts = TableFacts(Path("t"), "", rows, tuple(Channel(k, f"c{k}") for k in range(900)), (), "")
    budget = bytes_at_work(memory_bytes)
    cut = spans(facts, most_bytes=most_in_block(jobs, budget))
    each = block_bytes(facts, cut)
    ahead = blocks_at_once(jobs, each, budget)
    assert budget == {4 << 30: 80 << 20, 512 << 30: (512 << 30) // 1000}[memory_bytes]
    assert ahead * each <= budget or ahead == 1
    assert ahead >= jobs or (ahead + 1) * 8 * rows > budget
    assert each <= 16_000_000 or each == 8 * rows
