"""The lines above the plot."""

from typing import Any

import pytest

from screener.ui.drawing import Drawing, Wanted
from screener.ui.widgets.plot_panel import head

FIT: dict[str, Any] = {
    "family": "gamma",
    "r": 0.9775,
    "critical_r": 0.999584,
    "p": 2.7e-18,
    "extrapolated": True,
    "location": 210.0254,
    "scale": 0.4873,
    "shape_1": 3.25,
    "shape_2": None,
    "note": "",
}


def told(fit: dict[str, Any], *, unit: str = "bar", channel: str = "outlet_1", reason: str = "") -> list[str]:
    """The text of the lines."""
    wanted = Wanted(0, 4000, "gamma", 60, 20)
    lines = head(Drawing(wanted, channel, unit, ("normal", "gamma"), fit, (), reason=reason))
    return ["".join(text for text, _ in line) for line in lines]


def test_name_family_r_beside_its_critical_value_p_and_parameters_are_told() -> None:
    assert told(FIT) == [
        "outlet_1 [bar]   n 4,000",
        "gamma 2/2   quantile",
        "r 0.9775 ! below critical 0.999584",
        "p 2.7e-18 (extrapolated)",
        "location 210.025   scale 0.4873   shape 3.25",
    ]


def test_a_channel_above_its_critical_value_carries_no_mark() -> None:
    assert told({**FIT, "r": 0.9998})[2] == "r 0.999800 not below critical 0.999584"


@pytest.mark.parametrize(("note", "said"), [("outside support", "outside support"), ("", "not fitted")])
def test_a_family_without_a_fit_says_why(note: str, said: str) -> None:
    absent = dict.fromkeys(("r", "critical_r", "p", "location", "scale", "shape_1"))
    assert told({**FIT, **absent, "note": note})[2:] == [said, "", ""]


def test_a_channel_that_is_not_scored_says_why_instead_of_p() -> None:
    lines = told({**FIT, "critical_r": None, "p": None}, reason="drifting: effective n 4")
    assert lines[2:4] == ["r 0.9775", "- not scored: drifting: effective n 4"]


def test_a_unit_that_the_name_already_has_is_not_repeated() -> None:
    assert told(FIT, channel="outlet_1 [bar]")[0] == "outlet_1 [bar]   n 4,000"


def test_control_characters_in_a_name_are_written_out() -> None:
    assert "\x1b" not in told(FIT, channel="a\x1b[2J", unit="\x9b")[0]


def test_a_matched_critical_value_stands_before_the_textbook_one() -> None:
    lines = told({**FIT, "critical_r": 0.97, "plain_critical_r": 0.9996})
    assert lines[2:4] == [
        "r 0.9775 not below critical 0.9700 (matched)",
        "p 2.7e-18 (extrapolated)   textbook 0.999600",
    ]
