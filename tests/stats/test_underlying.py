"""The normal series behind readings, and what rounding takes from r."""

import numpy as np
import pytest
from scipy.signal import lfilter

from screener.stats.families import family_named
from screener.stats.null.rounding_loss import rounding_loss
from screener.stats.null.underlying import recorded_at, underlying_coefficient, underlying_rho


def series(coefficient: float, rows: int) -> np.ndarray:
    noise = np.random.default_rng(1).standard_normal(rows + 500)
    return np.asarray(lfilter([np.sqrt(1 - coefficient**2)], [1.0, -coefficient], noise)[500:])


@pytest.mark.parametrize(
    ("family", "shapes", "low", "high"),
    [
        ("normal", (), 0.0, 0.0),
        ("normal", (), 0.0, 0.2),
        ("exponential", (), 0.0, 0.0),
        ("exponential", (), 0.2, 0.05),
        ("lognormal", (0.8,), 0.0, 0.0),
        ("gamma", (3.0,), 0.0, 0.1),
    ],
)
def test_the_coefficient_behind_readings_is_found_from_their_tau(
    family: str, shapes: tuple[float, ...], low: float, high: float
) -> None:
    readings = recorded_at(series(0.9, 400_000), family_named(family), shapes)
    readings = np.clip(readings, *np.quantile(readings, [low, 1.0 - high]))
    deviation = readings - readings.mean()
    rho = np.array([np.mean(deviation[k:] * deviation[:-k]) for k in range(1, 60)]) / np.mean(deviation**2)
    tau = 1.0 + 2.0 * float(np.sum(rho**4))
    assert underlying_coefficient(family_named(family), shapes, low, high, tau) == pytest.approx(0.9, abs=0.004)
    back = underlying_rho(rho[:20], family_named(family), shapes, low, high)
    assert back == pytest.approx(0.9 ** np.arange(1, 21), abs=0.02)


@pytest.mark.parametrize("step", [0.1, 0.5, 1.0, 1.4])
def test_rounding_takes_from_a_normal_channel_what_sheppard_says(step: float) -> None:
    # Rounding adds a twelfth of the squared step to the variance (Sheppard 1898) and nothing to the covariance.
    in_true_deviations = step
    assert rounding_loss("normal", (), step, 0.0, 0.0) == pytest.approx(
        1.0 - 1.0 / np.sqrt(1.0 + in_true_deviations**2 / 12.0), rel=2e-3
    )


@pytest.mark.parametrize(("low", "high"), [(0.0, 0.2), (0.1, 0.2), (0.05, 0.0)])
def test_rounding_of_clipped_channels_agrees_with_very_many_readings(low: float, high: float) -> None:
    rng = np.random.default_rng(2)
    normal, step = np.sort(rng.standard_normal(400_000)), 0.8
    n = normal.size
    first, stop = round(low * n), n - round(high * n)
    edge = normal[first] if low else normal[stop - 1]
    cell = np.floor((normal - edge) / step)
    kept = np.ones(n, dtype=bool)
    if low:
        kept &= cell >= 0
    if high:
        kept &= cell < (np.rint((normal[stop - 1] - edge) / step) if low else 0)
    r = np.corrcoef(cell[kept], normal[kept])[0, 1]
    slope = step * np.cov(cell[kept], normal[kept])[0, 1] / np.var(normal[kept], ddof=1)
    assert rounding_loss("normal", (), step / slope, low, high) == pytest.approx(1.0 - r, rel=0.01)
