"""What the user looks at: which rows in which order, which family, which plot; kept in the run file."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

from screener.ui.columns import COLUMNS, column_named
from screener.ui.views import View

KEYS = {column.key for column in COLUMNS}


@dataclass(frozen=True, slots=True)
class Showing:
    """Frozen: every change makes another."""

    sort: str | None = None
    """A column key; None for the order of the table."""
    falling: bool = False
    flagged_only: bool = False
    condition: str = ""
    family: str = ""
    """What the plot is held against; empty for what each channel is held against."""
    view: View = View.QUANTILE
    columns: tuple[str, ...] = ()
    """Column keys; empty for the usual ones."""

    def sorted_by(self, key: str | None) -> Showing:
        """Sorted by a column, the natural way first; by the same column again, the other way."""
        if key == self.sort:
            return replace(self, falling=not self.falling)
        return replace(self, sort=key, falling=key is not None and column_named(key).falling_first)

    def words(self, channel: str) -> dict[str, str]:
        """As it is kept, with the channel under the cursor."""
        return {
            "channel": channel,
            "sort": self.sort or "",
            "falling": "yes" if self.falling else "",
            "flagged_only": "yes" if self.flagged_only else "",
            "condition": self.condition,
            "family": self.family,
            "view": self.view.value,
            "columns": " ".join(self.columns),
        }


def showing_from(words: Mapping[str, str]) -> Showing:
    """What was kept, as far as it makes sense."""
    sort, view = words.get("sort", ""), words.get("view", "")
    return Showing(
        sort=sort if sort in KEYS else None,
        falling=bool(words.get("falling")),
        flagged_only=bool(words.get("flagged_only")),
        condition=words.get("condition", ""),
        family=words.get("family", ""),
        view=View(view) if view in set(View) else View.QUANTILE,
        columns=tuple(key for key in words.get("columns", "").split() if key in KEYS),
    )
