"""Text plots of one channel, drawn in character cells: arrays in, lines of text out."""

from screener.plots.canvas import Charset
from screener.plots.four import histogram, histogram_plot, lag_plot, run_order_plot
from screener.plots.quantile import QuantileView, difference_of, quantile_plot, quantile_view, tail_of
from screener.plots.shape import shape_plot

__all__ = [
    "Charset",
    "QuantileView",
    "difference_of",
    "histogram",
    "histogram_plot",
    "lag_plot",
    "quantile_plot",
    "quantile_view",
    "run_order_plot",
    "shape_plot",
    "tail_of",
]
