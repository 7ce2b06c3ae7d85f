"""The line that shows how far scoring has come."""

from __future__ import annotations

from screener.ui.numbers import seconds_text
from screener.ui.palette import DONE, PLAIN, QUIET
from screener.ui.widgets.lines import Line

BAR_SHARE = 0.25
"""Of the width, what the bar takes."""


def progress_line(tried: int, total: int, tried_now: int, seconds: float, width: int, *, unicode: bool) -> Line:
    """A bar, channels tried of all, the rate, and the time left."""
    cells = max(8, int(width * BAR_SHARE))
    filled = cells * tried // total if total else cells
    full, empty = ("━", "─") if unicode else ("#", ".")
    rate = tried_now / seconds if seconds > 0 else 0.0
    left = f", {seconds_text((total - tried) / rate)} left" if rate > 0 and tried < total else ""
    pace = f"   {rate:,.0f} channels a second{left}" if rate > 0 else ""
    return [(full * filled, DONE), (empty * (cells - filled), QUIET), (f" {tried:,} of {total:,}{pace}", PLAIN)]
