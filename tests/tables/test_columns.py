"""Which columns are channels, and the reasons of those that are not, whatever the format."""

from datetime import date, datetime, time, timedelta
from decimal import Decimal
from math import nan
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from numpy.testing import assert_array_equal

from screener.errors import PlanError
from screener.records import Plan
from screener.tables import open_table, spans
from tests.tables.conftest import OpenText, opened

ROWS = 300
VARYING = [float(value * value % 31) for value in range(ROWS)]


def reason(folder: Path, column: pl.Series, plan: Plan | None = None) -> str:
    """Why the column is set aside beside a channel; empty when it is a channel."""
    path = folder / "t.parquet"
    pl.DataFrame({"beside": VARYING}).with_columns(column).write_parquet(path)
    table = opened(path, plan)
    assert {"beside", column.name} == {*table.names, *table.reasons}
    return table.reasons.get(column.name, "")


@pytest.mark.parametrize(
    ("values", "said"),
    [
        ([True, False] * 150, "true or false, not a measurement"),
        ([date(2024, 1, 1)] * ROWS, "dates or times, not a measurement"),
        ([datetime(2024, 1, 1)] * ROWS, "dates or times, not a measurement"),
        ([time(1, 2)] * ROWS, "dates or times, not a measurement"),
        ([timedelta(1)] * ROWS, "dates or times, not a measurement"),
        (["x"] * ROWS, "text: 100 % of its cells are not numbers"),
        ([[1.0, 2.0]] * ROWS, "several values or raw bytes in each cell, not one number"),
        ([b"x"] * ROWS, "several values or raw bytes in each cell, not one number"),
        ([None] * ROWS, "empty: no readings"),
        ([nan] * ROWS, "empty: no readings"),
        ([""] * ROWS, "empty: no readings"),
        (["NA"] * ROWS, "empty: no readings"),
        ([5.0] * ROWS, "constant: every reading is 5.0"),
        ([5.0, None] * 150, "constant: every reading is 5.0"),
        (["7", " 7"] * 150, "constant: every reading is 7.0"),
        (list(range(ROWS)), "a row counter: it goes up by 1 from row to row"),
        ([value + 17.0 for value in range(ROWS)], "a row counter: it goes up by 1 from row to row"),
        ([25 * value for value in range(ROWS)], "a row counter: it goes up by 25 from row to row"),
        ([0.1 * value for value in range(ROWS)], "a row counter: it goes up by 0.1 from row to row"),
        ([value + 0.5 for value in range(ROWS)], "a row counter: it goes up by 1 from row to row"),
        ([str(value) for value in range(ROWS)], "a row counter: it goes up by 1 from row to row"),
    ],
)
def test_a_column_that_is_no_measurement_is_set_aside(tmp_path: Path, values: list[object], said: str) -> None:
    assert reason(tmp_path, pl.Series("x", values)) == said


@pytest.mark.parametrize("name", ["time", "Timestamp [s]", "date", "epoch_ms", "elapsed"])
def test_rising_readings_named_as_time_are_time_stamps(tmp_path: Path, name: str) -> None:
    rising = pl.Series(name, [1.7e5 + 0.1 * value**1.01 for value in range(ROWS)])
    assert reason(tmp_path, rising) == "time stamps: they rise from row to row, and the name says time"


@pytest.mark.parametrize(
    ("name", "values"),
    [
        ("rise time [ms]", VARYING),
        ("wear", [value**1.01 for value in range(ROWS)]),
        ("nearly steps", [2.0 * value + 1e-9 * (value % 2) for value in range(ROWS)]),
        ("falling", [-2.0 * value for value in range(ROWS)]),
        ("steps at infinity", [*map(float, range(ROWS - 1)), float("inf")]),
        ("gap", [*range(150), None, *range(151, ROWS)]),
        ("late jump", [*range(ROWS - 1), 0]),
        ("late change", [5.0] * (ROWS - 1) + [6.0]),
        ("one reading", [None] * (ROWS - 1) + [6.0]),
        ("half words", ["x", "1.5", "x", "2"] * 75),
    ],
)
def test_a_measurement_that_only_looks_like_a_counter_or_a_constant_stays(
    tmp_path: Path, name: str, values: list[object]
) -> None:
    assert reason(tmp_path, pl.Series(name, values)) == ""


def test_more_words_than_numbers_make_a_text_column_with_its_share(tmp_path: Path) -> None:
    mostly = pl.Series("x", ["word"] * 291 + ["1.5"] * 9)
    assert reason(tmp_path, mostly) == "text: 97 % of its cells are not numbers"
    nearly = pl.Series("x", ["word"] * 299 + ["1.5"])
    assert reason(tmp_path, nearly) == "text: 99 % of its cells are not numbers"


@pytest.mark.parametrize("stamp", ["2024-03-01", "2024-03-01T12:30:00Z", "1.3.2024", "03/01/24 12:30", "12:30:01.5"])
def test_dates_written_as_text_are_dates(open_text: OpenText, stamp: str) -> None:
    table = open_text(f"when,a\n{stamp},1\n{stamp},2.5\n")
    assert table.reasons == {"when": "dates or times, not a measurement"}


def test_true_and_false_written_as_text(open_text: OpenText) -> None:
    assert open_text("ok,a\ntrue,1\nFalse,2.5\nNA,3\n").reasons == {"ok": "true or false, not a measurement"}


def test_a_counter_or_a_time_asked_for_by_a_name_or_pattern_is_a_channel(tmp_path: Path) -> None:
    counter = pl.Series("id", range(ROWS))
    for pattern in ("id", "i*", "?d"):
        assert reason(tmp_path, counter, Plan(channels=(pattern, "beside"))) == ""
    for every in ("*", "??", "**"):
        assert reason(tmp_path, counter, Plan(channels=(every, "beside"))).startswith("a row counter")


def test_patterns_that_match_only_columns_set_aside_are_refused_with_the_reason(tmp_path: Path) -> None:
    path = tmp_path / "t.parquet"
    pl.DataFrame({"a": VARYING, "k": [5.0] * ROWS}).write_parquet(path)
    with pytest.raises(PlanError, match=r"none is a channel: k \(constant: every reading is 5\.0\)"):
        open_table(path, Plan(channels=("k",)))


@pytest.mark.parametrize("held_bytes", [0, 1 << 30])
def test_every_numeric_type_is_read_as_float64(tmp_path: Path, held_bytes: int) -> None:
    values = [3, None, 1, 2]
    types: list[type[pl.DataType] | pl.DataType]
    types = [
        pl.Int8,
        pl.UInt8,
        pl.Int64,
        pl.UInt64,
        pl.Int128,
        pl.Float32,
        pl.Float64,
        pl.Decimal(20, 2),
    ]
    made = [pl.Series(str(dtype), values, dtype=pl.Int64).cast(dtype) for dtype in types]
    made.append(pl.Series("words", ["3", "OVER", " 1", "2"]))
    made.append(pl.Series("exact", [Decimal("0.1"), None, Decimal("0.25"), Decimal("2")]))
    pl.DataFrame(made).write_parquet(tmp_path / "t.parquet")
    table = open_table(tmp_path / "t.parquet", Plan(), held_bytes=held_bytes)
    readings = np.vstack([table.read(span).readings for span in spans(table.facts)])
    assert readings.dtype == np.float64
    assert_array_equal(readings[:-1], np.tile([3, np.nan, 1, 2], (len(types) + 1, 1)))
    assert_array_equal(readings[-1], [0.1, np.nan, 0.25, 2])
    assert table.facts.remarks == ("1 cell holds 'OVER' in words: read as missing.",)


def test_categories_that_are_numbers_are_readings(tmp_path: Path) -> None:
    assert reason(tmp_path, pl.Series("x", ["1.5", "2"] * 150, dtype=pl.Categorical)) == ""


def test_a_missing_code_leaves_a_constant_column_constant(tmp_path: Path) -> None:
    coded = pl.Series("x", [5, -9999] * 150)
    assert reason(tmp_path, coded) == ""
    assert reason(tmp_path, coded, Plan(missing=("-9999",))) == "constant: every reading is 5.0"
