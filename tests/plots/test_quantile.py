"""The quantile plot."""

import math
import threading

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy import stats

from screener.plots import Charset, QuantileView, difference_of, quantile_plot, quantile_view, tail_of
from screener.stats.points import kept_ranks

FloatArray = NDArray[np.float64]


def filliben_medians(n: int) -> FloatArray:
    """The positions of Filliben 1975, written out once more."""
    u = (np.arange(1, n + 1, dtype=np.float64) - 0.3175) / (n + 0.365)
    u[-1] = 0.5 ** (1 / n)
    u[0] = 1 - u[-1]
    return u


def normal_sample(n: int, seed: int = 1) -> FloatArray:
    """Sorted readings."""
    return np.sort(np.random.default_rng(seed).normal(10.0, 2.0, n))


def drawn(readings: FloatArray, *, width: int = 60, height: int = 20, charset: Charset = Charset.UNICODE) -> list[str]:
    """The normal plot of sorted readings."""
    view = quantile_view(
        readings[kept_ranks(readings.size)], readings.size, "normal", "filliben", readings.mean(), readings.std()
    )
    return quantile_plot(view, width=width, height=height, charset=charset)


@pytest.mark.parametrize("n", [3, 50, 2000])
def test_expected_values_are_those_of_scipy_at_the_kept_ranks(n: int) -> None:
    readings = normal_sample(n)
    view = quantile_view(readings[kept_ranks(n)], n, "normal", "filliben", 10.0, 2.0)
    assert view.expected == pytest.approx(stats.norm.ppf(filliben_medians(n)[kept_ranks(n)], 10.0, 2.0), rel=1e-12)
    assert np.array_equal(view.actual, readings[kept_ranks(n)])


def test_a_family_on_the_log_axis_is_plotted_in_logarithms_and_says_so() -> None:
    readings = np.exp(normal_sample(40) / 10)
    view = quantile_view(readings, 40, "Weibull", "filliben", 1.0, 0.5)
    assert view.actual == pytest.approx(np.log(readings))
    expected = np.log(stats.weibull_min.ppf(filliben_medians(40), 1 / 0.5, scale=math.e))
    assert view.expected == pytest.approx(expected, rel=1e-9)
    lines = quantile_plot(view, width=60, height=20, charset=Charset.UNICODE)
    assert lines[0].startswith("ln of actual")
    assert lines[-1].strip() == "expected if Weibull"


@pytest.mark.parametrize("charset", list(Charset))
@pytest.mark.parametrize(("width", "height"), [(20, 6), (33, 11), (60, 20), (140, 45)])
def test_every_line_has_exactly_the_width_asked_for(charset: Charset, width: int, height: int) -> None:
    lines = drawn(normal_sample(300), width=width, height=height, charset=charset)
    assert [len(line) for line in lines] == [width] * height


@pytest.mark.parametrize("width", range(19))
@pytest.mark.parametrize("height", [0, 1, 3, 5, 6])
def test_too_little_room_gives_text_of_that_size(width: int, height: int) -> None:
    lines = drawn(normal_sample(30), width=width, height=height)
    assert lines == [] or [len(line) for line in lines] == [width] * height


@pytest.mark.parametrize("family", ["normal", "lognormal", "Cauchy", "Weibull"])
def test_the_plain_charset_is_ascii_to_the_last_character(family: str) -> None:
    readings = np.exp(normal_sample(600) / 5)
    view = quantile_view(readings[kept_ranks(600)], 600, family, "blom", 2.0, 0.4)
    lines = quantile_plot(view, width=70, height=24, charset=Charset.ASCII)
    assert "".join(lines).isascii()
    assert "o" in "".join(lines[1:-1])
    assert "." in "".join(lines[1:-1])


def test_points_lie_on_the_line_when_actual_equals_expected() -> None:
    exact = stats.norm.ppf(filliben_medians(400))
    view = quantile_view(exact[kept_ranks(400)], 400, "normal", "filliben", 0.0, 1.0)
    lines = quantile_plot(view, width=60, height=26, charset=Charset.ASCII)
    columns = [[k for k, mark in enumerate(line) if mark == "o"] for line in lines[2:-3]]
    middles = [sum(marks) / len(marks) for marks in columns if marks]
    steps = np.diff(middles)
    assert len(middles) > 15
    assert (steps < 0).all()
    assert np.abs(steps - steps.mean()).max() < 2.0


def test_an_outlying_reading_is_drawn_however_many_others_there_are() -> None:
    readings = np.append(normal_sample(100_000), 40.0)
    lines = drawn(readings, charset=Charset.ASCII)
    assert "o" in lines[2] + lines[3]
    assert lines[2].count("o") + lines[3].count("o") == 1


@pytest.mark.parametrize(("offset", "scale"), [(1e9, 1.0), (0.0, 1e300), (0.0, 1e-300), (-5e15, 8.0)])
def test_the_drawing_does_not_depend_on_location_and_scale(offset: float, scale: float) -> None:
    standard = normal_sample(80)
    plain = quantile_plot(
        quantile_view(standard, 80, "normal", "filliben", 10.0, 2.0), width=60, height=20, charset=Charset.ASCII
    )
    moved = quantile_plot(
        quantile_view(offset + scale * standard, 80, "normal", "filliben", offset + scale * 10.0, scale * 2.0),
        width=60,
        height=20,
        charset=Charset.ASCII,
    )
    assert sum(line.count("o") for line in moved[2:-3]) == pytest.approx(
        sum(line.count("o") for line in plain[2:-3]), abs=8
    )


@pytest.mark.parametrize(
    ("points", "n", "family", "location", "scale", "said"),
    [
        ([], 0, "normal", math.nan, math.nan, "No readings to plot."),
        ([3.2] * 5, 5, "normal", 3.2, 0.0, "All readings are equal (3.2)"),
        ([-1.0, 2.0, 3.0], 3, "Weibull", math.nan, math.nan, "Outside the support"),
        ([1.0, 2.0, 3.0], 3, "normal", math.nan, math.nan, "was not fitted"),
    ],
)
def test_what_cannot_be_plotted_is_said_in_a_sentence(
    points: list[float], n: int, family: str, location: float, scale: float, said: str
) -> None:
    view = quantile_view(np.array(points), n, family, "filliben", location, scale)
    lines = quantile_plot(view, width=40, height=10, charset=Charset.ASCII)
    assert said in " ".join(" ".join(lines).split())
    assert [len(line) for line in lines] == [40] * 10


def test_plots_drawn_at_the_same_time_are_those_drawn_one_after_another() -> None:
    samples = [normal_sample(50 + 10 * k, seed=k) for k in range(12)]
    alone = [drawn(sample) for sample in samples]
    together: dict[int, list[str]] = {}

    def work(k: int) -> None:
        for _ in range(5):
            together[k] = drawn(samples[k])

    threads = [threading.Thread(target=work, args=(k,)) for k in range(12)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert [together[k] for k in range(12)] == alone


def test_a_view_made_by_hand_is_drawn() -> None:
    view = QuantileView(np.array([1.0, 2.0]), np.array([1.1, 1.9]), "actual", "expected")
    assert any("•" in line for line in quantile_plot(view, width=30, height=10, charset=Charset.UNICODE))


def view_of_normal(n: int = 300) -> QuantileView:
    readings = np.sort(np.random.default_rng(n).normal(5.0, 2.0, n))
    return quantile_view(readings, n, "normal", "filliben", 5.0, 2.0)


def test_the_difference_is_actual_minus_expected_and_its_line_is_level() -> None:
    view = view_of_normal()
    difference = difference_of(view)
    np.testing.assert_allclose(difference.actual, view.actual - view.expected)
    assert difference.low is not None
    assert view.low is not None
    np.testing.assert_allclose(difference.low + view.expected, view.low)
    lines = quantile_plot(difference, width=60, height=20, charset=Charset.ASCII)
    assert lines[0].startswith("actual minus expected")
    assert max(line.count(".") for line in lines) > 25


@pytest.mark.parametrize("upper", [True, False])
def test_a_tail_is_shown_to_its_last_reading(*, upper: bool) -> None:
    view = view_of_normal()
    tail = tail_of(view, upper=upper)
    assert 8 <= tail.actual.size < 100
    assert tail.actual[-1 if upper else 0] == view.actual[-1 if upper else 0]
    assert tail.low is not None
    assert tail.low.size == tail.actual.size


def test_families_without_a_band_are_drawn_without() -> None:
    readings = np.sort(np.random.default_rng(1).exponential(size=50))
    assert quantile_view(readings, 50, "exponential", "filliben", 0.0, 1.0).low is None


def test_the_band_is_drawn_on_both_sides_of_the_line() -> None:
    lines = quantile_plot(difference_of(view_of_normal()), width=60, height=20, charset=Charset.ASCII)
    level = next(k for k, line in enumerate(lines) if line.count(".") > 25)
    assert sum(line.count(":") for line in lines[:level]) > 10
    assert sum(line.count(":") for line in lines[level + 1 :]) > 10
