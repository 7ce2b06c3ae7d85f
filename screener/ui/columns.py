"""The columns of the channel table: what each shows, how wide it is, and how it is sorted."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from rich.cells import cell_len

from screener.records import Verdict
from screener.ui.numbers import count_text, p_text, r_text, size_text
from screener.ui.shown import ascii_only, fitted, fitted_name, shown

Row = Mapping[str, Any]

MARKS = {Verdict.FLAGGED.value: "!", Verdict.NOT_SCORED.value: "-"}
"""The symbol that stands beside the colour; clear channels have none."""

GAP = 1
UNIT_BRACKETS = ("[{}]", "({})", "_{}")
LEAST_NAME = 8
LEAST_REMARK = 10
"""Cells for the columns that share what the fixed ones leave."""


@dataclass(frozen=True, slots=True)
class Column:
    """One column of the table."""

    key: str
    """The column of the results frame, or `remark`."""
    title: str
    width: int
    """Cells; 0 for the columns that share what the others leave."""
    text: Callable[[Row], str]
    right: bool = False
    falling_first: bool = False
    """The first sort by this column puts the largest on top."""

    def title_in(self, width: int, arrow: str) -> str:
        """The title in exactly `width` cells, after the arrow of the sort."""
        return fitted(arrow + self.title, width, right=self.right)

    def cell(self, row: Row, width: int, *, unicode: bool) -> str:
        """What the column shows of a row, in exactly `width` cells."""
        text = self.text(row)
        text = text if unicode else ascii_only(text)
        if self.key != "channel":
            return fitted(text, width, right=self.right)
        # A name that is too long loses its unit first, then its middle: names often differ at their ends.
        return fitted_name(text if cell_len(text) <= width else without_unit(text, row["unit"]), width)


def remark(row: Row) -> str:
    """Why a channel is not scored, or the family closest to it."""
    return str(row["reason"] or row["closest"] or "")


def without_unit(name: str, unit: str | None) -> str:
    """The name without the unit it ends in, if it does."""
    endings = (form.format(shown(unit)) for form in UNIT_BRACKETS) if unit else ()
    return next((name.removesuffix(ending).rstrip() for ending in endings if name.endswith(ending)), name)


COLUMNS: tuple[Column, ...] = (
    Column("verdict", "", 1, lambda row: MARKS.get(row["verdict"], " ")),
    Column("channel", "channel", 0, lambda row: shown(row["channel"])),
    Column("n", "n", 7, lambda row: count_text(row["n"]), right=True, falling_first=True),
    Column("r", "r", 10, lambda row: r_text(row["r"])),
    Column("critical_r", "critical r", 10, lambda row: r_text(row["critical_r"])),
    Column("p", "p", 7, lambda row: p_text(row["p"])),
    Column("departure_size", "off (sd)", 8, lambda row: size_text(row["departure_size"]), falling_first=True),
    Column("remark", "closest", 0, lambda row: shown(remark(row))),
)

SOURCES = ("position", "channel", "unit", "n", "r", "critical_r", "p", "departure_size", "verdict", "reason", "closest")
"""The columns of the results frame that the table reads."""


def column_named(key: str) -> Column:
    """The column with that key."""
    return next(column for column in COLUMNS if column.key == key)


def widths(total: int, longest_name: int, *, with_remarks: bool) -> list[int]:
    """The width of every column in a table of `total` cells, gaps not counted; names go before remarks."""
    free = total - sum(column.width for column in COLUMNS) - GAP * (len(COLUMNS) - 1)
    name = max(LEAST_NAME, min(longest_name, free - (LEAST_REMARK if with_remarks else 0)))
    shares = {"channel": name, "remark": max(0, free - name)}
    return [column.width or shares[column.key] for column in COLUMNS]
