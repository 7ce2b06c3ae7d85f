"""Building a null table node by node: in parallel, seeded, and resumable after a stop."""

from collections.abc import Iterator
from concurrent.futures import Future, ThreadPoolExecutor, as_completed
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from threadpoolctl import threadpool_limits

from screener.stats.null.grid import Node
from screener.stats.null.packing import NULL_VERSION, packed, simulated_node, table_from_nodes
from screener.stats.null.table import NullTable


@dataclass(frozen=True, slots=True)
class BuildPlan:
    """What to simulate, and where the finished nodes are kept until the table is whole."""

    rule: str
    samples: dict[int, int]
    """Samples to simulate, by n."""
    seed: int
    folder: Path


@dataclass(frozen=True, slots=True)
class NodeBuilt:
    """One n is simulated, or was found finished."""

    n: int
    done: int
    total: int
    work_done: float
    """Share of all readings that are to be simulated, 0 to 1."""


def build(plan: BuildPlan, jobs: int) -> Iterator[NodeBuilt]:
    """Simulate what is missing, largest n first; stopping the iteration keeps every finished node."""
    plan.folder.mkdir(parents=True, exist_ok=True)
    work = {n: n * samples for n, samples in plan.samples.items()}
    missing = [n for n in plan.samples if not node_path(plan, n).exists()]
    done_work = sum(work.values()) - sum(work[n] for n in missing)
    with threadpool_limits(1, "blas"), ThreadPoolExecutor(jobs) as pool:
        running: dict[Future[None], int] = {
            pool.submit(_simulate, plan, n): n for n in sorted(missing, key=lambda n: -work[n])
        }
        try:
            for count, future in enumerate(as_completed(running), start=len(work) - len(missing) + 1):
                future.result()
                done_work += work[running[future]]
                yield NodeBuilt(running[future], count, len(work), done_work / sum(work.values()))
        finally:
            pool.shutdown(wait=False, cancel_futures=True)


def built_table(plan: BuildPlan) -> NullTable:
    """The table of a finished build."""
    sizes = sorted(plan.samples)
    nodes = {n: _loaded(node_path(plan, n)) for n in sizes}
    return table_from_nodes(nodes, plan.rule, [plan.samples[n] for n in sizes])


def write_table(table: NullTable, path: Path) -> None:
    """Write the table as a compressed file, whole or not at all."""
    partial = path.with_name(path.name + ".partial")
    with partial.open("wb") as stream:
        np.savez_compressed(stream, allow_pickle=False, **packed(table))
    partial.replace(path)


def node_path(plan: BuildPlan, n: int) -> Path:
    """Where the node of n is kept: its name holds everything that its content depends on."""
    name = f"{plan.rule}-version{NULL_VERSION}-seed{plan.seed}-n{n}-samples{plan.samples[n]}.npz"
    return plan.folder / name


def _simulate(plan: BuildPlan, n: int) -> None:
    node = simulated_node(n, plan.rule, plan.samples[n], plan.seed)
    path = node_path(plan, n)
    partial = path.with_name(path.name + ".partial")
    with partial.open("wb") as stream:
        np.savez(
            stream,
            log_gap=node.log_gap,
            tail_shape=node.tail_shape,
            tail_scale=node.tail_scale,
            floor=np.array(node.floor),
        )
    partial.replace(path)


def _loaded(path: Path) -> Node:
    with np.load(path) as arrays:
        return Node(arrays["log_gap"], arrays["tail_shape"], arrays["tail_scale"], float(arrays["floor"]))
