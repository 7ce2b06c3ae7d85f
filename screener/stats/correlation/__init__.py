"""r: the correlation of sorted readings with the quantiles of a family, for all channels and families at once."""

from screener.stats.correlation.fits import Fits, fit_families

__all__ = ["Fits", "fit_families"]
