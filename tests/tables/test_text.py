"""Text tables: separators, headers, encodings, cells, uneven rows."""

import gzip
from math import inf, isnan

import numpy as np
import polars as pl
import pytest
from numpy.testing import assert_array_equal

from screener.records import Plan
from tests.tables.conftest import Opened, OpenText


def same(opened: Opened, expected: dict[str, list[float | None]]) -> None:
    """The channels are these, with these readings; None is missing."""
    assert opened.names == list(expected)
    assert_array_equal(opened.readings, np.array(list(expected.values()), dtype=np.float64))


@pytest.mark.parametrize("separator", [",", ";", "\t"])
@pytest.mark.parametrize("name", ["t.csv", "t.txt", "t"])
def test_the_separator_is_found_from_the_first_lines(open_text: OpenText, separator: str, name: str) -> None:
    rows = [["a", "b"], ["1.5", "2"], ["3", "-4e2"]]
    text = "\n".join(separator.join(row) for row in rows)
    same(open_text(text, name=name), {"a": [1.5, 3], "b": [2, -400]})


def test_a_comma_inside_names_does_not_hide_the_semicolon(open_text: OpenText) -> None:
    same(open_text("t, s;p, bar\n1;2\n4;9\n"), {"t, s": [1, 4], "p, bar": [2, 9]})


def test_the_extension_decides_for_tabs(open_text: OpenText) -> None:
    opened = open_text("a,x\tb,y\n1\t2\n4\t9\n", name="t.tsv")
    same(opened, {"a,x": [1, 4], "b,y": [2, 9]})
    assert opened.facts.format == "TSV"


def test_a_decimal_comma_is_voted_for_by_the_cells(open_text: OpenText) -> None:
    opened = open_text("a;b\n1,5;2\n-3,25;4e1\n,5;OVER\n")
    same(opened, {"a": [1.5, -3.25, 0.5], "b": [2, 40, None]})
    assert opened.facts.format == "CSV (semicolon, decimal comma)"


@pytest.mark.parametrize("ending", ["\n", "\r\n", "\r"])
@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252"])
def test_line_ends_and_encodings_do_not_matter(open_text: OpenText, ending: str, encoding: str) -> None:
    text = ending.join(["Öl [°C],b", "1,2", "3,5", ""])
    opened = open_text(text.encode(encoding))
    same(opened, {"Öl [°C]": [1, 3], "b": [2, 5]})
    assert opened.facts.channels[0].unit == "°C"


def test_text_that_turns_out_not_to_be_utf8_late_is_still_read(open_text: OpenText) -> None:
    opened = open_text(b"a,note\n" + b"1,ok\n2.5,ok\n" * 40_000 + b"9,20\xb0\n")
    assert opened.of("a")[-1] == 9
    assert opened.reasons["note"].startswith("text")


def test_compressed_text_reads_as_the_plain_text_does(open_text: OpenText, tmp_path: str) -> None:
    frame = pl.DataFrame({"a": [1.5, 2.25, 9.0], "b": [3.0, 1.0, 2.0]})
    gz = open_text(gzip.compress(frame.write_csv().encode()), name="t.csv.gz")
    frame.write_csv(f"{tmp_path}/made.zst", compression="zstd", check_extension=False)
    with open(f"{tmp_path}/made.zst", "rb") as file:  # noqa: PTH123
        zst = open_text(file.read(), name="t.csv.zst")
    for opened, label in ((gz, "CSV (gzip)"), (zst, "CSV (zstd)")):
        same(opened, {"a": [1.5, 2.25, 9], "b": [3, 1, 2]})
        assert opened.facts.format == label


def test_compression_is_known_by_content_not_by_extension(open_text: OpenText) -> None:
    same(open_text(gzip.compress(b"a\n1\n4\n"), name="t.csv"), {"a": [1, 4]})
    same(open_text(b"a\n1\n4\n", name="t.csv.gz"), {"a": [1, 4]})


def test_a_quoted_name_over_two_lines_is_one_name(open_text: OpenText) -> None:
    same(open_text('a,"press\nure [bar]"\n1,2\n4,9\n'), {"a": [1, 4], "press ure [bar]": [2, 9]})


def test_blank_lines_before_the_header_are_passed_over(open_text: OpenText) -> None:
    same(open_text("\n\na,b\n1,2\n4,9\n"), {"a": [1, 4], "b": [2, 9]})


def test_a_first_line_of_numbers_is_read_as_readings_and_said(open_text: OpenText) -> None:
    opened = open_text("1,2.5\n4,9\n7,1\n")
    same(opened, {"column 1": [1, 4, 7], "column 2": [2.5, 9, 1]})
    assert "The first line holds only numbers" in opened.facts.remarks[0]


@pytest.mark.parametrize("token", ["", " ", "NA", "N/A", "nan", "NaN", "null", "NULL", "-", "--", " NA "])
@pytest.mark.parametrize("row", [0, 70])
def test_the_usual_missing_tokens_are_missing_and_no_words(open_text: OpenText, token: str, row: int) -> None:
    cells = [f"{value * value}" for value in range(100)]
    cells[row] = token
    opened = open_text("a,b\n" + "".join(f"{cell},{place % 7}\n" for place, cell in enumerate(cells)))
    assert [place for place, value in enumerate(opened.of("a")) if isnan(value)] == [row]
    assert opened.facts.remarks == ()


@pytest.mark.parametrize("row", [1, 90])
def test_words_among_numbers_become_missing_and_are_counted(open_text: OpenText, row: int) -> None:
    a = [f"{value * value}" for value in range(100)]
    b = [f"{value % 7} " for value in range(100)]
    a[row] = a[row + 2] = b[row] = "OVER"
    b[row + 1] = "\x1b[0m"
    opened = open_text("a,b\n" + "".join(f"{x},{y}\n" for x, y in zip(a, b, strict=True)))
    assert [place for place, value in enumerate(opened.of("a")) if isnan(value)] == [row, row + 2]
    assert [place for place, value in enumerate(opened.of("b")) if isnan(value)] == [row, row + 1]
    assert opened.of("b")[row + 3] == (row + 3) % 7
    assert opened.facts.remarks == (
        "3 cells hold 'OVER' in a, b: read as missing.",
        "1 cell holds '\\\\x1b[0m' in b: read as missing.",
    )


def test_the_plan_s_missing_words_are_missing_and_not_remarked(open_text: OpenText) -> None:
    opened = open_text("a,b\n1,2\nOVER,3\n4,9\n", Plan(missing=("OVER",)))
    same(opened, {"a": [1, None, 4], "b": [2, 3, 9]})
    assert opened.facts.remarks == ()


def test_a_missing_code_that_is_a_number_is_met_in_any_writing(open_text: OpenText) -> None:
    opened = open_text("a,b\n1,-9999\n-9999.0,3\n-9.999e3,9\n4,1\n", Plan(missing=("-9999",)))
    same(opened, {"a": [1, None, None, 4], "b": [None, 3, 9, 1]})
    assert opened.facts.remarks == ("3 cells are -9999: read as missing, as asked.",)


def test_infinite_values_stay_infinite(open_text: OpenText) -> None:
    same(open_text("a,b\n1,inf\n2.5,-inf\n9,1e400\n"), {"a": [1, 2.5, 9], "b": [inf, -inf, inf]})


def test_blanks_around_numbers_lose_no_reading(open_text: OpenText) -> None:
    same(open_text('a, b\n 1.5 ,2 \n"3 "," 4"\n'), {"a": [1.5, 3], "b": [2, 4]})


def test_short_rows_are_filled_with_missing_readings_and_counted(open_text: OpenText) -> None:
    opened = open_text("a,b,c\n1,2,3\n4\n5,6\n7,8,1\n")
    same(opened, {"a": [1, 4, 5, 7], "b": [2, None, 6, 8], "c": [3, None, None, 1]})
    assert opened.facts.remarks == (
        "2 rows (first: line 3) have fewer cells than the header: the absent cells are missing readings.",
    )


def test_long_rows_lose_their_extra_cells_and_are_counted(open_text: OpenText) -> None:
    opened = open_text("a,b\n1,2\n4,9,77,78\n5,1\n")
    same(opened, {"a": [1, 4, 5], "b": [2, 9, 1]})
    assert opened.facts.remarks == ("1 row (line 3) has more cells than the header: the extra cells were ignored.",)


def test_a_separator_at_the_end_of_each_row_adds_no_channel(open_text: OpenText) -> None:
    same(open_text("a,b\n1,2,\n4,9,\n"), {"a": [1, 4], "b": [2, 9]})
    opened = open_text("a,b,\n1,2,\n4,9,\n")
    same(opened, {"a": [1, 4], "b": [2, 9]})
    assert opened.reasons == {"column 3": "empty: no readings"}


def test_blank_lines_within_are_left_out_and_counted(open_text: OpenText) -> None:
    opened = open_text("a,b\n1,2\n\n4,9\n\n\n")
    same(opened, {"a": [1, 4], "b": [2, 9]})
    assert opened.facts.rows == 2
    assert opened.facts.remarks == ("1 blank line was left out.",)


def test_a_blank_line_in_a_table_of_one_column_is_a_missing_reading(open_text: OpenText) -> None:
    same(open_text("a\n1\n\n4\n\n"), {"a": [1, None, 4]})


def test_uneven_rows_are_counted_right_beside_quoted_cells_over_several_lines(open_text: OpenText) -> None:
    opened = open_text('n,a,b\n"x\ny, z",1,2\nw,4\n\n"v,u",5,9\n')
    same(opened, {"a": [1, 4, 5], "b": [2, None, 9]})
    assert opened.facts.remarks == (
        "1 row (line 4) has fewer cells than the header: the absent cells are missing readings.",
        "1 blank line was left out.",
    )


def test_separators_inside_quotes_are_no_extra_cells(open_text: OpenText) -> None:
    opened = open_text('n,a,b\n"x, y, z",1,2\nw,4\n')
    same(opened, {"a": [1, 4], "b": [2, None]})
    assert "1 row (line 3) has fewer cells" in opened.facts.remarks[0]


def test_equal_and_absent_names_are_remarked(open_text: OpenText) -> None:
    opened = open_text("t,t,,t\n1,2,3,4\n5,7,9,1\n")
    assert opened.names == ["t", "t (2)", "column 3", "t (3)"]
    assert opened.of("t (2)") == [2, 7]
    assert len(opened.facts.remarks) == 2


@pytest.mark.parametrize("separator", [",", ";", "\t"])
def test_twenty_thousand_columns_are_read(open_text: OpenText, separator: str) -> None:
    rows = [[f"channel {at}" for at in range(20_000)], ["1.5"] * 20_000, [str(at) for at in range(20_000)]]
    opened = open_text("\n".join(separator.join(row) for row in rows))
    assert_array_equal(opened.readings, [[1.5, at] for at in range(20_000)])
    assert opened.names == rows[0]


def test_a_row_with_a_very_long_cell_is_read(open_text: OpenText) -> None:
    same(open_text(f"a,note\n1,{'x' * 300_000}\n4,y\n"), {"a": [1, 4]})


@pytest.mark.parametrize("end", ["\n", "\r\n"])
@pytest.mark.parametrize("at", [0, 150, 5_000, 700_000, 1_199_999])
def test_a_line_that_ends_otherwise_far_below_the_first_is_a_line(open_text: OpenText, end: str, at: int) -> None:
    count = 1_200_000 if at > 5_000 else 6_000
    rows = [f"{k % 9},{k % 7}{end}" for k in range(count)]
    rows[at] = f"{at % 9},{at % 7}\r"
    opened = open_text("a,b" + end + "".join(rows))
    assert_array_equal(opened.readings, [np.arange(count) % 9, np.arange(count) % 7])
    assert opened.facts.dialect == ("comma, lines end in carriage returns" if at < count - 1 else "comma")
