"""Text plots of one channel, drawn in character cells: arrays in, lines of text out."""

from screener.plots.canvas import Charset
from screener.plots.quantile import QuantileView, quantile_plot, quantile_view

__all__ = ["Charset", "QuantileView", "quantile_plot", "quantile_view"]
