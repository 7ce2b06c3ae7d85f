"""The columns of the table."""

from typing import Any

import pytest
from rich.cells import cell_len

from screener.ui.columns import COLUMNS, GAP, column_named, widths

ROW: dict[str, Any] = {
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
    assert sum(widths(total, 30, with_remarks=with_remarks)) + GAP * (len(COLUMNS) - 1) == total


@pytest.mark.parametrize("column", COLUMNS, ids=lambda column: column.key)
def test_every_cell_takes_exactly_its_width(column: Any) -> None:
    for width in (1, 7, 12, 30):
        assert cell_len(column.cell(ROW, width, unicode=True)) == width
        assert column.cell({**ROW, "channel": "温度µ", "reason": "zu früh"}, width, unicode=False).isascii()


def test_flagged_and_unscored_rows_carry_a_symbol() -> None:
    mark = column_named("verdict")
    marks = [mark.text({**ROW, "verdict": verdict}) for verdict in ("flagged", "not scored", "clear")]
    assert marks == ["!", "-", " "]


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
