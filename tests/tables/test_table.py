"""An opened table: facts, blocks, formats, threads."""

from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from numpy.testing import assert_array_equal
from sklearn.datasets import load_breast_cancer, load_digits

from screener.records import Channel, Plan, Span
from screener.tables import open_table, spans
from tests.tables.conftest import opened

READINGS = np.random.default_rng(7).normal(size=(60, 500))
FRAME = pl.DataFrame({f"ch{at} [V]": row for at, row in enumerate(READINGS)})


def write(frame: pl.DataFrame, path: Path) -> None:
    match path.suffix:
        case ".csv":
            frame.write_csv(path)
        case ".tsv":
            frame.write_csv(path, separator="\t")
        case ".parquet":
            frame.write_parquet(path, row_group_size=100)
        case ".ndjson" | ".jsonl":
            frame.write_ndjson(path)
        case ".stream":
            frame.write_ipc_stream(path)
        case _:
            frame.write_ipc(path)


WORDS = ["1.5", "OVER", "2", "NA", "-9999"]

FORMATS = {
    "t.csv": "CSV",
    "t.tsv": "TSV",
    "t.parquet": "Parquet",
    "t.arrow": "Arrow IPC",
    "t.ipc": "Arrow IPC",
    "t.feather": "Arrow IPC",
    "t.stream": "Arrow IPC stream",
    "t.ndjson": "newline-delimited JSON",
    "t.jsonl": "newline-delimited JSON",
}


@pytest.mark.parametrize(("name", "label"), FORMATS.items())
def test_every_format_gives_the_same_readings_bit_for_bit(tmp_path: Path, name: str, label: str) -> None:
    write(FRAME, tmp_path / name)
    table = opened(tmp_path / name)
    assert table.facts.format == label
    assert table.facts.rows == 500
    assert table.facts.set_aside == ()
    assert table.facts.channels[3] == Channel(3, "ch3 [V]", "V")
    assert_array_equal(table.readings, READINGS)


@pytest.mark.parametrize("name", FORMATS)
def test_the_format_is_known_by_content_whatever_the_name(tmp_path: Path, name: str) -> None:
    write(FRAME, tmp_path / name)
    (tmp_path / name).rename(tmp_path / "run[1]*.dat")
    assert_array_equal(opened(tmp_path / "run[1]*.dat").readings, READINGS)


@pytest.mark.parametrize("held_bytes", [0, 1 << 30])
@pytest.mark.parametrize("name", ["t.parquet", "t.arrow"])
def test_a_table_left_in_its_file_reads_as_one_held_in_memory(tmp_path: Path, name: str, held_bytes: int) -> None:
    mixed = FRAME.with_columns(note=pl.lit("x"), k=pl.lit(5), words=pl.Series(WORDS * 100))
    write(mixed, tmp_path / name)
    table = open_table(tmp_path / name, Plan(missing=("-9999",)), held_bytes=held_bytes)
    assert [column.name for column in table.facts.set_aside] == ["note", "k"]
    assert table.facts.remarks[0] == "100 cells hold 'OVER' in words: read as missing."
    assert table.facts.remarks[1] == "100 cells are -9999: read as missing, as asked."
    readings = np.vstack([table.read(span).readings for span in spans(table.facts)])
    assert_array_equal(readings[:-1], READINGS)
    assert_array_equal(readings[-1], [1.5, np.nan, 2, np.nan, np.nan] * 100)


@pytest.mark.parametrize("name", ["t.csv", "t.parquet"])
def test_a_block_is_contiguous_and_its_receiver_s_own(tmp_path: Path, name: str) -> None:
    write(FRAME, tmp_path / name)
    table = open_table(tmp_path / name, Plan())
    for span in (Span(0, 1), Span(3, 9), Span(0, 60)):
        block = table.read(span)
        assert block.span == span
        assert block.readings.flags.c_contiguous
        assert block.readings.dtype == np.float64
        block.readings.sort(axis=1)
        assert_array_equal(table.read(span).readings, READINGS[span.first : span.stop])


@pytest.mark.parametrize("held_bytes", [0, 1 << 30])
def test_many_threads_read_one_table(tmp_path: Path, held_bytes: int) -> None:
    write(FRAME, tmp_path / "t.parquet")
    table = open_table(tmp_path / "t.parquet", Plan(), held_bytes=held_bytes)
    asked = spans(table.facts, 20_000) * 4
    with ThreadPoolExecutor(8) as threads:
        blocks = list(threads.map(table.read, asked))
    assert len(set(asked)) == 9
    for block in blocks:
        assert_array_equal(block.readings, READINGS[block.span.first : block.span.stop])


@pytest.mark.parametrize("span", [Span(0, 61), Span(-1, 2), Span(3, 3)])
def test_a_span_outside_the_table_is_a_programming_error(tmp_path: Path, span: Span) -> None:
    write(FRAME, tmp_path / "t.csv")
    with pytest.raises(ValueError, match="outside the 60 channels"):
        open_table(tmp_path / "t.csv", Plan()).read(span)


def test_the_fingerprint_follows_the_content(tmp_path: Path) -> None:
    write(FRAME, tmp_path / "a.csv")
    write(FRAME, tmp_path / "b.csv")
    write(FRAME.with_columns(pl.col("ch0 [V]") + 1), tmp_path / "c.csv")
    a, b, c = (open_table(tmp_path / name, Plan()).facts.fingerprint for name in ("a.csv", "b.csv", "c.csv"))
    assert a == b != c


def test_a_channel_with_one_reading_stays_a_channel(tmp_path: Path) -> None:
    (tmp_path / "t.csv").write_text("a,b\n1.5,2\n")
    assert opened(tmp_path / "t.csv").readings.tolist() == [[1.5], [2.0]]


@pytest.mark.parametrize("name", ["t.parquet", "t.arrow", "t.ndjson"])
def test_names_that_look_like_patterns_are_only_names(tmp_path: Path, name: str) -> None:
    write(pl.DataFrame({"^.*$": [1.0, 4.0], "b": [2.0, 9.0], "*": [3.0, 5.0]}), tmp_path / name)
    table = opened(tmp_path / name)
    assert table.names == ["^.*$", "b", "*"]
    assert table.readings.tolist() == [[1, 4], [2, 9], [3, 5]]


def test_json_lines_may_lack_a_value_or_hold_a_word(tmp_path: Path) -> None:
    (tmp_path / "t.ndjson").write_text('{"a": 1, "b": 2.5}\n{"a": "OVER"}\n\n{"b": null, "a": 3}\n')
    table = opened(tmp_path / "t.ndjson")
    assert_array_equal(table.readings, [[1, np.nan, 3], [2.5, np.nan, np.nan]])
    assert table.facts.remarks == ("1 cell holds 'OVER' in a: read as missing.",)


def test_a_path_that_is_not_unicode_text(tmp_path: Path) -> None:
    path = tmp_path / "odd\udcff.csv"
    path.write_text("a\n1\n4\n")
    assert opened(path).readings.tolist() == [[1, 4]]


def test_the_digits_bundled_with_scikit_learn_have_three_constant_pixels_and_three_flags(tmp_path: Path) -> None:
    pixels = load_digits(as_frame=False).data
    columns = {f"pixel {at}": pixels[:, at] for at in range(pixels.shape[1])}
    pl.DataFrame(columns).write_csv(tmp_path / "digits.csv")
    table = opened(tmp_path / "digits.csv")
    assert table.facts.rows == 1797
    constant = dict.fromkeys(["pixel 0", "pixel 32", "pixel 39"], "constant: every reading is 0.0")
    flags = dict.fromkeys(["pixel 24", "pixel 31", "pixel 56"], "flags: every reading is 0 or 1")
    assert table.reasons == constant | flags
    assert_array_equal(table.readings, np.delete(pixels, [0, 24, 31, 32, 39, 56], axis=1).T)


def test_the_measurements_bundled_with_scikit_learn_are_thirty_channels(tmp_path: Path) -> None:
    bunch = load_breast_cancer()
    columns = {str(name): bunch.data[:, at] for at, name in enumerate(bunch.feature_names)}
    pl.DataFrame(columns).write_csv(tmp_path / "cells.csv")
    assert_array_equal(opened(tmp_path / "cells.csv").readings, bunch.data.T)


def test_the_order_of_json_columns_is_that_of_the_first_line(tmp_path: Path) -> None:
    names = [f"c{at * 7 % 30}" for at in range(30)]
    lines = ["{" + ", ".join(f'"{name}": {row + at * row}' for at, name in enumerate(names)) + "}" for row in (1, 3, 4)]
    (tmp_path / "t.ndjson").write_text("\n".join([*lines, '{"late b": 1}', '{"late b": 2, "late a": 1}']))
    table = opened(tmp_path / "t.ndjson")
    assert table.names == [*names, "late a", "late b"]
