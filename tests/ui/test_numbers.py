"""Numbers in table cells."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from screener.ui.numbers import count_text, p_text, r_text, reading_text, seconds_text, size_text

CELL = {"p": 7, "r": 10, "n": 7}


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (0.532, "0.5320"),
        (0.0123, "0.0123"),
        (0.00098, "9.8e-4"),
        (3.21e-9, "3.2e-9"),
        (1e-120, "1.0e-120"),
        (1.0, "1.0000"),
    ],
)
def test_p_is_written_as_people_write_it(value: float, text: str) -> None:
    assert p_text(value) == text


@given(st.floats(min_value=0.0, max_value=1.0, exclude_min=True))
def test_p_is_never_shown_as_0_nor_as_1_unless_it_is(value: float) -> None:
    text = p_text(value)
    assert float(text.lstrip("<>")) > 0
    assert value == 1 or text != "1.0000"


@given(st.floats(min_value=1e-99, max_value=1.0))
def test_p_fits_its_column(value: float) -> None:
    assert len(p_text(value)) <= CELL["p"]


@pytest.mark.parametrize(
    ("value", "text"),
    [(0.91234, "0.9123"), (0.991234, "0.99123"), (0.9995838, "0.999584"), (0.99999816, "0.99999816"), (1.0, "1.0000")],
)
def test_r_keeps_three_digits_of_its_distance_from_one(value: float, text: str) -> None:
    assert r_text(value) == text


@given(st.floats(min_value=-1.0, max_value=1.0))
def test_r_is_never_shown_as_1_unless_it_is_and_fits_its_column(value: float) -> None:
    text = r_text(value)
    assert value == 1.0 or text.startswith(">") or float(text) < 1.0
    assert len(text) <= CELL["r"] + 1


@given(st.floats(min_value=0.5, max_value=0.999999), st.floats(min_value=0.02, max_value=0.9))
def test_two_values_of_r_that_differ_by_two_percent_of_the_distance_from_one_look_different(
    value: float, part: float
) -> None:
    assert r_text(value) != r_text(value - part * (1 - value))


@given(st.integers(min_value=0, max_value=10**11))
def test_counts_fit_their_column_and_say_the_count(value: int) -> None:
    text = count_text(value)
    assert len(text) <= CELL["n"]
    said = float(text.rstrip("M").replace(",", "")) * (1e6 if text.endswith("M") else 1)
    assert said == pytest.approx(value, rel=1e-3)


@pytest.mark.parametrize("write", [p_text, r_text, size_text, reading_text])
def test_what_is_absent_is_blank(write: object) -> None:
    assert callable(write)
    assert write(None) == ""
    assert write(math.nan) == ""


def test_readings_are_written_to_six_figures() -> None:
    assert [reading_text(value) for value in (210.0254321, -1.5, 6.02e23, 1e-7)] == [
        "210.025",
        "-1.5",
        "6.02e23",
        "1e-7",
    ]


def test_durations_are_written_as_people_wait() -> None:
    assert [seconds_text(value) for value in (0.2, 12.4, 89, 600, 3600 * 2 + 300)] == [
        "under 1 s",
        "12 s",
        "89 s",
        "10 min",
        "2 h 5 min",
    ]
