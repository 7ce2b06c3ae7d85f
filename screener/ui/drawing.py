"""One channel as the plot panel shows it: numbers of one fit and the lines of its plot."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from screener.plots import Charset
    from screener.records import Plan, TableFacts
    from screener.runs import RunFile


@dataclass(frozen=True, slots=True)
class Wanted:
    """What to draw."""

    position: int
    n: int
    family: str
    width: int
    height: int


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

    @property
    def place(self) -> int:
        """Where the family stands among `families`, from 0."""
        return self.families.index(self.wanted.family) if self.wanted.family in self.families else 0


def drawing(run: RunFile, facts: TableFacts, plan: Plan, wanted: Wanted, *, charset: Charset) -> Drawing:
    """The channel's plot against the wanted family, from what the run file keeps."""
    from screener.plots import quantile_plot, quantile_view

    channel = facts.channels[wanted.position]
    fits = run.fits(wanted.position).to_dicts()
    fit = next((fit for fit in fits if fit["family"] == wanted.family), {})
    location, scale = (float("nan") if fit.get(name) is None else fit[name] for name in ("location", "scale"))
    points = run.points(wanted.position)
    view = quantile_view(points, wanted.n, wanted.family, plan.positions, location, scale, shapes(fit))
    lines = quantile_plot(view, width=wanted.width, height=wanted.height, charset=charset)
    families = tuple(str(fit["family"]) for fit in fits)
    return Drawing(wanted, channel.name, channel.unit, families, fit, tuple(lines))


def shapes(fit: dict[str, Any]) -> tuple[float, ...]:
    """The shape parameters of a fit, in the family's order; none for most families."""
    return tuple(fit[name] for name in ("shape_1", "shape_2") if fit.get(name) is not None)
