"""The columns of the table."""

from typing import Any

import pytest
from rich.cells import cell_len

from screener.records import RESULT_COLUMNS
from screener.ui.columns import COLUMNS, FIXED, GAP, NUMBERED, column_named, columns_shown, widths

ROW: dict[str, Any] = {
    **dict.fromkeys(RESULT_COLUMNS),
    "strip": "012345678",
    "channel": "outlet_pressure_01 [bar]",
    "unit": "bar",
    "n": 4000,
    "r": 0.991234,
    "critical_r": 0.999584,
    "p": 2.7e-18,
    "departure_size": 0.132,
    "verdict": "flagged",
    "reason": "",
    "closest": "logistic",
}


@pytest.mark.parametrize("total", [58, 66, 78, 120])
@pytest.mark.parametrize("with_remarks", [False, True])
def test_columns_and_gaps_fill_the_table_exactly(total: int, *, with_remarks: bool) -> None:
    for chosen in ((), ("r", "q"), tuple(column.key for column in COLUMNS)):
        columns = columns_shown(chosen, total, {"departure"})
        assert sum(widths(total, 30, columns, with_remarks=with_remarks)) + GAP * (len(columns) - 1) == total


def test_of_too_many_columns_the_rightmost_are_left_out_but_never_the_fixed_ones() -> None:
    everything = [column.key for column in COLUMNS]
    for total in (58, 78, 120, 300):
        keys = [column.key for column in columns_shown(everything, total, set())]
        assert set(FIXED) <= set(keys)
        others = [key for key in everything if key not in FIXED]
        assert [key for key in keys if key not in FIXED] == others[: len(keys) - len(FIXED)]
    assert len(columns_shown(everything, 300, set())) == len(COLUMNS)


def test_words_of_departure_and_condition_are_shown_in_wide_tables_when_the_run_has_any() -> None:
    usual = [column.key for column in columns_shown((), 130, set())]
    told = [column.key for column in columns_shown((), 130, {"departure", "conditions"})]
    assert set(told) - set(usual) == {"departure", "conditions"}
    assert "departure" not in [column.key for column in columns_shown((), 78, {"departure"})]


def test_a_strip_rises_with_its_digits_and_has_a_likeness_in_ascii() -> None:
    strip = column_named("strip")
    assert strip.cell({**ROW, "strip": "01234567"}, 8, unicode=True) == " ▁▂▃▄▅▆▇"
    assert strip.cell({**ROW, "strip": "00244688"}, 8, unicode=False) == "__.--'^^"
    assert strip.cell({**ROW, "strip": None}, 8, unicode=True) == " " * 8


def test_number_keys_name_columns() -> None:
    assert [column_named(key).key for key in NUMBERED] == list(NUMBERED)
    assert len(NUMBERED) == 9


@pytest.mark.parametrize("column", COLUMNS, ids=lambda column: column.key)
def test_every_cell_takes_exactly_its_width(column: Any) -> None:
    for width in (1, 7, 12, 30):
        assert cell_len(column.cell(ROW, width, unicode=True)) == width
        assert column.cell({**ROW, "channel": "温度µ", "reason": "zu früh"}, width, unicode=False).isascii()


def test_flagged_and_unscored_rows_carry_a_symbol() -> None:
    mark = column_named("verdict")
    marks = [mark.text({**ROW, "verdict": verdict}) for verdict in ("flagged", "not scored", "clear")]
    assert marks == ["! ", "- ", "  "]


@pytest.mark.parametrize(
    ("decision", "letter"),
    [("use as it is", "u"), ("use transformed", "t"), ("leave out", "x"), ("look again", "l"), (None, " ")],
)
def test_a_decision_stands_beside_the_verdict_as_the_letter_of_its_key(decision: str | None, letter: str) -> None:
    assert column_named("verdict").text({**ROW, "decision": decision}) == f"!{letter}"


def test_a_long_name_loses_its_unit_before_its_middle() -> None:
    name = column_named("channel")
    assert name.cell(ROW, 24, unicode=True) == "outlet_pressure_01 [bar]"
    assert name.cell(ROW, 20, unicode=True) == "outlet_pressure_01  "
    assert name.cell(ROW, 12, unicode=True) == "outlet~re_01"


def test_the_last_column_says_why_a_channel_is_not_scored_or_what_is_closest() -> None:
    last = column_named("remark")
    assert last.text(ROW) == "logistic"
    assert last.text({**ROW, "reason": "too few\x1b readings"}) == "too few\\x1b readings"
    assert last.text({**ROW, "closest": None}) == ""
