"""The line that shows how far scoring has come."""

from __future__ import annotations

from screener.ui.numbers import seconds_text
from screener.ui.palette import DONE, PLAIN, QUIET
from screener.ui.widgets.lines import Line

BAR_SHARE = 0.25
"""Of the width, what the bar takes."""


def progress_line(tried: int, total: int, tried_now: int, seconds: float, width: int, *, unicode: bool) -> Line:
    """A bar, channels tried of all, the rate, and the time left."""
    share = tried / total if total else 1.0
    rate = tried_now / seconds if seconds > 0 else 0.0
    left = f", {seconds_text((total - tried) / rate)} left" if rate > 0 and tried < total else ""
    pace = f"   {rate:,.0f} channels a second{left}" if rate > 0 else ""
    return [*_bar(share, width, unicode=unicode), (f" {tried:,} of {total:,}{pace}", PLAIN)]


def preparing_line(positions: str, share: float, width: int, *, unicode: bool) -> Line:
    """A bar, and what is simulated before the first channel can be scored."""
    told = f" {share:.0%} of simulating the null distributions for {positions} positions"
    return [*_bar(share, width, unicode=unicode), (told, PLAIN)]


def confirming_line(channel: str, made: int, wanted: int, width: int, *, unicode: bool) -> Line:
    """A bar, and how many samples of a channel's own process are made."""
    told = f" {made:,} of {wanted:,} samples to confirm {channel} (C stops)"
    return [*_bar(made / wanted, width, unicode=unicode), (told, PLAIN)]


def _bar(share: float, width: int, *, unicode: bool) -> Line:
    cells = max(8, int(width * BAR_SHARE))
    filled = int(cells * share)
    full, empty = ("━", "─") if unicode else ("#", ".")
    return [(full * filled, DONE), (empty * (cells - filled), QUIET)]
