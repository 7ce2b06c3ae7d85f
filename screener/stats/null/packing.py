"""A null table as plain arrays, for storing, and the table that the package carries."""

from collections.abc import Mapping, Sequence
from functools import cache
from importlib import resources

import numpy as np
from numpy.typing import NDArray

from screener.stats.families import FAMILIES, Family
from screener.stats.null.grid import Node, node_from_samples
from screener.stats.null.simulate import simulated_log_gap
from screener.stats.null.table import NullTable

NULL_VERSION = "1"
"""Raised when the statistic, the grid or the way of simulating changes, so that older tables are not believed."""

SHIPPED = "filliben.npz"


def tabled_families() -> tuple[Family, ...]:
    """The families with a null distribution of their own, registry order."""
    return tuple(family for family in FAMILIES if not family.null_of)


def simulated_node(n: int, rule: str, samples: int, seed: int) -> Node:
    """The null distributions of all tabled families at n; the same seed gives the same node, whatever else is built."""
    rng = np.random.default_rng([seed, n])
    return node_from_samples(simulated_log_gap(tabled_families(), n, rule, samples, rng))


def table_from_nodes(nodes: Mapping[int, Node], rule: str, samples: Sequence[int]) -> NullTable:
    """One table of the nodes, by n."""
    sizes = sorted(nodes)
    ordered = [nodes[n] for n in sizes]
    return NullTable(
        families=tuple(family.name for family in tabled_families()),
        rule=rule,
        sizes=np.array(sizes, dtype=np.int64),
        log_gap=np.stack([node.log_gap for node in ordered], axis=1),
        tail_shape=np.stack([node.tail_shape for node in ordered], axis=1),
        tail_scale=np.stack([node.tail_scale for node in ordered], axis=1),
        floor=np.array([node.floor for node in ordered]),
        samples=np.array(samples, dtype=np.int64),
        version=NULL_VERSION,
    )


def packed(table: NullTable) -> dict[str, NDArray[np.generic]]:
    """The table as named arrays; single precision holds r to 1e-7 of 1 - r."""
    return {
        "families": np.array(table.families),
        "rule": np.array(table.rule),
        "sizes": table.sizes,
        "log_gap": table.log_gap.astype(np.float32),
        "tail_shape": table.tail_shape.astype(np.float32),
        "tail_scale": table.tail_scale.astype(np.float32),
        "floor": table.floor,
        "samples": table.samples,
        "version": np.array(table.version),
    }


def unpacked(arrays: Mapping[str, NDArray[np.generic]]) -> NullTable:
    """The table that `packed` gave."""
    return NullTable(
        families=tuple(str(name) for name in arrays["families"]),
        rule=str(arrays["rule"]),
        sizes=arrays["sizes"].astype(np.int64),
        log_gap=np.minimum.accumulate(arrays["log_gap"].astype(np.float64), axis=2),
        tail_shape=arrays["tail_shape"].astype(np.float64),
        tail_scale=arrays["tail_scale"].astype(np.float64),
        floor=arrays["floor"].astype(np.float64),
        samples=arrays["samples"].astype(np.int64),
        version=str(arrays["version"]),
    )


@cache
def shipped_table() -> NullTable:
    """The table that the package carries, for filliben positions."""
    with (resources.files("screener.stats.null") / SHIPPED).open("rb") as stream, np.load(stream) as arrays:
        return unpacked(arrays)
