"""r against scipy's probability plot, for every family, n, scale, offset and pattern of missing readings."""

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import stats

from screener.stats.correlation import fit_families
from screener.stats.correlation.segments import class_size, compress, segments
from screener.stats.families import FAMILIES, Axis
from screener.stats.ordering import sort_in_place

SCIPY = {
    "normal": stats.norm,
    "logistic": stats.logistic,
    "double exponential": stats.laplace,
    "Cauchy": stats.cauchy,
    "uniform": stats.uniform,
    "exponential": stats.expon,
    "Rayleigh": stats.rayleigh,
    "Maxwell-Boltzmann": stats.maxwell,
    "half-normal": stats.halfnorm,
    "largest extreme value": stats.gumbel_r,
    "smallest extreme value": stats.gumbel_l,
    "lognormal": stats.norm,
    "Weibull": stats.gumbel_l,
    "log-logistic": stats.logistic,
}

PLAIN = [family for family in FAMILIES if not family.shape_count]

LINEAR = [family for family in PLAIN if family.axis is Axis.LINEAR]

Battery = dict[str, NDArray[np.float64]]


def battery(n: int, seed: int = 0) -> Battery:
    rng = np.random.default_rng(seed)
    normal = rng.standard_normal(n)
    return {
        "normal": normal,
        "exponential": rng.standard_exponential(n),
        "Cauchy": rng.standard_cauchy(n),
        "ties": np.round(rng.standard_normal(n), 1) + np.linspace(0, 0.2, n).round(1),
        "two values": np.where(np.arange(n) < n // 2, 1.0, 2.0),
        "wide lognormal": np.exp(3.0 * normal),
        "offset of 1e9 standard deviations": 1e9 + normal,
        "scale 1e-300": 1e-300 * normal,
        "scale 1e300": 1e300 * normal / np.abs(normal).max(),
        "positive at 1e300": 1e300 * np.exp(-np.abs(normal)),
        "positive at 1e-300": 1e-300 * np.exp(normal),
    }


def scipy_r(readings: NDArray[np.float64], family: str, *, log: bool) -> float:
    """scipy's r of readings brought within its range by a power of two and by the difference to one reading.

    Neither changes r. In ln x the difference is taken in extended precision.
    """
    ordered = np.sort(readings)
    if log:
        logs = np.log(ordered.astype(np.longdouble))
        near = (logs - logs[logs.size // 2]).astype(np.float64)
    else:
        scaled = np.ldexp(ordered, -int(np.frexp(np.abs(ordered).max())[1]))
        near = scaled - scaled[scaled.size // 2]
    near = np.ldexp(near, -int(np.frexp(np.abs(near).max())[1]))
    return float(stats.probplot(near, dist=SCIPY[family])[1][2])


@pytest.mark.parametrize("n", [3, 4, 5, 7, 20, 63, 64, 65, 66, 129, 1000, 10_007, 100_000])
def test_r_agrees_with_scipy_to_1e_9(n: int) -> None:
    samples = battery(n)
    width = n if n > 20_000 else n + n // 30 + 1
    readings = np.full((len(samples), width), np.nan)
    places = np.random.default_rng(1).permutation(width)[:n]
    readings[:, places] = np.stack(list(samples.values()))
    counts = sort_in_place(readings)
    assert np.all(counts == n)
    fits = fit_families(readings, counts, PLAIN, "filliben")
    for row, (name, sample) in enumerate(samples.items()):
        for column, family in enumerate(PLAIN):
            log = family.axis is Axis.LOG
            if log and sample.min() <= 0.0:
                assert fits.outside[row, column]
                assert np.isnan(fits.r[row, column])
            else:
                expected = scipy_r(sample, family.name, log=log)
                assert fits.r[row, column] == pytest.approx(expected, abs=1e-9), (name, family.name)


def test_location_and_scale_are_those_of_scipy() -> None:
    sample = np.random.default_rng(4).gamma(5.0, 3.0, 400)
    ordered = sample[None, :].copy()
    fits = fit_families(ordered, sort_in_place(ordered), PLAIN, "filliben")
    for column, family in enumerate(PLAIN):
        x = np.log(sample) if family.axis is Axis.LOG else sample
        slope, intercept, _ = stats.probplot(x, dist=SCIPY[family.name])[1]
        assert fits.scale[0, column] == pytest.approx(slope, rel=1e-8)
        assert fits.location[0, column] == pytest.approx(intercept, rel=1e-8)


def test_channels_of_different_n_score_as_they_do_alone() -> None:
    rng = np.random.default_rng(8)
    readings = np.exp(rng.standard_normal((60, 700)))
    readings[rng.random(readings.shape) < rng.random((60, 1))] = np.nan
    together = readings.copy()
    r = fit_families(together, sort_in_place(together), FAMILIES, "filliben").r
    for row, channel in enumerate(readings):
        alone = channel[None, :].copy()
        assert np.array_equal(
            fit_families(alone, sort_in_place(alone), FAMILIES, "filliben").r[0], r[row], equal_nan=True
        )


@pytest.mark.parametrize("rule", ["hazen", "weibull", "exact", "0.31", "gringorten"])
def test_other_position_rules_hold_too(rule: str) -> None:
    from screener.stats.positions import plotting_positions

    sample = np.random.default_rng(2).standard_normal(333)
    ordered = sample[None, :].copy()
    r = fit_families(ordered, sort_in_place(ordered), LINEAR, rule).r[0]
    u = plotting_positions(333, rule)
    expected = [np.corrcoef(np.sort(sample), family.quantile(u))[0, 1] for family in LINEAR]
    assert r == pytest.approx(np.array(expected), abs=1e-10)


def test_a_channel_without_spread_has_no_r() -> None:
    ordered = np.full((1, 50), 4.2)
    assert np.all(np.isnan(fit_families(ordered, np.array([50]), FAMILIES, "filliben").r))


@pytest.mark.parametrize("width", [32, 33, 40, 49, 200, 4999])
def test_compressed_halves_keep_sums_with_smooth_functions_of_rank(width: int) -> None:
    cut = segments(width)
    tile = np.random.default_rng(3).standard_normal((4, 2 * width))
    rank = np.arange(1.0, width + 1)
    function = np.log((rank - 0.3175) / (4 * width))
    exact = tile[:, :width] @ function, tile[:, width:] @ function[::-1]
    compressed = compress(tile, cut)
    at_nodes = np.log((cut.nodes - 0.3175) / (4 * width))
    size = np.abs(tile).sum(axis=1).max()
    assert compressed[:, : cut.nodes.size] @ at_nodes == pytest.approx(exact[0], abs=1e-11 * size)
    assert compressed[:, cut.nodes.size :] @ at_nodes == pytest.approx(exact[1], abs=1e-11 * size)


def test_aligned_columns_hold_every_n_with_little_to_spare() -> None:
    for n in (3, 64, 65, 100, 1000, 99_999, 1_000_000):
        assert n <= class_size(n) <= max(64, 1.07 * n + 2)


@pytest.mark.parametrize("n", [60_000, 100_000])
def test_a_long_channel_alone_has_the_bits_it_has_among_others(n: int) -> None:
    readings = np.sort(20.0 + np.random.default_rng(n).standard_normal((6, n)), axis=1)
    together = fit_families(readings, np.full(6, n), PLAIN, "filliben").r
    for row in range(6):
        alone = fit_families(readings[row : row + 1].copy(), np.array([n]), PLAIN, "filliben").r
        assert np.array_equal(alone[0], together[row])
