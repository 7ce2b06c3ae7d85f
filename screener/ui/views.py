"""The ways to look at one channel."""

from enum import StrEnum


class View(StrEnum):
    """Plots of a channel, in the order in which they are turned."""

    QUANTILE = "quantile"
    DIFFERENCE = "difference"
    LOW_TAIL = "low tail"
    HIGH_TAIL = "high tail"
    RUN_ORDER = "run order"
    LAG = "lag"
    HISTOGRAM = "histogram"
    SHAPE = "shape curve"
    FAMILIES = "families"

    @property
    def meaning(self) -> str:
        """What is drawn."""
        return MEANINGS[self]


MEANINGS = {
    View.QUANTILE: "actual against expected, with the line on which they are equal and the 95 % band",
    View.DIFFERENCE: "actual minus expected, with the 95 % band",
    View.LOW_TAIL: "actual against expected at the low end",
    View.HIGH_TAIL: "actual against expected at the high end",
    View.RUN_ORDER: "readings in the order of rows",
    View.LAG: "each reading against the one in the row before",
    View.HISTOGRAM: "counts of readings in bars",
    View.SHAPE: "r over the shape of the family, from the readings kept",
    View.FAMILIES: "all families that the channel was held against",
}


def view_after(view: View, by: int) -> View:
    """The view so many further on, going round."""
    views = list(View)
    return views[(views.index(view) + by) % len(views)]
