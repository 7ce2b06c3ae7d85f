"""The report as one HTML file that needs nothing else, plots as vector drawings."""

from __future__ import annotations

from collections.abc import Sequence
from html import escape
from typing import TYPE_CHECKING

from screener.ui.report import HEAD, PLOTS, Content, caption

if TYPE_CHECKING:
    from screener.plots import QuantileView
    from screener.records import FloatArray

WIDTH, HEIGHT, MARGIN = 520, 340, 56
"""Pixels of a drawing, and around its frame."""

STYLE = """
body { font: 15px/1.45 sans-serif; max-width: 70em; margin: 2em auto; padding: 0 1em; color: #111; background: #fff; }
table { border-collapse: collapse; margin: .6em 0; }
th, td { text-align: left; padding: .15em .8em .15em 0; border-bottom: 1px solid #ccc; vertical-align: top; }
figure { margin: 1.5em 0; break-inside: avoid; } figcaption { margin-bottom: .3em; }
svg { max-width: 100%; height: auto; } svg text { font: 12px sans-serif; fill: #333; }
.frame { fill: none; stroke: #888; } .line { stroke: #888; } .band { fill: #cfe0f0; stroke: none; }
.points { stroke: #123c69; stroke-width: 4; stroke-linecap: round; fill: none; }
"""


def html(told: Content) -> str:
    """The whole document."""
    parts = [
        f"<h1>{escape(told.title)}</h1>",
        f"<p><strong>{escape(told.summary)}</strong></p>",
        "<h2>How it was made</h2>",
        _table(("what", "value"), told.facts),
        f"<h2>Columns set aside: {len(told.set_aside)}</h2>",
        _table(("column", "reason"), told.set_aside),
        f"<h2>Channels not scored: {len(told.not_scored)}</h2>",
        _table(("channel", "reason"), told.not_scored),
        f"<h2>Flagged channels: {len(told.flagged)}</h2>",
        _table(HEAD, told.flagged),
        f"<h2>Decisions: {len(told.decided)}</h2>",
        _table(("channel", "decision", "note"), told.decided),
        "<h2>Cautions</h2>",
        "<ul>" + "".join(f"<li>{escape(caution)}</li>" for caution in told.cautions) + "</ul>",
        "<h2>Plots of flagged channels</h2>",
        "<p>Actual readings against expected ones, the line on which they are equal, the 95 % simultaneous band.</p>",
        *_figures(told),
    ]
    policy = "default-src 'none'; style-src 'unsafe-inline'"
    head = (
        f'<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8"><title>{escape(told.title)}</title>\n'
        f'<meta http-equiv="Content-Security-Policy" content="{policy}">\n<style>{STYLE}</style></head>\n<body>\n'
    )
    return head + "\n".join(part for part in parts if part) + "\n</body></html>\n"


def _figures(told: Content) -> list[str]:
    figures = [
        f"<figure><figcaption><strong>{escape(str(plot.row['channel']))}</strong><br>{escape(caption(plot.row))}"
        f"</figcaption>{drawn(plot.view)}</figure>"
        for plot in told.plots
    ]
    more = len(told.flagged) - len(told.plots)
    return [*figures, *([f"<p>{more:,} more are flagged; plots are shown of {PLOTS:,}.</p>"] if more else [])]


def _table(head: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    """A table; nothing when it has no rows."""
    if not rows:
        return ""
    lines = ["".join(f"<td>{escape(cell)}</td>" for cell in row) for row in rows]
    titles = "".join(f"<th>{escape(title)}</th>" for title in head)
    return "<table><tr>" + "</tr>\n<tr>".join([titles, *lines]) + "</tr></table>"


def drawn(view: QuantileView) -> str:
    """The quantile plot as an SVG element, or the sentence that says why there is none."""
    if view.obstacle:
        return f"<p>{escape(view.obstacle)}</p>"
    low = float(min(view.actual.min(), view.expected.min()))
    high = float(max(view.actual.max(), view.expected.max()))
    across = _Scale(float(view.expected[0]), float(view.expected[-1]), MARGIN, WIDTH - 12)
    up = _Scale(low, high, HEIGHT - 36, 12)
    ends = view.expected[[0, -1]]
    line = f'<path class="line" d="{_path(across.at(ends), up.at(ends))}"/>'
    dots = " ".join(f"M{x:.1f} {y:.1f}h0" for x, y in zip(across.at(view.expected), up.at(view.actual), strict=True))
    frame = f'<rect class="frame" x="{MARGIN}" y="12" width="{WIDTH - 12 - MARGIN}" height="{HEIGHT - 48}"/>'
    labels = [
        f'<text x="{MARGIN}" y="9">{escape(view.actual_label)}</text>',
        f'<text x="{WIDTH - 12}" y="{HEIGHT - 4}" text-anchor="end">{escape(view.expected_label)}</text>',
        *(_label(across, value, horizontal=True) for value in across.ends),
        *(_label(up, value, horizontal=False) for value in up.ends),
    ]
    inner = _band(view, across, up) + line + f'<path class="points" d="{dots}"/>' + frame + "".join(labels)
    return f'<svg role="img" viewBox="0 0 {WIDTH} {HEIGHT}" width="{WIDTH}" height="{HEIGHT}">{inner}</svg>'


class _Scale:
    """Values to pixels, with a little room at both ends."""

    def __init__(self, low: float, high: float, first: float, last: float) -> None:
        room = 0.04 * high - 0.04 * low
        self.ends = (low, high)
        self._low, self._span = low - room, high - low + 2 * room
        self._first, self._last = first, last

    def at(self, values: FloatArray) -> list[float]:
        """The pixels of values, kept within the frame."""
        shares = ((values - self._low) / self._span).clip(0.0, 1.0)
        return [float(self._first + share * (self._last - self._first)) for share in shares]


def _band(view: QuantileView, across: _Scale, up: _Scale) -> str:
    if view.low is None or view.high is None:
        return ""
    x = across.at(view.expected)
    y = [*up.at(view.low), *reversed(up.at(view.high))]
    return f'<path class="band" d="{_path([*x, *reversed(x)], y)}Z"/>'


def _path(x: Sequence[float], y: Sequence[float]) -> str:
    return "M" + "L".join(f"{a:.1f} {b:.1f}" for a, b in zip(x, y, strict=True))


def _label(scale: _Scale, value: float, *, horizontal: bool) -> str:
    import numpy as np

    (place,) = scale.at(np.array([value]))
    if horizontal:
        return f'<text x="{place:.1f}" y="{HEIGHT - 20}" text-anchor="middle">{value:.4g}</text>'
    return f'<text x="{MARGIN - 4}" y="{place + 4:.1f}" text-anchor="end">{value:.4g}</text>'
