"""Untrusted text on its way to the terminal."""

import unicodedata

from hypothesis import given
from hypothesis import strategies as st
from rich.cells import cell_len
from rich.segment import Segment
from textual.color import Color

from screener.ui.filters import AsciiOnly, Colourless, Harmless
from screener.ui.shown import ascii_only, fitted, fitted_name, shown

BLACK = Color(0, 0, 0)
BIDIRECTIONAL = {"LRE", "RLE", "LRO", "RLO", "PDF", "LRI", "RLI", "FSI", "PDI"}


@given(st.text())
def test_shown_text_has_no_control_and_no_bidirectional_character(text: str) -> None:
    for character in shown(text):
        assert unicodedata.category(character) not in {"Cc", "Cs", "Zl", "Zp"}
        assert unicodedata.bidirectional(character) not in BIDIRECTIONAL


def test_escape_sequences_are_written_out() -> None:
    assert shown("a\x1b[31mred\x9b0m\u202eb\n") == "a\\x1b[31mred\\x9b0m\\u202eb\\n"


def test_ordinary_text_and_markup_stay_as_they_are() -> None:
    text = "[bold]Öldruck[/] µm 温度 [@click=app.quit]x[/]"
    assert shown(text) == text


@given(st.text(st.characters(exclude_categories=("Cc", "Cs"))), st.integers(min_value=0, max_value=30))
def test_fitted_text_takes_exactly_its_cells(text: str, width: int) -> None:
    safe = shown(text)
    assert cell_len(fitted(safe, width)) == width
    assert cell_len(fitted(safe, width, right=True)) == width
    assert cell_len(fitted_name(safe, width)) == width


def test_a_long_name_keeps_both_its_ends() -> None:
    assert fitted_name("outlet_pressure_017", 12) == "outlet~e_017"


@given(st.text())
def test_ascii_text_is_ascii(text: str) -> None:
    assert ascii_only(text).isascii()


@given(st.text())
def test_the_last_filters_let_nothing_unsafe_and_nothing_but_ascii_through(text: str) -> None:
    segments = AsciiOnly().apply(Harmless().apply([Segment(text)], BLACK), BLACK)
    passed = "".join(segment.text for segment in segments)
    assert passed.isascii()
    assert passed == "" or passed.isprintable()


def test_frames_become_plain_frames_of_the_same_width() -> None:
    (segment,) = AsciiOnly().apply([Segment("┌─▐█…温")], BLACK)
    assert segment.text == "+-|#.??"


def test_without_colour_the_other_attributes_stay() -> None:
    from rich.style import Style

    (segment,) = Colourless().apply([Segment("x", Style(color="red", bgcolor="blue", bold=True, reverse=True))], BLACK)
    assert segment.style is not None
    assert (segment.style.color, segment.style.bgcolor) == (None, None)
    assert (segment.style.bold, segment.style.reverse) == (True, True)
