"""Names as shown, units, and equal names told apart."""

import pytest

from screener.tables.names import labels, shortlist, unit_of, visible


@pytest.mark.parametrize(
    ("written", "shown"),
    [
        ("plain", "plain"),
        ("  padded ", "padded"),
        ("bell\x07", "bell\\x07"),
        ("\x1b[31mred", "\\x1b[31mred"),
        ("left\u202eright", "left\\u202eright"),
        ("zero\u200bwidth", "zero\\u200bwidth"),
        ("lone\ud800", "lone\\ud800"),
        ("two\nlines", "two lines"),
        ("two \r\n lines", "two lines"),
        ("hard\u00a0blank", "hard blank"),
        ("Öldruck [bar]", "Öldruck [bar]"),
        ("tag\U000e0041", "tag\\U000e0041"),
    ],
)
def test_unprintable_characters_are_made_visible(written: str, shown: str) -> None:
    assert visible(written) == shown
    assert visible(written).isprintable()


@pytest.mark.parametrize(
    ("name", "unit"),
    [
        ("pressure [bar]", "bar"),
        ("pressure (bar)", "bar"),
        ("flow [ l/min ]", "l/min"),
        ("temp (°C)", "°C"),
        ("pressure", ""),
        ("temp (2)", ""),
        ("load (max)", ""),
        ("[bar]", ""),
        ("length (as measured by the operator)", ""),
    ],
)
def test_the_unit_is_what_stands_in_brackets_at_the_end(name: str, unit: str) -> None:
    assert unit_of(name) == unit


def test_equal_names_get_numbers_that_no_other_column_has() -> None:
    made, remarks = labels(["temp", "temp", "temp (2)", "temp"])
    assert [label.name for label in made] == ["temp", "temp (3)", "temp (2)", "temp (4)"]
    assert remarks == ("3 columns are called 'temp'; they are shown as temp, temp (3), temp (4).",)


def test_a_repeated_name_keeps_its_unit() -> None:
    made, _ = labels(["p [bar]", "p [bar]"])
    assert [(label.name, label.unit) for label in made] == [("p [bar]", "bar"), ("p [bar] (2)", "bar")]


def test_names_that_become_equal_when_shown_are_told_apart() -> None:
    made, _ = labels(["a\x07", "a\\x07"])
    assert [label.name for label in made] == ["a\\x07", "a\\x07 (2)"]


def test_a_column_without_a_name_is_called_by_its_place() -> None:
    made, remarks = labels(["a", " ", "b"])
    assert [label.name for label in made] == ["a", "column 2", "b"]
    assert remarks == ("A column without a name is called by its place: column 2.",)


def test_many_repeated_names_do_not_flood_the_remarks() -> None:
    _, remarks = labels([f"n{number // 2}" for number in range(40)])
    assert len(remarks) == 6
    assert remarks[-1] == "15 more names occur more than once; each repetition carries its number."


def test_a_shortlist_says_how_many_are_left_out() -> None:
    assert shortlist(["a", "b"]) == "a, b"
    assert shortlist(["a", "b", "c", "d", "e"]) == "a, b, c and 2 more"
