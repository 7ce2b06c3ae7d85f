"""Finite numbers written to a text table in any dialect come back exactly."""

import csv
import io
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from hypothesis import HealthCheck, assume, example, given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays
from numpy.testing import assert_array_equal
from numpy.typing import NDArray

from screener.records import Plan
from tests.tables.conftest import opened

FINITE = st.floats(allow_nan=False, allow_infinity=False) | st.decimals(-9999, 9999, places=3).map(float)
TABLES = st.tuples(st.integers(3, 12), st.integers(2, 5)).flatmap(
    lambda shape: arrays(np.float64, shape, elements=FINITE)
)
SETTINGS = settings(max_examples=250, suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)


@dataclass(frozen=True)
class Dialect:
    """How a table is written."""

    separator: str
    comma: bool
    encoding: str
    end: str
    preamble: int
    units: bool
    padding: str

    def written(self, table: NDArray[np.float64]) -> bytes:
        """The table as this dialect has it."""
        columns = range(table.shape[1])
        text = io.StringIO()
        writer = csv.writer(text, delimiter=self.separator, lineterminator="\n")
        text.writelines(f"written by rig {number}\n" for number in range(self.preamble))
        writer.writerow([f"c{at}" for at in columns])
        if self.units:
            writer.writerow(["mV" for _ in columns])
        writer.writerows([[self.cell(value) for value in row] for row in table.tolist()])
        return text.getvalue().replace("\n", self.end).encode(self.encoding)

    def cell(self, value: float) -> str:
        """One number."""
        written = repr(value).replace(".", "," if self.comma else ".")
        return written + ("" if self.separator == " " else self.padding)


DIALECTS = st.builds(
    Dialect,
    separator=st.sampled_from([",", ";", "\t", "|", " "]),
    comma=st.booleans(),
    encoding=st.sampled_from(["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "cp1252"]),
    end=st.sampled_from(["\n", "\r\n", "\r"]),
    preamble=st.integers(0, 3),
    units=st.booleans(),
    padding=st.sampled_from(["", " ", "  "]),
)
PLAIN = Dialect(",", comma=False, encoding="utf-8", end="\n", preamble=0, units=False, padding="")


@SETTINGS
@given(table=TABLES, dialect=DIALECTS)
@example(table=np.array([[5e-324, 1.7976931348623157e308], [2.2250738585072014e-308, 0.1]]), dialect=PLAIN)
@example(table=np.array([[0.1 + 0.2, 9007199254740993.0], [1 / 3, -0.0]]), dialect=PLAIN)
@example(
    table=np.array([[0.0, 0.0], [0.0, 0.0], [0.0, 1.0]]),
    dialect=Dialect(" ", comma=False, encoding="utf-8", end="\n", preamble=3, units=False, padding=""),
)
def test_finite_numbers_come_back_exactly(tmp_path: Path, table: NDArray[np.float64], dialect: Dialect) -> None:
    varying = [at for at in range(table.shape[1]) if table[:, at].min() < table[:, at].max()]
    assume(varying)
    (tmp_path / "t.csv").write_bytes(dialect.written(table))
    names = tuple(f"c{at}" for at in range(table.shape[1]))
    back = opened(tmp_path / "t.csv", Plan(channels=names, decimal="," if dialect.comma else "."))
    assert back.names == [names[at] for at in varying]
    assert_array_equal(back.readings, table[:, varying].T)
