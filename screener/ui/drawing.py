"""One channel as the plot panel shows it: numbers of one fit and the lines of its plot."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from screener.ui.confirming import confirmation_lines
from screener.ui.families import family_lines, shapes
from screener.ui.tails import Tails, tail_lines, tails_of
from screener.ui.views import View

if TYPE_CHECKING:
    from collections.abc import Sequence

    from screener.plots import Charset, QuantileView
    from screener.records import FloatArray, Plan, TableFacts
    from screener.runs import RunFile


OF_ROWS = {View.RUN_ORDER, View.LAG, View.HISTOGRAM}
"""Views that are not held against a family."""
ROOM_FOR_TAILS = 12
"""Lines from which on the outermost readings are named under the plot."""
TAILS = {View.LOW_TAIL, View.HIGH_TAIL}


@dataclass(frozen=True, slots=True)
class Wanted:
    """What to draw."""

    position: int
    n: int
    family: str
    width: int
    height: int
    view: View = View.QUANTILE
    told: bool = True
    """With the outermost readings and the confirmation under a quantile plot."""


@dataclass(frozen=True, slots=True)
class Drawing:
    """What was drawn."""

    wanted: Wanted
    channel: str
    unit: str
    families: tuple[str, ...]
    """All that can be turned to, in the order of the registry."""
    fit: dict[str, Any]
    """The row of FIT_COLUMNS of the wanted family; empty when the channel has none."""
    lines: tuple[str, ...]
    fits: tuple[dict[str, Any], ...] = ()
    """All rows of FIT_COLUMNS of the channel."""
    closest: str = ""
    """What the families' p say of those that come closest, in a sentence."""
    tails: Tails = field(default_factory=Tails)
    """The outermost readings by name, in the views that are quantile plots."""
    reason: str = ""
    """Why the channel is not scored, whatever the family."""

    @property
    def place(self) -> int:
        """Where the family stands among `families`, from 0."""
        return self.families.index(self.wanted.family) if self.wanted.family in self.families else 0


def drawing(run: RunFile, facts: TableFacts, plan: Plan, wanted: Wanted, *, charset: Charset) -> Drawing:
    """The channel's plot against the wanted family, from what the run file keeps."""
    channel = facts.channels[wanted.position]
    fits = run.fits(wanted.position).to_dicts()
    fit = next((fit for fit in fits if fit["family"] == wanted.family), {})
    said = closest_words(fits, plan.alpha, wanted.n)
    tails = Tails()
    if wanted.view is View.FAMILIES:
        lines = family_lines(fits, said, wanted.family, width=wanted.width, height=wanted.height)
    elif wanted.view is View.SHAPE:
        lines = _shape_plot(run, plan, wanted, charset)
    elif wanted.view in OF_ROWS:
        lines = _row_plot(run, facts, wanted, charset)
    else:
        lines, tails = _quantile_plot(run, plan, wanted, fit, charset)
    families = tuple(str(fit["family"]) for fit in fits)
    reason = run.reason(wanted.position)
    return Drawing(
        wanted, channel.name, channel.unit, families, fit, tuple(lines), tuple(fits), said, reason=reason, tails=tails
    )


def view_of(run: RunFile, plan: Plan, wanted: Wanted, fit: dict[str, Any]) -> QuantileView:
    """What the quantile plot of the channel shows, in the wanted view."""
    return _seen(_whole(run.points(wanted.position), plan, wanted, fit), wanted.view)


def _whole(points: FloatArray, plan: Plan, wanted: Wanted, fit: dict[str, Any]) -> QuantileView:
    """The whole quantile plot of the kept readings."""
    from screener.plots import quantile_view

    location, scale = (float("nan") if fit.get(name) is None else fit[name] for name in ("location", "scale"))
    return quantile_view(points, wanted.n, wanted.family, plan.positions, location, scale, shapes(fit))


def _seen(whole: QuantileView, view: View) -> QuantileView:
    """What a view shows of the whole plot."""
    from screener.plots import difference_of, tail_of

    if view is View.DIFFERENCE:
        return difference_of(whole)
    return tail_of(whole, upper=view is View.HIGH_TAIL) if view in TAILS else whole


def closest_words(fits: Sequence[dict[str, Any]], alpha: float, n: int) -> str:
    """Which families come closest, in a sentence; empty where nothing was fitted."""
    import numpy as np

    from screener.stats.closest import comparison
    from screener.stats.families import family_named

    if all(fit["p"] is None for fit in fits):
        return ""
    p = np.array([np.nan if fit["p"] is None else fit["p"] for fit in fits])
    return comparison(p, [family_named(fit["family"]) for fit in fits], alpha, n)


def _quantile_plot(
    run: RunFile, plan: Plan, wanted: Wanted, fit: dict[str, Any], charset: Charset
) -> tuple[list[str], Tails]:
    """The plot over the names of its outermost readings, where there is room for both; and these readings."""
    from screener.plots import quantile_plot

    points = run.points(wanted.position)
    whole = _whole(points, plan, wanted, fit)
    tails = tails_of(points, run.outermost(wanted.position), whole)
    named: list[str] = []
    if wanted.told and wanted.height >= ROOM_FOR_TAILS:
        found = run.confirmation(wanted.position)
        said = confirmation_lines(found, wanted.width) if found is not None and found.family == wanted.family else []
        named = [*tail_lines(tails, wanted.view, wanted.width), *said]
    height = wanted.height - len(named)
    plot = quantile_plot(_seen(whole, wanted.view), width=wanted.width, height=height, charset=charset)
    return [*plot, *named], tails


def _shape_plot(run: RunFile, plan: Plan, wanted: Wanted, charset: Charset) -> list[str]:
    from screener.plots import shape_plot

    size: dict[str, Any] = {"width": wanted.width, "height": wanted.height, "charset": charset}
    return shape_plot(run.points(wanted.position), wanted.n, wanted.family, plan.positions, **size)


def _row_plot(run: RunFile, facts: TableFacts, wanted: Wanted, charset: Charset) -> list[str]:
    from screener.plots import histogram_plot, lag_plot, run_order_plot
    from screener.stats.row_order import row_order

    size: dict[str, Any] = {"width": wanted.width, "height": wanted.height, "charset": charset}
    unit = facts.channels[wanted.position].unit
    unit = f" [{unit}]" if unit.isascii() and unit else ""
    if wanted.view is View.HISTOGRAM:
        return histogram_plot(run.points(wanted.position), wanted.n, unit, **size)
    kept = run.in_order(wanted.position)
    order = row_order(kept, facts.rows) if kept.size else None
    if wanted.view is View.LAG:
        return lag_plot(order, unit, **size)
    return run_order_plot(order, unit, **size, starts=[file.first_row + 1 for file in facts.files[1:]])
