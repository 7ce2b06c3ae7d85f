"""All families of one channel in a small table."""

from __future__ import annotations

import textwrap
from collections.abc import Callable, Sequence
from typing import Any

from screener.ui.numbers import p_text, r_text, reading_text
from screener.ui.shown import fitted

Fit = dict[str, Any]

CELLS: tuple[tuple[str, int, Callable[[Fit], str]], ...] = (
    ("r", 10, lambda fit: r_text(fit["r"])),
    ("critical r", 10, lambda fit: r_text(fit["critical_r"])),
    ("p", 9, lambda fit: p_text(fit["p"]) + ("*" if fit["extrapolated"] else "")),
    ("location", 9, lambda fit: reading_text(fit["location"])),
    ("scale", 9, lambda fit: reading_text(fit["scale"])),
    ("shapes", 12, lambda fit: ", ".join(f"{value:.3g}" for value in shapes(fit))),
)
NAME = 20


def shapes(fit: Fit) -> tuple[float, ...]:
    """The shape parameters of a fit, in the family's order; none for most families."""
    return tuple(fit[name] for name in ("shape_1", "shape_2") if fit.get(name) is not None)


def family_lines(fits: Sequence[Fit], closest: str, family: str, *, width: int, height: int) -> list[str]:
    """A head, a line for every family, and which come closest; around the turned-to one when there is no room for all.

    `!` stands before a family whose critical value r lies below, `>` before the one turned to.
    """
    words = textwrap.wrap(closest, max(20, width - 1))
    room = max(1, height - len(words) - 1)
    place = next((k for k, fit in enumerate(fits) if fit["family"] == family), 0)
    first = min(max(0, place - room // 2), max(0, len(fits) - room))
    lines = [_head(width), *(_line(fit, family, width) for fit in fits[first : first + room]), *words]
    return [fitted(line, width) for line in lines[:height]]


def _head(width: int) -> str:
    return "  " + fitted("family", NAME) + "".join(" " + fitted(title, cells) for title, cells, _ in CELLS)[:width]


def _line(fit: Fit, family: str, width: int) -> str:
    pointer = ">" if fit["family"] == family else " "
    if fit["r"] is None:
        return f"{pointer} " + fitted(fit["family"], NAME) + f" {fit['note'] or 'not fitted'}"
    below = fit["critical_r"] is not None and fit["r"] < fit["critical_r"]
    cells = "".join(" " + fitted(text(fit), cells) for _, cells, text in CELLS)
    return (pointer + ("!" if below else " ") + fitted(fit["family"], NAME) + cells)[:width]
