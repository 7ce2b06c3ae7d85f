"""Many channels tested at once: the false discovery rate, and the flags that chance alone would bring."""

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


def adjusted_p(p: FloatArray) -> FloatArray:
    """Benjamini-Hochberg adjusted p (q) of p float64[C]; NaN stays NaN and is not counted among the tests.

    Source: Benjamini & Hochberg 1995, J. R. Stat. Soc. B.
    """
    q = np.full(p.shape, np.nan)
    tested = np.flatnonzero(~np.isnan(p))
    if tested.size == 0:
        return q
    order = tested[np.argsort(p[tested], kind="stable")]
    scaled = p[order] * tested.size / np.arange(1, tested.size + 1)
    q[order] = np.minimum(np.minimum.accumulate(scaled[::-1])[::-1], 1.0)
    return q


def expected_flags(scored: int, alpha: float) -> float:
    """Flags expected by chance at alpha if every scored channel came from the family it is held against."""
    return scored * alpha
