"""Channels in rows, long tables, several files, standard input, addresses."""

import io
import sys
import threading
from collections.abc import Iterator
from datetime import date
from functools import partial
from http.server import SimpleHTTPRequestHandler, ThreadingHTTPServer
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from numpy.testing import assert_array_equal

from screener.errors import PlanError, TableError
from screener.records import Plan, SourceFile
from screener.tables import open_table, spans
from screener.tables.formats import recognise
from screener.tables.shapes import as_columns
from screener.tables.text import read_text
from tests.tables.conftest import Opened, OpenText, opened

P = [1.5, 2.25, -3.0, 40.0, 2.5]
Q = [7.0, 0.125, 12.0, 7.5, 9.0]
ROWS = "".join(f"{name},{','.join(map(str, values))}\n" for name, values in (("p1", P), ("q1", Q)))


def is_p_and_q(table: Opened, names: tuple[str, str] = ("p1", "q1")) -> None:
    assert table.names == list(names)
    assert_array_equal(table.readings, [P, Q])


def test_channels_in_rows_are_found_where_no_names_stand_above(open_text: OpenText) -> None:
    table = open_text(ROWS)
    is_p_and_q(table)
    assert "--shape=columns" in table.facts.remarks[-1]
    assert table.facts.dialect == "comma, no header, channels in rows"


def test_channels_in_rows_below_numbered_columns(open_text: OpenText) -> None:
    is_p_and_q(open_text("channel,1,2,3,4,5\n" + ROWS))


def test_channels_in_rows_with_units_and_words_below_numbered_columns(open_text: OpenText) -> None:
    table = open_text("Channel;Unit;1;2;3;4\np1;bar;1,5;OVER;-3;2\nq1;l/min;7;0,125;<12;3\n")
    assert table.names == ["p1", "q1"]
    assert [channel.unit for channel in table.facts.channels] == ["bar", "l/min"]
    assert_array_equal(table.readings, [[1.5, np.nan, -3, 2], [7, 0.125, 12, 3]])
    assert [channel.below for channel in table.facts.channels] == [0, 1]


def test_channels_in_rows_as_asked_with_units_and_words(open_text: OpenText) -> None:
    table = open_text("what,unit,a,b,c\np1,bar,1.5,OVER,-3\nq1,l/min,7,0.125,12\n", Plan(shape="rows"))
    assert table.names == ["p1", "q1"]
    assert [channel.unit for channel in table.facts.channels] == ["bar", "l/min"]
    assert_array_equal(table.readings, [[1.5, np.nan, -3], [7, 0.125, 12]])


def test_columns_as_asked_are_not_turned(open_text: OpenText) -> None:
    assert open_text(ROWS, Plan(shape="columns")).names == [f"column {at}" for at in range(2, 7)]


LONG = "time,tag,value,unit\n" + "".join(
    f"{at},p1,{p},bar\n{at},q1,{q},l\n" for at, (p, q) in enumerate(zip(P, Q, strict=True))
)


def test_a_long_table_is_found_and_its_rows_stand_side_by_side(open_text: OpenText) -> None:
    table = open_text(LONG)
    is_p_and_q(table)
    assert [channel.unit for channel in table.facts.channels] == ["bar", "l"]
    assert "2 channels were read from column 'value', rows of one column 'time' side by side" in table.facts.remarks[-1]


def test_a_long_table_with_gaps_and_words_keeps_its_rows(open_text: OpenText) -> None:
    lines = LONG.splitlines()
    del lines[4]
    table = open_text("\n".join(lines).replace("-3.0", "OVER"))
    assert_array_equal(table.readings, [[1.5, 2.25, np.nan, 40, 2.5], [7, np.nan, 12, 7.5, 9]])


def test_a_long_table_without_a_key_keeps_the_order_of_each_channel(open_text: OpenText) -> None:
    is_p_and_q(open_text("name,reading\n" + "".join(f"p1,{p}\n" for p in P) + "".join(f"q1,{q}\n" for q in Q)))


@pytest.mark.parametrize(
    "key", [[True, False], [[1, 2], [3]], ["b", "a"], [2.5, None], [date(2024, 5, 2), date(2023, 1, 1)]]
)
def test_rows_of_one_key_of_any_kind_stand_side_by_side_as_first_seen(tmp_path: Path, key: list[object]) -> None:
    frame = pl.DataFrame({"at": pl.Series([key[0]] * 3 + [key[1]] * 3 + [key[0]]), "lot": [1] * 6 + [2]})
    frame = frame.with_columns(tag=pl.Series([*"pqr", *"rqp", "p"]), value=pl.Series([1.5, 7, 3, 4, 0.25, 2.5, 9]))
    frame.write_parquet(tmp_path / "t.parquet")
    table = opened(tmp_path / "t.parquet", Plan(shape="long"))
    assert table.names == ["p", "q", "r"]
    assert_array_equal(table.readings, [[1.5, 2.5, 9], [7, 0.25, np.nan], [3, 4, np.nan]])


LARGE = {
    "long": "at,tag,value\n" + "".join(f"{at},{tag},{at % 7}.5\n" for at in range(60) for tag in "pqrs"),
    "rows": "".join(f"p{at},{at}.5,{at % 7},3.25,{at % 5}.5\n" for at in range(200)),
}


@pytest.mark.parametrize("asked", [False, True])
@pytest.mark.parametrize("shape", LARGE)
def test_what_is_too_large_to_be_turned_into_columns_is_one_sentence(
    tmp_path: Path, shape: str, *, asked: bool
) -> None:
    path = tmp_path / "t.csv"
    path.write_text(LARGE[shape])
    plan = Plan(shape=shape if asked else "")
    with pytest.raises(
        TableError, match=r"t\.csv.: it (names|has) a channel .* only up to [\d,]+ cells .* Write a column"
    ):
        open_table(path, plan, held_bytes=1_000)
    raw = read_text(path, recognise(path))
    with pytest.raises(TableError, match=r"only up to 700 cells \(it has (720|1,000)\)"):
        as_columns(raw, plan.shape, path, most_cells=700)
    assert open_table(path, Plan(shape="columns"), held_bytes=1_000).facts.channels


def test_a_table_that_is_not_long_is_refused_as_long(open_text: OpenText) -> None:
    with pytest.raises(PlanError, match="needs a column called channel"):
        open_text("a,b\n1,2\n3,4\n", Plan(shape="long"))


def test_an_unknown_shape_is_refused(open_text: OpenText) -> None:
    with pytest.raises(PlanError, match="known are columns, rows, long"):
        open_text("a,b\n1,2\n3,5\n", Plan(shape="cube"))


def halves(folder: Path, name: str) -> None:
    for number, part in ((2, slice(0, 3)), (10, slice(3, 5))):
        frame = pl.DataFrame({"p1": P[part], "q1": Q[part]})
        path = folder / name.format(number)
        frame.write_parquet(path) if path.suffix == ".parquet" else frame.write_csv(path)


@pytest.mark.parametrize("held_bytes", [0, 1 << 30])
@pytest.mark.parametrize("name", ["run_{}.csv", "run_{}.parquet"])
def test_files_of_one_layout_are_joined_in_counting_order(tmp_path: Path, name: str, held_bytes: int) -> None:
    halves(tmp_path, name)
    table = open_table(tmp_path / name.format("*"), Plan(), held_bytes=held_bytes)
    readings = np.vstack([table.read(span).readings for span in spans(table.facts)])
    assert_array_equal(readings, [P, Q])
    first, second = name.format(2), name.format(10)
    assert table.facts.files == (SourceFile(first, 0, 3), SourceFile(second, 3, 2))
    assert table.facts.format.endswith(", 2 files")
    before = table.facts.fingerprint
    (tmp_path / first).rename(tmp_path / name.format(11))
    assert open_table(tmp_path / name.format("*"), Plan()).facts.fingerprint != before


def test_files_may_differ_in_which_columns_hold_words(tmp_path: Path) -> None:
    (tmp_path / "a1.csv").write_text("p,q\n0.1,7\n2.25,0.125\n")
    (tmp_path / "a2.csv").write_text("p,q\n-3,OVER\n1e-300,7.5\n")
    table = opened(tmp_path / "a?.csv")
    assert_array_equal(table.readings, [[0.1, 2.25, -3, 1e-300], [7, 0.125, np.nan, 7.5]])


def test_files_of_another_layout_are_refused_with_the_column(tmp_path: Path) -> None:
    halves(tmp_path, "run_{}.csv")
    (tmp_path / "run_11.csv").write_text("p1,x\n1,2\n")
    with pytest.raises(TableError, match=r"Couldn't join 'run_11\.csv' to 'run_2\.csv': .* 'x' stands where 'q1' was"):
        open_table(tmp_path / "run_*.csv", Plan())


def test_files_in_other_units_are_refused_with_the_unit(tmp_path: Path) -> None:
    for number, unit in ((1, "mm"), (2, "in")):
        (tmp_path / f"run_{number}.csv").write_text(f"p,q\n{unit},N\n1.5,2\n3,4.5\n")
    with pytest.raises(TableError, match="its units differ, 'in' stands where 'mm' was"):
        open_table(tmp_path / "run_*.csv", Plan())


@pytest.mark.parametrize("held_bytes", [0, 1 << 30])
def test_what_counts_the_rows_of_each_file_is_no_channel(tmp_path: Path, held_bytes: int) -> None:
    rng = np.random.default_rng(4)
    for number, size in ((1, 50), (2, 70)):
        at = np.arange(size)
        frame = pl.DataFrame({"n": at, "t [s]": at * 0.5, "falls": -at, "p": rng.normal(size=size)})
        frame.write_csv(tmp_path / f"run_{number}.csv")
    table = open_table(tmp_path / "run_*.csv", Plan(), held_bytes=held_bytes)
    assert [channel.name for channel in table.facts.channels] == ["falls", "p"]
    assert {one.name: one.reason for one in table.facts.set_aside} == {
        "n": "a row counter: it goes up by 1 from row to row, in each file",
        "t [s]": "a row counter: it goes up by 0.5 from row to row, in each file",
    }


def test_a_pattern_without_files_is_one_sentence(tmp_path: Path) -> None:
    with pytest.raises(TableError, match="no file of that name or pattern"):
        open_table(tmp_path / "run_*.csv", Plan())


def test_standard_input_is_read_like_a_file(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(("p1,q1\n" + _columns()).encode())))
    table = opened(Path("-"))
    is_p_and_q(table)
    assert table.facts.path == Path("stdin")


@pytest.mark.parametrize("sent", ["", "p,q\n", "words only\n"])
def test_what_is_wrong_with_standard_input_is_said_of_it(monkeypatch: pytest.MonkeyPatch, sent: str) -> None:
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(sent.encode())))
    with pytest.raises(TableError, match=r"standard input|'stdin'") as raised:
        open_table(Path("-"), Plan())
    assert "screener-" not in str(raised.value)


def test_what_is_wrong_with_a_table_at_an_address_is_said_of_the_address(tmp_path: Path, address: str) -> None:
    (tmp_path / "t.csv").write_text("p,q\n")
    with pytest.raises(TableError, match=rf"^Couldn't read '{address}/t.csv': it has a header but no readings"):
        open_table(Path(f"{address}/t.csv"), Plan())


def _columns() -> str:
    return "".join(f"{p},{q}\n" for p, q in zip(P, Q, strict=True))


class Quiet(SimpleHTTPRequestHandler):
    """Serves files, and parts of them, without a log."""

    def log_message(self, format: str, *args: object) -> None:  # noqa: A002  # the name is the library's
        """Nothing."""

    def do_GET(self) -> None:  # the name is the library's
        """A file, or the part of it that was asked for."""
        wanted = self.headers.get("Range", "")
        content = Path(self.translate_path(self.path)).read_bytes()
        first, _, last = wanted.removeprefix("bytes=").partition("-")
        start = int(first) if first else max(0, len(content) - int(last or len(content)))
        stop = int(last) + 1 if first and last else len(content)
        self.send_response(206 if wanted else 200)
        self.send_header("Content-Length", str(len(content[start:stop])))
        self.send_header("Content-Range", f"bytes {start}-{min(stop, len(content)) - 1}/{len(content)}")
        self.end_headers()
        self.wfile.write(content[start:stop])


@pytest.fixture
def address(tmp_path: Path) -> Iterator[str]:
    """The address of a server of the temporary folder."""
    with ThreadingHTTPServer(("127.0.0.1", 0), partial(Quiet, directory=str(tmp_path))) as server:
        threading.Thread(target=server.serve_forever, daemon=True).start()
        yield f"http://127.0.0.1:{server.server_port}"
        server.shutdown()


@pytest.mark.parametrize("name", ["t.parquet", "t.csv"])
def test_a_table_at_an_address_is_read(tmp_path: Path, address: str, name: str) -> None:
    frame = pl.DataFrame({"p1": P, "q1": Q})
    frame.write_parquet(tmp_path / "t.parquet")
    frame.write_csv(tmp_path / "t.csv")
    is_p_and_q(opened(Path(f"{address}/{name}")))


def test_an_address_without_a_table_is_one_sentence() -> None:
    said = r"^Couldn't read 'http://127.0.0.1:9/none.parquet' as an address: .*\. Check the address and the network\.$"
    with pytest.raises(TableError, match=said):
        open_table(Path("http://127.0.0.1:9/none.parquet"), Plan())
