"""Tables made to mislead: every name and cell is shown, never interpreted, and no content gives a traceback."""

import zipfile
from dataclasses import replace
from pathlib import Path

import polars as pl
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from screener.errors import ScreenerError, TableError
from screener.records import Plan, TableFacts
from screener.tables import open_table, spans
from tests.tables.conftest import opened

SETTINGS = settings(max_examples=100, suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)
EVIL = [
    "\x1b[2J\x1b[31mred",
    "[red]b[/] [@click=app.quit]x[/]",
    "left\u202etfel",
    "\u2066iso\u2069",
    "bell\x07\x08",
    "=cmd|' /C calc'!A0",
    "n" * 10_000,
    "zero\u200bwidth",
    "c1\x9b31m",
]


def texts_of(facts: TableFacts) -> list[str]:
    """Everything that a screen would show of a table."""
    return [
        *(text for channel in facts.channels for text in (channel.name, channel.unit)),
        *(text for column in facts.set_aside for text in (column.name, column.reason)),
        *facts.remarks,
        facts.dialect,
        *(file.name for file in facts.files),
        *(proposal.sentence() for proposal in facts.proposals),
    ]


@pytest.mark.parametrize("name", ["t.csv", "t.parquet", "t.ndjson", "t.xlsx"])
def test_names_and_cells_with_control_characters_are_made_visible(tmp_path: Path, name: str) -> None:
    path = tmp_path / name
    frame = pl.DataFrame({evil: [str(at * at), "1.5", evil[:50], "7", "2"] for at, evil in enumerate(EVIL)})
    match path.suffix:
        case ".csv":
            frame.write_csv(path)
        case ".parquet":
            frame.write_parquet(path)
        case ".ndjson":
            frame.write_ndjson(path)
        case _:
            import xlsxwriter

            with xlsxwriter.Workbook(path, {"strings_to_formulas": False}) as book:
                sheet = book.add_worksheet()
                for column, (evil, cells) in enumerate(frame.to_dict(as_series=False).items()):
                    sheet.write_string(0, column, evil)
                    for row, cell in enumerate(cells, 1):
                        sheet.write_string(row, column, cell)
    table = opened(path)
    assert len(table.names) + len(table.reasons) == len(EVIL)
    assert [text for text in texts_of(table.facts) if not text.isprintable()] == []


@SETTINGS
@given(name=st.text(min_size=1, max_size=40), cell=st.text(max_size=20), unit=st.text(max_size=12))
def test_whatever_is_written_in_a_table_can_be_shown(tmp_path: Path, name: str, cell: str, unit: str) -> None:
    path = tmp_path / "t.csv"
    frame = pl.DataFrame({"a": [unit, "1", "4", cell, "2", "9"], name + "x": [unit, "1", cell, "4", "2.5", "7"]})
    path.write_bytes(frame.write_csv().encode("utf-8", "replace"))
    try:
        table = open_table(path, Plan())
    except ScreenerError as error:
        assert str(error).isprintable()
    else:
        assert [text for text in texts_of(table.facts) if not text.isprintable()] == []


@SETTINGS
@given(
    content=st.binary(max_size=300) | st.text(alphabet="a1,;\t |\n\r\"' .-+e<>%#:µ０\0", max_size=120).map(str.encode),
    start=st.sampled_from([b"", b"\xff\xfe", b"\xfe\xff", b"PAR1", b"# ", b"\xef\xbb\xbf", b'{"a": ', b"\x1f\x8b"]),
    plan=st.builds(
        replace,
        st.just(Plan()),
        separator=st.sampled_from(["", ";", "space", "x"]),
        decimal=st.sampled_from(["", ",", "."]),
        header_line=st.integers(-1, 9),
        units_line=st.integers(-1, 9),
        encoding=st.sampled_from(["", "utf-16", "cp1252", "utf-8", "utf-32", "idna"]),
        comment=st.sampled_from(["", "#", "1"]),
        shape=st.sampled_from(["", "rows", "long", "columns"]),
    ),
    held_bytes=st.sampled_from([0, 1 << 30]),
)
def test_no_content_and_no_plan_give_a_traceback(
    tmp_path: Path, content: bytes, start: bytes, plan: Plan, held_bytes: int
) -> None:
    path = tmp_path / "x.csv"
    path.write_bytes(start + content)
    try:
        table = open_table(path, plan, held_bytes=held_bytes)
    except ScreenerError as error:
        assert "\n" not in str(error)
    else:
        assert all(table.read(span).readings.shape[1] == table.facts.rows for span in spans(table.facts))


@pytest.mark.parametrize(
    "name", ["a b.csv", "-x.csv", "'\"$(ls).csv", "zeile\n.csv", "\x1b[31m.csv", "[1]*.csv", "ü" * 80]
)
def test_a_path_with_odd_characters_is_read(tmp_path: Path, name: str) -> None:
    (tmp_path / name).write_text("a,b\n1,2\n4,9\n2,3\n")
    assert opened(tmp_path / name).names == ["a", "b"]
    (tmp_path / name).unlink()
    with pytest.raises(TableError) as caught:
        open_table(tmp_path / name, Plan())
    assert str(caught.value).isprintable()


def test_a_spreadsheet_that_expands_beyond_all_tables_is_refused(tmp_path: Path) -> None:
    with zipfile.ZipFile(tmp_path / "t.xlsx", "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("xl/workbook.xml", b"<workbook/>")
        with archive.open("xl/worksheets/sheet1.xml", "w", force_zip64=True) as member:
            for _ in range(300):
                member.write(bytes(1 << 20))
    with pytest.raises(TableError, match="which no table of readings does"):
        open_table(tmp_path / "t.xlsx", Plan())


def test_a_parquet_file_of_more_rows_than_memory_has_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "t.parquet"
    pl.select(a=pl.repeat(1.5, 3_000_000)).write_parquet(path)
    with pytest.raises(TableError, match="one channel of 3,000,000 readings takes"):
        open_table(path, Plan(), most_bytes=1_000_000)
