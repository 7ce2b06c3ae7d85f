"""The quantile plot of one channel under the numbers of the fit it shows."""

from __future__ import annotations

from textual import events
from textual.message import Message

from screener.ui.drawing import Drawing
from screener.ui.families import shapes
from screener.ui.numbers import p_text, r_text, reading_text
from screener.ui.palette import FLAGGED, PLAIN, QUIET, STRONG
from screener.ui.shown import ascii_only, shown
from screener.ui.widgets.lines import Line, Lines, plain

HEAD_LINES = 5
"""Lines above the plot."""


class PlotPanel(Lines):
    """Shows the drawing it is given, and says when it has room for another size."""

    class RoomChanged(Message):
        """The panel has another size."""

    def __init__(self, *, unicode: bool, id: str | None = None) -> None:  # noqa: A002 - the name that every widget has
        super().__init__(id=id)
        self._unicode = unicode

    @property
    def room(self) -> tuple[int, int]:
        """Columns and lines for the plot itself."""
        return self.size.width, self.size.height - HEAD_LINES

    def draw(self, drawing: Drawing) -> None:
        """Show this drawing."""
        lines = [*head(drawing), *(plain(line) for line in drawing.lines)]
        if not self._unicode:
            lines = [[(ascii_only(text), style) for text, style in line] for line in lines]
        self.show(lines)

    def on_resize(self, event: events.Resize) -> None:
        """The plot is drawn for one size."""
        if event.size.width > 0:
            self.post_message(self.RoomChanged())


def head(drawing: Drawing) -> list[Line]:
    """Name, family, r beside its critical value, p, location and scale."""
    unit = f" [{shown(drawing.unit)}]" if drawing.unit and drawing.unit not in drawing.channel else ""
    name: Line = [(shown(drawing.channel), STRONG), (unit, PLAIN), (f"   n {drawing.wanted.n:,}", PLAIN)]
    place = f" {drawing.place + 1}/{len(drawing.families)}" if drawing.families else ""
    family: Line = [(drawing.wanted.family, STRONG), (place, QUIET), (f"   {drawing.wanted.view}", PLAIN)]
    said = f"- not scored: {shown(drawing.reason)}" if drawing.reason else _probability(drawing)
    return [name, family, _evidence(drawing), plain(said), _parameters(drawing)]


def _evidence(drawing: Drawing) -> Line:
    fit = drawing.fit
    r, critical = fit.get("r"), fit.get("critical_r")
    if r is None:
        return plain(str(fit.get("note") or "not fitted"), QUIET)
    if critical is None:
        return plain(f"r {r_text(r)}")
    below = r < critical
    relation = "! below" if below else "not below"
    return [
        (f"r {r_text(r)} ", PLAIN),
        (f"{relation} critical {r_text(critical)}", FLAGGED if below else PLAIN),
        (" (matched)" if _textbook(drawing) else "", QUIET),
    ]


def _textbook(drawing: Drawing) -> str:
    """The textbook critical value, where the channel is held against another."""
    textbook = drawing.fit.get("plain_critical_r")
    return "" if textbook in {None, drawing.fit.get("critical_r")} else r_text(textbook)


def _probability(drawing: Drawing) -> str:
    p = drawing.fit.get("p")
    beyond = " (extrapolated)" if drawing.fit.get("extrapolated") else ""
    textbook = f"   textbook {_textbook(drawing)}" if _textbook(drawing) else ""
    return "" if p is None else f"p {p_text(p)}{beyond}{textbook}"


def _parameters(drawing: Drawing) -> Line:
    location, scale = drawing.fit.get("location"), drawing.fit.get("scale")
    if location is None or scale is None:
        return plain("")
    shape = "   shape " + ", ".join(map(reading_text, shapes(drawing.fit))) if shapes(drawing.fit) else ""
    return plain(f"location {reading_text(location)}   scale {reading_text(scale)}{shape}", QUIET)
