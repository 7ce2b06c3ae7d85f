"""Which rows are shown, in which order."""

import polars as pl
import pytest

from screener.records import RESULT_COLUMNS
from screener.ui.columns import COLUMNS
from screener.ui.rows import Arrangement, arranged, has_remarks, longest_name, row_found, row_of

NAN = float("nan")
PRESENT = {"channel", "n", "r", "critical_r", "p", "departure_size", "verdict", "reason", "closest"}
KINDS: dict[type, pl.DataType] = {int: pl.Int64(), float: pl.Float64(), str: pl.String()}
ABSENT = {name: KINDS[kind] for name, kind in RESULT_COLUMNS.items() if name not in PRESENT}


@pytest.fixture
def results() -> pl.DataFrame:
    """Five channels, one without scores."""
    return pl.DataFrame(
        {
            "position": [0, 1, 2, 3, 4],
            "channel": ["ch10", "ch2", "Flow", "ch1", "zeta"],
            "n": [5, 50, 2, 500, 50],
            "r": [0.9, 0.99, NAN, 0.99, 0.5],
            "critical_r": [0.95, 0.95, None, 0.95, 0.95],
            "p": [0.01, 0.5, None, 0.5, 1e-9],
            "departure_size": [0.4, 0.1, None, 0.1, 0.8],
            "verdict": ["flagged", "clear", "not scored", "clear", "flagged"],
            "reason": ["", "", "fewer than 3 readings", "", ""],
            "closest": [None, "logistic", None, "Cauchy", None],
            "strip": ["44444444"] * 5,
        }
    ).with_columns(pl.lit(None, dtype).alias(name) for name, dtype in ABSENT.items())


def order(results: pl.DataFrame, sort: str | None, *, falling: bool = False, flagged_only: bool = False) -> list[int]:
    """The positions in the order asked for."""
    return arranged(results, Arrangement(sort, falling=falling, flagged_only=flagged_only))["position"].to_list()


def test_without_a_sort_rows_stand_in_table_order_or_in_reverse(results: pl.DataFrame) -> None:
    assert order(results, None) == [0, 1, 2, 3, 4]
    assert order(results, None, falling=True) == [4, 3, 2, 1, 0]


def test_names_are_sorted_by_the_numbers_in_them(results: pl.DataFrame) -> None:
    assert order(results, "channel") == [3, 1, 0, 2, 4]


def test_verdicts_are_sorted_by_weight(results: pl.DataFrame) -> None:
    assert order(results, "verdict") == [0, 4, 2, 1, 3]


@pytest.mark.parametrize("falling", [False, True])
@pytest.mark.parametrize("key", ["r", "critical_r", "p", "departure_size"])
def test_absent_values_come_last_either_way(results: pl.DataFrame, key: str, *, falling: bool) -> None:
    assert order(results, key, falling=falling)[-1] == 2


def test_numbers_are_sorted_as_numbers_and_equal_ones_stay_in_table_order(results: pl.DataFrame) -> None:
    assert order(results, "p") == [4, 0, 1, 3, 2]
    assert order(results, "p", falling=True) == [1, 3, 0, 4, 2]
    assert order(results, "n") == [2, 0, 1, 4, 3]


def test_remarks_are_sorted_as_they_read(results: pl.DataFrame) -> None:
    assert order(results, "remark") == [3, 2, 1, 0, 4]


def test_every_column_can_be_sorted_by(results: pl.DataFrame) -> None:
    for column in COLUMNS:
        assert sorted(order(results, column.key)) == [0, 1, 2, 3, 4]


def test_only_flagged_rows_are_left_when_asked_for(results: pl.DataFrame) -> None:
    assert order(results, "p", flagged_only=True) == [4, 0]


def test_a_channel_is_found_in_its_row_or_not_at_all(results: pl.DataFrame) -> None:
    rows = arranged(results, Arrangement("p", flagged_only=True))
    assert row_of(rows, 0) == 1
    assert row_of(rows, 1) is None


def test_finding_goes_on_from_the_start_row_and_round_the_end(results: pl.DataFrame) -> None:
    assert [row_found(results, "CH", start) for start in (0, 1, 2, 4)] == [0, 1, 3, 0]
    assert row_found(results, "[", 0) is None


def test_the_room_that_names_and_remarks_need_is_known(results: pl.DataFrame) -> None:
    assert longest_name(results) == 4
    assert has_remarks(results)
    assert not has_remarks(results.filter(pl.col("position") == 0))
    assert longest_name(results.clear()) == 0
