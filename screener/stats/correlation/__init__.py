"""r: the correlation of sorted readings with the quantiles of a family, for all channels and families at once."""

from screener.stats.correlation.censored import fit_censored, held_within
from screener.stats.correlation.fits import Fits, fit_families, no_fits
from screener.stats.correlation.shape_search import table_ahead

__all__ = ["Fits", "fit_censored", "fit_families", "held_within", "no_fits", "table_ahead"]
