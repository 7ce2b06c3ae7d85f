"""Which null table a run uses: the shipped one, or one that the user has built."""

import zipfile
from pathlib import Path

import numpy as np
from platformdirs import user_cache_path

from screener.errors import PlanError
from screener.stats.null.packing import NULL_VERSION, shipped_table, unpacked
from screener.stats.null.table import NullTable
from screener.stats.positions import DEFAULT_RULE, rule_key


def null_folder() -> Path:
    """Where null tables built on this machine are kept."""
    return user_cache_path("screener") / "nulls"


def built_path(rule: str) -> Path:
    """Where the table of a rule without a shipped one is kept."""
    return null_folder() / f"{rule_key(rule)}-version{NULL_VERSION}.npz"


def null_table(rule: str) -> NullTable:
    """The null table for a rule of plotting positions.

    Raises: PlanError when there is none, or it is damaged.
    """
    key = rule_key(rule)
    if key == DEFAULT_RULE:
        return shipped_table()
    path = built_path(key)
    way_out = f"`screener nulls build --positions {key}` makes it."
    if not path.exists():
        raise PlanError(f"There is no null table for {key!r} positions yet: {way_out}")
    try:
        with np.load(path) as arrays:
            table = unpacked(arrays)
    except (OSError, ValueError, KeyError, zipfile.BadZipFile) as error:
        raise PlanError(f"The null table for {key!r} positions is damaged ({error}): {way_out}") from error
    if (table.version, table.rule) != (NULL_VERSION, key):
        raise PlanError(f"The null table for {key!r} positions is of another version: {way_out}")
    return table
