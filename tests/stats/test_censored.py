"""r of clipped channels: over the unclipped readings, at their positions in the full n."""

import numpy as np
import pytest

from screener.stats.correlation import fit_censored, fit_families
from screener.stats.families import FAMILIES, Axis, Family
from screener.stats.families.family import FloatArray
from screener.stats.positions import plotting_positions


def by_definition(family: Family, ordered: FloatArray, low: int, high: int, shapes: FloatArray) -> tuple[float, float]:
    """r and slope over the ranks that are not censored (Michael & Schucany 1986; Verrill & Johnson 1988)."""
    quantiles = family.quantile(plotting_positions(ordered.size, "filliben"), *shapes[: family.shape_count])
    kept = slice(low, ordered.size - high)
    values = np.log(ordered[kept]) if family.axis is Axis.LOG else ordered[kept]
    return float(np.corrcoef(quantiles[kept], values)[0, 1]), float(np.polyfit(quantiles[kept], values, 1)[0])


@pytest.mark.parametrize("n", [8, 21, 64, 333, 5000, 40_000])
def test_r_and_scale_are_those_of_the_definition_for_every_family(n: int) -> None:
    rng = np.random.default_rng(n)
    ordered = np.sort(20.0 + rng.standard_normal((3, n)), axis=1)
    low, high = np.array([0, max(1, n // 5), 2]), np.array([max(1, n // 20), 0, max(1, n // 4)])
    fits = fit_censored(ordered, np.full(3, n), low, high, FAMILIES, "filliben")
    for channel in range(3):
        for column, family in enumerate(FAMILIES):
            r, slope = by_definition(
                family, ordered[channel], low[channel], high[channel], fits.shapes[channel, column]
            )
            # The shape is found by interpolation, which leaves a few units in the seventh digit.
            near = 3e-6 if family.shape_count else 1e-9
            assert fits.r[channel, column] == pytest.approx(max(r, 0.0), abs=near)
            if r > 0.5 and not family.shape_count:
                assert fits.scale[channel, column] == pytest.approx(slope, rel=1e-6)


def test_without_censored_readings_it_is_the_plain_r() -> None:
    ordered = np.sort(np.random.default_rng(1).normal(50.0, 2.0, (4, 500)), axis=1)
    n, none = np.full(4, 500), np.zeros(4, dtype=np.int64)
    found, plain = (
        fit_censored(ordered, n, none, none, FAMILIES, "filliben"),
        fit_families(ordered, n, FAMILIES, "filliben"),
    )
    assert found.r == pytest.approx(plain.r, abs=1e-12)


def test_the_values_of_censored_readings_do_not_matter() -> None:
    ordered = np.sort(np.random.default_rng(2).normal(50.0, 2.0, (1, 400)), axis=1)
    far = ordered.copy()
    far[0, :40], far[0, 350:] = -1e6, 1e9
    n, low, high = np.array([400]), np.array([40]), np.array([50])
    one, other = (fit_censored(each, n, low, high, FAMILIES, "filliben") for each in (ordered, far))
    assert np.array_equal(one.r[0, :4], other.r[0, :4])
    assert not other.outside.any()


def test_a_channel_alone_has_the_bits_it_has_among_others() -> None:
    ordered = np.sort(np.random.default_rng(3).normal(50.0, 2.0, (30, 300)), axis=1)
    n, low, high = np.full(30, 300), np.arange(30), np.arange(30)[::-1].copy()
    together = fit_censored(ordered, n, low, high, FAMILIES, "filliben").r
    for row in (0, 7, 29):
        one = slice(row, row + 1)
        alone = fit_censored(ordered[one], n[one], low[one], high[one], FAMILIES, "filliben").r
        assert np.array_equal(alone[0], together[row], equal_nan=True)


def test_a_channel_alone_has_the_bits_it_has_among_others_of_any_n() -> None:
    rng = np.random.default_rng(4)
    ordered = np.sort(rng.normal(50.0, 2.0, (40, 300)), axis=1)
    n = rng.integers(250, 301, 40)
    ordered[np.arange(300) >= n[:, None]] = np.nan
    low, high = rng.integers(0, 30, 40), rng.integers(0, 60, 40)
    together = fit_censored(ordered, n, low, high, FAMILIES, "filliben")
    assert np.all(together.r[:, 0] > 0.9)
    for row in range(0, 40, 3):
        one = slice(row, row + 1)
        alone = fit_censored(ordered[one], n[one], low[one], high[one], FAMILIES, "filliben")
        for found, wanted in (
            (together.r, alone.r),
            (together.location, alone.location),
            (together.scale, alone.scale),
        ):
            assert np.array_equal(found[row], wanted[0], equal_nan=True)


def test_too_few_uncensored_readings_give_no_r() -> None:
    ordered = np.arange(10.0)[None, :]
    assert np.all(np.isnan(fit_censored(ordered, np.array([10]), np.array([4]), np.array([4]), FAMILIES, "filliben").r))
