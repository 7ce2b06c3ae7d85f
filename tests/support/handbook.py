"""Reading the published tables and series that the tests hold results against."""

from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from screener.stats.correlation import fit_families
from screener.stats.families import family_named
from screener.stats.ordering import sort_in_place

PUBLISHED = Path(__file__).parents[1] / "published"


def series(name: str) -> NDArray[np.float64]:
    """The readings of a published series, in row order."""
    return np.loadtxt(PUBLISHED / "series" / f"{name}.csv", skiprows=1, dtype=np.float64)


def table(name: str) -> tuple[NDArray[np.int64], NDArray[np.float64], NDArray[np.float64]]:
    """A published table: n [rows], probability [columns], values [rows, columns]."""
    path = PUBLISHED / "tables" / f"{name}.csv"
    head = path.read_text().splitlines()[0].split(",")[1:]
    body = np.loadtxt(path, delimiter=",", skiprows=1)
    probability = np.array([float(column.rsplit("_", 1)[1]) for column in head])
    return body[:, 0].astype(np.int64), probability, body[:, 1:]


def r_of(name: str, family: str) -> float:
    """r of a published series against a family, under filliben positions."""
    readings = series(name)[None, :].copy()
    n = sort_in_place(readings)
    return float(fit_families(readings, n, [family_named(family)], "filliben").r[0, 0])
