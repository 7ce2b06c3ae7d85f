"""Reading the published tables and series that stand beside the tests."""

from pathlib import Path

import numpy as np
from numpy.typing import NDArray

HERE = Path(__file__).parent


def series(name: str) -> NDArray[np.float64]:
    """The readings of a published series, in row order."""
    return np.loadtxt(HERE / "series" / f"{name}.csv", skiprows=1, dtype=np.float64)


def table(name: str) -> tuple[NDArray[np.int64], NDArray[np.float64], NDArray[np.float64]]:
    """A published table: n [rows], probability [columns], values [rows, columns]."""
    path = HERE / "tables" / f"{name}.csv"
    head = path.read_text().splitlines()[0].split(",")[1:]
    body = np.loadtxt(path, delimiter=",", skiprows=1)
    probability = np.array([float(column.rsplit("_", 1)[1]) for column in head])
    return body[:, 0].astype(np.int64), probability, body[:, 1:]
