"""Finite numbers written to a text table come back exactly."""

import csv
from pathlib import Path

import numpy as np
from hypothesis import HealthCheck, assume, example, given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays
from numpy.testing import assert_array_equal
from numpy.typing import NDArray

from tests.tables.conftest import opened

FINITE = st.floats(allow_nan=False, allow_infinity=False)
TABLES = st.tuples(st.integers(2, 12), st.integers(1, 5)).flatmap(
    lambda shape: arrays(np.float64, shape, elements=FINITE)
)
SETTINGS = settings(max_examples=120, suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)


def steady(column: NDArray[np.float64]) -> bool:
    """Whether the column rises about evenly, as a row counter does; such a column is rightly set aside."""
    line = np.linspace(column[0] / 2, column[-1] / 2, len(column))
    return bool(len(column) > 2 and column[0] < column[-1] and np.allclose(column / 2, line, rtol=1e-12, atol=0))


def write(path: Path, table: NDArray[np.float64], *, separator: str, padding: str) -> None:
    with path.open("w", newline="") as file:
        writer = csv.writer(file, delimiter=separator)
        writer.writerow([f"c{at}" for at in range(table.shape[1])])
        writer.writerows([[f"{value!r}{padding}" for value in row] for row in table.tolist()])


@SETTINGS
@given(table=TABLES, separator=st.sampled_from([",", ";", "\t"]), padding=st.sampled_from(["", " "]))
@example(table=np.array([[5e-324, 1.7976931348623157e308], [2.2250738585072014e-308, 0.1]]), separator=",", padding=" ")
@example(table=np.array([[0.1 + 0.2, 9007199254740993.0], [1 / 3, -0.0]]), separator=";", padding="")
def test_finite_numbers_come_back_exactly(
    tmp_path: Path, table: NDArray[np.float64], separator: str, padding: str
) -> None:
    varying = [at for at in range(table.shape[1]) if table[:, at].min() < table[:, at].max()]
    assume(varying and not any(steady(table[:, at]) for at in varying))
    write(tmp_path / "t.csv", table, separator=separator, padding=padding)
    back = opened(tmp_path / "t.csv")
    assert back.names == [f"c{at}" for at in varying]
    assert_array_equal(back.readings, table[:, varying].T)
