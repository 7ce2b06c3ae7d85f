"""r: the correlation of sorted readings with the quantiles of a family, for all channels and families at once."""

from screener.stats.correlation.fits import Fits, fit_families
from screener.stats.correlation.shape_search import table_ahead

__all__ = ["Fits", "fit_families", "table_ahead"]
