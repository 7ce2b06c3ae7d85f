"""What the environment says about the terminal."""

import pytest

from screener.ui.abilities import abilities, refusal


@pytest.mark.parametrize(
    ("environment", "unicode"),
    [
        ({"LANG": "en_GB.UTF-8"}, True),
        ({"LANG": "C.utf8"}, True),
        ({"LC_ALL": "C.UTF-8", "LANG": "C"}, True),
        ({"LC_CTYPE": "UTF-8", "LANG": "de_DE.ISO8859-1"}, True),
        ({"LC_ALL": "C", "LANG": "en_GB.UTF-8"}, False),
        ({"LANG": "C"}, False),
        ({"LANG": "C", "LC_CTYPE": "C.UTF-8"}, False),
        ({}, False),
        ({"LANG": "de_DE.ISO8859-1"}, False),
        ({"LANG": "en_GB.UTF-8", "NO_COLOR": "1"}, False),
        ({"LANG": "en_GB.UTF-8", "TERM": "linux"}, False),
        ({"LANG": "en_GB.UTF-8", "TERM": "vt100"}, False),
        ({"LANG": "en_GB.UTF-8", "TERM": "tmux-256color"}, True),
    ],
)
def test_more_than_ascii_is_used_only_where_it_is_declared(environment: dict[str, str], *, unicode: bool) -> None:
    assert abilities({"TERM": "xterm", **environment}).unicode is unicode


@pytest.mark.parametrize("term", ["dumb", "unknown", ""])
def test_a_terminal_that_cannot_place_text_is_refused_in_a_sentence_with_the_way_out(term: str) -> None:
    assert "screener score" in refusal({"TERM": term})
    assert refusal({}) != ""


@pytest.mark.parametrize("term", ["xterm-256color", "screen", "tmux", "linux", "vt100"])
def test_other_terminals_are_not_refused(term: str) -> None:
    assert refusal({"TERM": term}) == ""
