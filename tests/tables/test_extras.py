"""Formats that come with an extra, written by the libraries that read them."""

import sys
from pathlib import Path

import h5py
import numpy as np
import pytest
import scipy.io
import statsmodels.api as sm
import xlsxwriter
from asammdf import MDF, Signal
from nptdms import ChannelObject, RootObject, TdmsWriter
from numpy.testing import assert_array_equal

from screener.errors import PlanError, TableError
from screener.records import Plan
from screener.tables import open_table, spans
from tests.tables.conftest import Opened, OpenText, opened

P = [1 / 3, 2.25, -3e-300, 40.0, 1234567.891]
Q = [7.0, 0.125, 12.0, 7.5, 9.0]
BOTH = np.array([P, Q])


def is_p_and_q(table: Opened, *, units: bool = False, names: tuple[str, str] = ("p", "q")) -> None:
    assert table.names == list(names)
    assert_array_equal(table.readings, BOTH)
    if units:
        assert [channel.unit for channel in table.facts.channels] == ["bar", "l"]


def write_sheets(path: Path, *, words: bool = False) -> None:
    with xlsxwriter.Workbook(path, {"nan_inf_to_errors": True}) as book:
        book.add_worksheet("empty")
        sheet = book.add_worksheet("rig 7")
        sheet.write(0, 0, "Rig 7, left")
        sheet.write_row(2, 0, ["when", "p", "q"])
        sheet.write_row(3, 0, ["", "bar", "l"])
        date = book.add_format({"num_format": "yyyy-mm-dd"})
        for row, (p, q) in enumerate(zip(P, Q, strict=True), 4):
            sheet.write_number(row, 0, 45000 + row * row, date)
            sheet.write_row(row, 1, [p, "OVER" if words and row == 5 else q])
        other = book.add_worksheet("other")
        other.write_column(0, 0, ["x", 1, 4, 9])


def test_a_spreadsheet_is_read_exactly_with_preamble_units_and_dates(tmp_path: Path) -> None:
    write_sheets(tmp_path / "t.xlsx")
    table = opened(tmp_path / "t.xlsx")
    is_p_and_q(table, units=True)
    assert table.reasons == {"when": "dates or times, not a measurement"}
    assert table.facts.format == "spreadsheet"
    assert table.facts.dialect == "1 preamble line, names in line 3, units in line 4, sheet rig 7"
    assert "the file also has empty, other (--part reads another)" in table.facts.remarks[0]


def test_words_in_a_spreadsheet_are_counted(tmp_path: Path) -> None:
    write_sheets(tmp_path / "t.xlsx", words=True)
    table = opened(tmp_path / "t.xlsx")
    assert_array_equal(table.of("q"), [7, np.nan, 12, 7.5, 9])
    assert "1 cell holds 'OVER' in q: read as missing." in table.facts.remarks


def test_another_sheet_is_read_when_asked_for(tmp_path: Path) -> None:
    write_sheets(tmp_path / "t.xlsx")
    assert opened(tmp_path / "t.xlsx", Plan(part="other")).of("x") == [1, 4, 9]
    with pytest.raises(PlanError, match=r"Couldn't find sheet 'none' .* it has empty, rig 7, other"):
        open_table(tmp_path / "t.xlsx", Plan(part="none"))


@pytest.mark.parametrize("held_bytes", [0, 1 << 30])
def test_hdf5_is_read_whichever_way_it_holds_the_table(tmp_path: Path, held_bytes: int) -> None:
    with h5py.File(tmp_path / "t.h5", "w") as file:
        file["rig/p"], file["rig/q"] = BOTH
        file["rig/p"].attrs["unit"], file["rig/q"].attrs["units"] = "bar", "l"
        file["matrix"] = BOTH.T[:4]
        file["matrix"].attrs["columns"] = ["p", "q"]
        file["records"] = np.array(list(zip(P, Q, strict=True)), dtype=[("p", ">f8"), ("q", "<f4")])[:3]
        file["note"] = "by hand"
    for part, rows in (("", 5), ("rig", 5), ("matrix", 4), ("records", 3)):
        table = open_table(tmp_path / "t.h5", Plan(part=part), held_bytes=held_bytes)
        assert [channel.name for channel in table.facts.channels] == ["p", "q"]
        readings = np.vstack([table.read(span).readings for span in spans(table.facts)])
        assert_array_equal(readings, BOTH[:, :rows])
    is_p_and_q(opened(tmp_path / "t.h5"), units=True)
    with pytest.raises(PlanError, match="it has matrix, records, rig"):
        open_table(tmp_path / "t.h5", Plan(part="none"))


def test_matlab_vectors_matrices_and_structures(tmp_path: Path) -> None:
    scipy.io.savemat(tmp_path / "v.mat", {"p": BOTH[0][:, None], "q": BOTH[1], "note": "by hand", "k": 5.0})
    scipy.io.savemat(tmp_path / "m.mat", {"rig": BOTH.T})
    scipy.io.savemat(tmp_path / "s.mat", {"rig": {"p": BOTH[0], "q": BOTH[1]}})
    vectors = opened(tmp_path / "v.mat")
    assert_array_equal(vectors.readings, BOTH)
    assert vectors.names == ["p", "q"]
    is_p_and_q(opened(tmp_path / "m.mat"), names=("rig 1", "rig 2"))
    is_p_and_q(opened(tmp_path / "s.mat"))


def test_matlab_of_version_7_3_has_its_columns_first(tmp_path: Path) -> None:
    with h5py.File(tmp_path / "t.mat", "w", userblock_size=512) as file:
        file["rig"] = BOTH
    content = bytearray((tmp_path / "t.mat").read_bytes())
    content[:18] = b"MATLAB 7.3 MAT-fil"
    (tmp_path / "t.mat").write_bytes(content)
    table = opened(tmp_path / "t.mat")
    is_p_and_q(table, names=("rig 1", "rig 2"))
    assert table.facts.format == "MATLAB"


@pytest.mark.parametrize("held_bytes", [0, 1 << 30])
def test_tdms_channels_of_one_group_with_units(tmp_path: Path, held_bytes: int) -> None:
    with TdmsWriter(tmp_path / "t.tdms") as writer:
        channels = [
            ChannelObject("rig", name, values, {"unit_string": unit})
            for name, values, unit in (("p", BOTH[0], "bar"), ("q", BOTH[1], "l"), ("short", BOTH[1][:3], "l"))
        ]
        writer.write_segment([RootObject(), *channels, ChannelObject("other", "x", np.array([1.0, 4.0]))])
    table = open_table(tmp_path / "t.tdms", Plan(), held_bytes=held_bytes)
    readings = np.vstack([table.read(span).readings for span in spans(table.facts)])
    assert_array_equal(readings, [P, Q, [7, 0.125, 12, np.nan, np.nan]])
    assert [channel.unit for channel in table.facts.channels] == ["bar", "l", "l"]
    assert table.facts.remarks[:2] == (
        "Part 'rig' was read; the file also has other (--part reads another).",
        "1 columns have fewer readings than the longest: the rest of each is missing.",
    )
    assert opened(tmp_path / "t.tdms", Plan(part="other")).of("x") == [1, 4]


@pytest.mark.parametrize("held_bytes", [0, 1 << 30])
def test_mdf_channels_that_share_a_time_base(tmp_path: Path, held_bytes: int) -> None:
    times = np.array([0.0, 0.01, 0.03, 0.04, 0.06])
    with MDF(version="4.10") as file:
        file.append([Signal(v, times, unit=u, name=n) for n, v, u in (("p", BOTH[0], "bar"), ("q", BOTH[1], "l"))])
        file.append([Signal(np.array([1.0, 4.0]), np.array([0.0, 1.0]), name="x")])
        file.save(tmp_path / "t.mf4")
    table = open_table(tmp_path / "t.mf4", Plan(), held_bytes=held_bytes)
    readings = np.vstack([table.read(span).readings for span in spans(table.facts)])
    assert_array_equal(readings, BOTH)
    assert [column.name for column in table.facts.set_aside] == ["time"]
    is_p_and_q(opened(tmp_path / "t.mf4"), units=True)
    assert opened(tmp_path / "t.mf4", Plan(part="group 1")).of("x") == [1, 4]


SIGNATURES = {
    "t.h5": (b"\x89HDF\r\n\x1a\n", "h5py", "hdf5"),
    "t.mat": (b"MATLAB 5.0 MAT-file", "scipy", "matlab"),
    "t.tdms": (b"TDSm", "nptdms", "tdms"),
    "t.mf4": (b"MDF     4.10    ", "asammdf", "mdf"),
    "t.xls": (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1", "fastexcel", "xlsx"),
}


@pytest.mark.parametrize("name", [name for name in SIGNATURES if name != "t.mat"])
def test_a_missing_library_is_one_sentence_with_the_command(
    tmp_path: Path, name: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    start, module, extra = SIGNATURES[name]
    (tmp_path / name).write_bytes(start + bytes(1000))
    monkeypatch.setitem(sys.modules, module, None)
    with pytest.raises(TableError, match=rf"Install it with: pip install 'screener\[{extra}\]'"):
        open_table(tmp_path / name, Plan())


@pytest.mark.parametrize("name", SIGNATURES)
def test_a_file_that_only_begins_like_one_is_one_sentence(tmp_path: Path, name: str) -> None:
    for rest in (b"", bytes(1000), np.random.default_rng(1).bytes(3000)):
        (tmp_path / name).write_bytes(SIGNATURES[name][0] + rest)
        with pytest.raises(TableError) as caught:
            open_table(tmp_path / name, Plan())
        assert "\n" not in str(caught.value)


@pytest.mark.parametrize("data", ["fair", "longley", "macrodata", "engel", "nile", "sunspots", "co2", "elnino"])
def test_tables_bundled_with_statsmodels_are_read_with_their_missing_readings(open_text: OpenText, data: str) -> None:
    frame = getattr(sm.datasets, data).load_pandas().data
    numeric = frame.select_dtypes("number")
    table = open_text(frame.to_csv(index=False, float_format="%.17g"))
    for name in table.names:
        assert_array_equal(table.of(name), numeric[name].to_numpy(dtype=np.float64))
    set_aside = set(numeric.columns) - set(table.names)
    assert set_aside <= set(table.reasons)
    assert table.names
    if data == "co2":
        assert np.isnan(table.of("co2")).sum() == 59
