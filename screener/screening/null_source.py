"""Which null tables a run uses: the shipped ones, or ones simulated for another rule of plotting positions."""

import zipfile
from collections.abc import Callable, Generator
from pathlib import Path

import numpy as np
from platformdirs import user_cache_path

from screener.records import NullsPrepared
from screener.screening.null_build import build, parts
from screener.stats.null.nulls import Nulls
from screener.stats.null.packing import NULL_VERSION, packed, shipped_nulls, tasks, unpacked
from screener.stats.positions import DEFAULT_RULE, rule_key

SEED = 20261

SHARE_ON_DEMAND = 0.1
"""Share of the shipped tables' samples that is simulated while a user waits."""


def null_folder() -> Path:
    """Where null tables built on this machine are kept."""
    return user_cache_path("screener") / "nulls"


def built_path(rule: str) -> Path:
    """Where `screener nulls build` keeps the full table of a rule without a shipped one."""
    return null_folder() / f"{rule_key(rule)}-version{NULL_VERSION}.npz"


def nulls_for(
    rule: str,
    largest: int,
    jobs: int,
    cancelled: Callable[[], bool] = lambda: False,
    *,
    share: float = SHARE_ON_DEMAND,
) -> Generator[NullsPrepared, None, Nulls | None]:
    """Prepare the nulls of a rule for channels of up to `largest` readings; nothing when cancelled.

    What is simulated is kept in the cache, part by part; a damaged part is simulated again.
    """
    held = held_nulls(rule)
    if held is not None:
        return held
    key = rule_key(rule)
    wanted = tasks(key, SEED, share, largest)
    for part in build(wanted, null_folder() / "parts", jobs):
        yield NullsPrepared(key, part.work_done)
        if cancelled():
            return None
    return unpacked(packed(parts(wanted, null_folder() / "parts"), key))


def held_nulls(rule: str) -> Nulls | None:
    """The full tables of a rule, shipped or built before; None when there are none, or they are damaged or older."""
    key = rule_key(rule)
    if key == DEFAULT_RULE:
        return shipped_nulls()
    try:
        with built_path(key).open("rb") as stream, np.load(stream) as arrays:
            nulls = unpacked(dict(arrays))
    except (OSError, ValueError, KeyError, EOFError, zipfile.BadZipFile):
        return None
    return nulls if (nulls.version, nulls.rule) == (NULL_VERSION, key) else None
