"""The columns of the channel table: what each shows, how wide it is, and how it is sorted."""

from __future__ import annotations

from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from rich.cells import cell_len

from screener.records import Decision, Verdict
from screener.ui.numbers import count_text, p_text, r_text, reading_text, size_text
from screener.ui.shown import ascii_only, fitted, fitted_name, shown

Row = Mapping[str, Any]

MARKS = {Verdict.FLAGGED.value: "!", Verdict.NOT_SCORED.value: "-"}
"""The symbol that stands beside the colour; clear channels have none."""

DECISION_MARKS = {
    Decision.USE.value: "u",
    Decision.TRANSFORM.value: "t",
    Decision.LEAVE_OUT.value: "x",
    Decision.LOOK_AGAIN.value: "l",
}
"""The letter of what was decided, which is also its key."""

STRIP_LEVELS = str.maketrans("012345678", " ▁▂▃▄▅▆▇█")
STRIP_LEVELS_IN_ASCII = str.maketrans("012345678", "__..-''^^")
"""How far actual readings lie above or below expected ones, from the low to the high tail; half height is none."""

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
        if self.key == "strip":
            text = text.translate(STRIP_LEVELS if unicode else STRIP_LEVELS_IN_ASCII)
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
    Column("verdict", "", 2, lambda row: MARKS.get(row["verdict"], " ") + DECISION_MARKS.get(row["decision"], " ")),
    Column("channel", "channel", 0, lambda row: shown(row["channel"])),
    Column("n", "n", 7, lambda row: count_text(row["n"]), right=True, falling_first=True),
    Column("missing", "missing", 7, lambda row: count_text(row["missing"]), right=True, falling_first=True),
    Column("r", "r", 10, lambda row: r_text(row["r"])),
    Column("critical_r", "critical r", 10, lambda row: r_text(row["critical_r"])),
    Column("plain_critical_r", "plain crit", 10, lambda row: r_text(row["plain_critical_r"])),
    Column("p", "p", 7, lambda row: p_text(row["p"])),
    Column("q", "q", 7, lambda row: p_text(row["q"])),
    Column("departure_size", "off (sd)", 8, lambda row: size_text(row["departure_size"]), falling_first=True),
    Column("strip", "low-high", 8, lambda row: row["strip"] or ""),
    Column("departure", "departure", 14, lambda row: shown(row["departure"] or "")),
    Column("conditions", "conditions", 14, lambda row: shown(row["conditions"] or "")),
    Column("step", "step", 9, lambda row: reading_text(row["step"]), falling_first=True),
    Column("n_effective", "eff. n", 7, lambda row: reading_text(row["n_effective"]), right=True),
    Column("family", "family", 12, lambda row: shown(row["family"] or "")),
    Column("decision", "decision", 15, lambda row: shown(row["decision"] or "")),
    Column("note", "note", 16, lambda row: shown(row["note"] or "")),
    Column("remark", "closest", 0, lambda row: shown(remark(row))),
)

NUMBERED = ("verdict", "channel", "n", "r", "critical_r", "p", "departure_size", "remark", "decision")
"""What the keys 1 to 9 sort by."""
FIXED = ("verdict", "channel", "remark")
"""Columns that cannot be left out."""
USUAL = (*FIXED, "r", "critical_r", "p", "departure_size", "strip")
WIDE_ENOUGH = {"n": 90, "departure": 100, "conditions": 116}
"""Columns that are shown too, once the table is that wide; the last two only when the run knows any."""

SOURCES = ("position", "unit", "reason", "closest", *(c.key for c in COLUMNS if c.key != "remark"))
"""The columns of the results frame that the table reads."""


def column_named(key: str) -> Column:
    """The column with that key."""
    return next(column for column in COLUMNS if column.key == key)


def columns_shown(chosen: Collection[str], total: int, known: Collection[str]) -> tuple[Column, ...]:
    """The columns of a table of `total` cells: those chosen, or the usual ones when none were.

    The rightmost that find no room are left out. `known` are the columns that have a value in any row.
    """
    roomy = [key for key, least in WIDE_ENOUGH.items() if total >= least and (key == "n" or key in known)]
    wanted = {*FIXED, *chosen} if chosen else {*USUAL, *roomy}
    shown_ = [column for column in COLUMNS if column.key in wanted]
    while _free(total, shown_) < LEAST_NAME + LEAST_REMARK:
        last = next((column for column in reversed(shown_) if column.key not in FIXED), None)
        if last is None:
            break
        shown_.remove(last)
    return tuple(shown_)


def widths(total: int, longest_name: int, columns: Sequence[Column], *, with_remarks: bool) -> list[int]:
    """The width of every column in a table of `total` cells, gaps not counted; names go before remarks."""
    free = _free(total, columns)
    name = max(LEAST_NAME, min(longest_name, free - (LEAST_REMARK if with_remarks else 0)))
    shares = {"channel": name, "remark": max(0, free - name)}
    return [column.width or shares[column.key] for column in columns]


def _free(total: int, columns: Sequence[Column]) -> int:
    """The cells that the columns of a set width leave."""
    return total - sum(column.width for column in columns) - GAP * (len(columns) - 1)
