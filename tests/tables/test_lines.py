"""The lines of a text, a piece at a time."""

import csv
import gzip
from pathlib import Path

import polars as pl
import pytest
from hypothesis import given
from hypothesis import strategies as st

from screener.tables.cells import BLANKS
from screener.tables.lines import each_line, measured_lines

CELL = st.sampled_from(["", "1.5", " ", "x y", "é", '"a;b"', '"q"', "\0", "\u00a0", "-"])
LINES = st.lists(st.lists(CELL, min_size=1, max_size=5).map(";".join), min_size=1, max_size=20)


@given(lines=LINES, end=st.sampled_from(["\n", "\r\n"]), ended=st.booleans())
def test_cells_are_counted_as_csv_reads_them_and_blank_lines_have_none(lines: list[str], end: str, ended: bool) -> None:
    lines = [*lines, "last"]
    content = (end.join(lines) + (end if ended else "")).encode()
    measured = list(measured_lines(content, ";"))
    counted = [count for piece in measured for count in piece.cells.tolist()]
    rows = [next(csv.reader([line], delimiter=";"), []) for line in lines]
    assert counted == [0 if not line.strip(BLANKS) else len(row) for line, row in zip(lines, rows, strict=True)]
    assert [piece.text(at) for piece in measured for at in range(len(piece.cells))] == lines
    assert list(each_line(content)) == lines


@pytest.mark.parametrize("kind", ["plain", "gzip", "zstd"])
def test_lines_across_the_edges_of_pieces_are_whole(tmp_path: Path, kind: str) -> None:
    lines = ["," * (at % 50) + "x" * (at % 300_000) for at in range(77_777, 3_000_000, 77_777)]
    path = tmp_path / "t.csv"
    path.write_bytes("\n".join(lines).encode())
    if kind == "gzip":
        path.write_bytes(gzip.compress(path.read_bytes()))
    if kind == "zstd":
        pl.DataFrame({"line": lines}).write_csv(
            path, include_header=False, quote_style="never", compression="zstd", check_extension=False
        )
    pieces = list(measured_lines(path, ","))
    assert len(pieces) > 1 or kind == "zstd"
    assert [piece.text(at) for piece in pieces for at in range(len(piece.cells))] == lines
    assert [count for piece in pieces for count in piece.cells.tolist()] == [line.count(",") + 1 for line in lines]


def test_a_text_of_no_lines_has_none() -> None:
    assert list(measured_lines(b"", ",")) == []
    assert list(each_line(b"")) == []
