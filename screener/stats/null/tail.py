"""The far tail of a null distribution: a generalized Pareto distribution fitted to what lies beyond a threshold.

Sources: Pickands 1975 (Annals of Statistics) for the model; Hosking & Wallis 1987 (Technometrics) for the estimate by
L-moments.
"""

import numpy as np

from screener.stats.families.family import FloatArray


def fitted_tail(excess: FloatArray, largest_possible: float) -> tuple[float, float]:
    """Shape xi and scale sigma of the excesses (> 0) over a threshold, float64[m].

    xi is raised where needed so that excesses up to `largest_possible` keep a positive probability.
    """
    ordered = np.sort(excess)
    m = ordered.size
    mean = float(ordered.mean())
    weighted = float((ordered * np.arange(m)).sum() / (m * (m - 1)))
    l2 = 2.0 * weighted - mean
    xi = 2.0 - mean / l2
    sigma = mean * (1.0 - xi)
    return max(xi, -0.999 * sigma / largest_possible), sigma


def tail_share(excess: FloatArray, xi: FloatArray | float, sigma: FloatArray | float) -> FloatArray:
    """P(excess exceeded, given that the threshold is), same shape as excess."""
    scaled = np.asarray(excess / sigma, dtype=np.float64)
    bent = np.maximum(1.0 + xi * scaled, 1e-300)
    safe = np.where(np.abs(xi) < 1e-9, 1.0, xi)
    return np.where(np.abs(xi) < 1e-9, np.exp(-scaled), np.exp(-np.log(bent) / safe))


def tail_excess(share: FloatArray, xi: FloatArray | float, sigma: FloatArray | float) -> FloatArray:
    """The excess that is exceeded with probability share, the inverse of `tail_share`."""
    log_share = np.log(share)
    safe = np.where(np.abs(xi) < 1e-9, 1.0, xi)
    return np.asarray(sigma * np.where(np.abs(xi) < 1e-9, -log_share, np.expm1(-xi * log_share) / safe))
