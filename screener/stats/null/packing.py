"""Simulating null tables part by part, and storing them as plain arrays."""

from bisect import bisect_left
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cache, partial
from importlib import resources

import numpy as np
from numpy.typing import NDArray

from screener.stats.families import FAMILIES, Family, family_named
from screener.stats.null import grid, matched, shaped
from screener.stats.null.matched import MatchedTable
from screener.stats.null.nulls import Nulls
from screener.stats.null.shaped import ShapedTable
from screener.stats.null.simulate import simulated_log_gap
from screener.stats.null.table import NullTable

NULL_VERSION = "3"
"""Raised when the statistic, a grid or the way of simulating changes, so that older tables are not believed."""

SHIPPED = "filliben.npz"

Arrays = Mapping[str, NDArray[np.generic]]

MATCHED = "matched/"

PARTS = ("log_gap", "tail_shape", "tail_scale", "floor", "samples")


@dataclass(frozen=True, slots=True)
class Task:
    """One part of a build: everything it makes depends on its name alone."""

    name: str
    readings: int
    """Readings to simulate, the measure of its cost."""
    make: Callable[[], Arrays]


def plain_families() -> tuple[Family, ...]:
    """The families without shapes that have a null distribution of their own, registry order."""
    return tuple(family for family in FAMILIES if not family.null_of and not family.shape_count)


def shaped_families() -> tuple[Family, ...]:
    """The families with shapes, registry order."""
    return tuple(family for family in FAMILIES if family.shape_count)


def tasks(rule: str, seed: int, share: float, largest: int | None = None) -> dict[str, Task]:
    """The parts of a table by key, in order of n; a share below 1 simulates less and is less certain.

    With `largest`, only the sizes that are needed for channels of up to that many readings.
    """
    made: dict[str, Task] = {}
    stem = f"{rule}-version{NULL_VERSION}-seed{seed}"
    for n in needed(grid.SIZES, largest):
        samples = max(2000, int(share * grid.samples_at(n)))
        name = f"{stem}-plain-n{n}-samples{samples}"
        made[_plain_key(n)] = Task(name, n * samples, partial(_plain_part, n, rule, samples, seed))
    for family in shaped_families():
        for n in needed(shaped.SIZES, largest):
            samples = max(4000, int(share * shaped.samples_at(n, family.shape_count)))
            name = f"{stem}-{family.name.replace(' ', '_')}-n{n}-samples{samples}"
            make = partial(_shaped_part, family.name, n, rule, samples, seed)
            made[_shaped_key(family, n)] = Task(name, (n + 200) * samples, make)
    return made


def matched_tasks(rule: str, seed: int, share: float) -> dict[str, Task]:
    """The parts of the matched table of the normal family, by key; a share below 1 simulates less."""
    made: dict[str, Task] = {}
    for n in matched.SIZES:
        for place, coefficient in enumerate(matched.COEFFICIENTS):
            samples = max(1000, int(share * matched.samples_at(n)))
            name = f"{rule}-version{NULL_VERSION}-seed{seed}-matched-n{n}-ar{coefficient}-samples{samples}"
            work = n * samples * (1 + len(matched.STEPS)) // 4
            make = partial(_matched_part, n, coefficient, rule, samples, seed)
            made[f"{MATCHED}{n}/{place}"] = Task(name, work, make)
    return made


def _matched_part(n: int, coefficient: float, rule: str, samples: int, seed: int) -> Arrays:
    rng = np.random.default_rng([seed, n, int(1000 * coefficient)])
    return {"log_gap": matched.simulated_node(n, coefficient, rule, samples, rng)}


def needed(sizes: tuple[int, ...], largest: int | None) -> tuple[int, ...]:
    """The tabled sizes up to the first that reaches `largest`, and no fewer than interpolation takes."""
    if largest is None:
        return sizes
    return sizes[: max(4, bisect_left(sizes, largest) + 1)]


def _plain_key(n: int) -> str:
    return f"plain/{n}"


def _shaped_key(family: Family, n: int) -> str:
    return f"{family.name}/{n}"


def _plain_part(n: int, rule: str, samples: int, seed: int) -> Arrays:
    gaps = simulated_log_gap(plain_families(), n, rule, samples, np.random.default_rng([seed, n]))
    node = grid.node_from_samples(gaps)
    values = (node.log_gap, node.tail_shape, node.tail_scale, np.array(node.floor), np.array(samples))
    return dict(zip(PARTS, values, strict=True))


def _shaped_part(name: str, n: int, rule: str, samples: int, seed: int) -> Arrays:
    family = family_named(name)
    place = [other.name for other in FAMILIES].index(name)
    rng = np.random.default_rng([seed, n, place])
    gaps, steps, truth = shaped.simulated(family, n, rule, samples, rng)
    node = shaped.node_from_samples(gaps, steps, truth, family.shapes.counts)
    values = (node.log_gap, np.array(node.tail_shape), np.array(node.tail_scale), np.array(0.0), np.array(gaps.size))
    return dict(zip(PARTS, values, strict=True))


def packed(parts: Mapping[str, Arrays], rule: str) -> dict[str, NDArray[np.generic]]:
    """All parts of a table as named arrays; single precision keeps seven digits of 1 - r."""
    arrays: dict[str, NDArray[np.generic]] = {"rule": np.array(rule), "version": np.array(NULL_VERSION)}
    arrays["plain_families"] = np.array([family.name for family in plain_families()])
    _pack(arrays, "plain", parts, axis=1)
    for family in shaped_families():
        _pack(arrays, family.name, parts, axis=0)
    if any(key.startswith(MATCHED) for key in parts):
        places = range(len(matched.COEFFICIENTS))
        nodes = [[parts[f"{MATCHED}{n}/{place}"]["log_gap"] for place in places] for n in matched.SIZES]
        arrays["matched"] = np.array(nodes, dtype=np.float32)
    return arrays


def _pack(arrays: dict[str, NDArray[np.generic]], prefix: str, parts: Mapping[str, Arrays], axis: int) -> None:
    """Stack the nodes of all sizes whose keys begin with the prefix."""
    sizes = sorted(int(key.rsplit("/", 1)[1]) for key in parts if key.rsplit("/", 1)[0] == prefix)
    arrays[f"{prefix}/sizes"] = np.array(sizes)
    nodes = [parts[f"{prefix}/{n}"] for n in sizes]
    for part in PARTS:
        along = axis if nodes[0][part].ndim else 0
        stacked = np.stack([node[part] for node in nodes], axis=along)
        arrays[f"{prefix}/{part}"] = stacked if part == "samples" else stacked.astype(np.float32)


def unpacked(arrays: Arrays) -> Nulls:
    """The tables that `packed` gave. Raises: KeyError when an array is missing."""
    rule, version = str(arrays["rule"]), str(arrays["version"])
    plain = NullTable(
        families=tuple(str(name) for name in arrays["plain_families"]),
        rule=rule,
        sizes=arrays["plain/sizes"].astype(np.int64),
        log_gap=np.minimum.accumulate(_float(arrays, "plain/log_gap"), axis=2),
        tail_shape=_float(arrays, "plain/tail_shape"),
        tail_scale=_float(arrays, "plain/tail_scale"),
        floor=_float(arrays, "plain/floor"),
        samples=arrays["plain/samples"].astype(np.int64),
        version=version,
    )
    tables = {
        family.name: ShapedTable(
            counts=family.shapes.counts,
            sizes=arrays[f"{family.name}/sizes"].astype(np.int64),
            log_gap=_float(arrays, f"{family.name}/log_gap"),
            tail_shape=_float(arrays, f"{family.name}/tail_shape"),
            tail_scale=_float(arrays, f"{family.name}/tail_scale"),
            samples=arrays[f"{family.name}/samples"].astype(np.int64),
        )
        for family in shaped_families()
    }
    in_condition = MatchedTable(np.array(matched.SIZES), _float(arrays, "matched")) if "matched" in arrays else None
    return Nulls(rule, version, plain, tables, in_condition)


def _float(arrays: Arrays, name: str) -> NDArray[np.float64]:
    return arrays[name].astype(np.float64)


@cache
def shipped_nulls() -> Nulls:
    """The tables that the package carries, for filliben positions."""
    with (resources.files("screener.stats.null") / SHIPPED).open("rb") as stream, np.load(stream) as arrays:
        return unpacked(dict(arrays))
