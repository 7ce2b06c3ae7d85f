"""Files that are no table: one clear sentence each, never a traceback."""

import gzip
import os
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from screener.errors import ScreenerError, TableError
from screener.records import Plan
from screener.tables import open_table, spans

MANY = pl.DataFrame({"a": np.sin(np.arange(20_000.0)), "b": np.cos(np.arange(20_000.0))})


def refusal(path: Path) -> str:
    with pytest.raises(TableError) as caught:
        open_table(path, Plan())
    assert caught.value.exit_code == 3
    assert "\n" not in str(caught.value)
    return str(caught.value)


def written(folder: Path, name: str, content: bytes) -> Path:
    path = folder / name
    path.write_bytes(content)
    return path


def test_a_missing_file(tmp_path: Path) -> None:
    assert refusal(tmp_path / "none.csv").endswith("none.csv': there is no such file.")


def test_a_directory(tmp_path: Path) -> None:
    assert "it is a directory" in refusal(tmp_path)


def test_a_device() -> None:
    assert "not a regular file" in refusal(Path(os.devnull))


def test_a_name_that_no_file_can_have() -> None:
    assert "null byte" in refusal(Path("a\0b.csv"))


@contextmanager
def without_privileges(path: Path) -> Iterator[None]:
    """Nobody may read the file while this lasts, not even the superuser's tests."""
    path.chmod(0)
    superuser = os.geteuid() == 0
    if superuser:
        os.seteuid(65_534)
    try:
        yield
    finally:
        if superuser:
            os.seteuid(0)
        path.chmod(0o600)


def test_a_file_that_may_not_be_read(tmp_path: Path) -> None:
    path = written(tmp_path, "secret.csv", b"a\n1\n")
    with without_privileges(path):
        assert "not permitted" in refusal(path)


def test_an_empty_file(tmp_path: Path) -> None:
    assert "the file is empty" in refusal(written(tmp_path, "empty.csv", b""))


@pytest.mark.parametrize("content", [b"a,b", b"a,b\n", b"a,b\n\n\n", b"\xef\xbb\xbfa,b\r\n"])
def test_only_a_header(tmp_path: Path, content: bytes) -> None:
    assert "it has a header but no readings" in refusal(written(tmp_path, "h.csv", content))


@pytest.mark.parametrize("content", [b"\n\n\n", b"\xef\xbb\xbf", b" \t\r\n"])
def test_only_blank_lines(tmp_path: Path, content: bytes) -> None:
    assert "nothing but blank lines" in refusal(written(tmp_path, "blank.csv", content))


@pytest.mark.parametrize("name", ["rubbish", "rubbish.csv", "rubbish.parquet", "rubbish.ndjson", "rubbish.arrow"])
def test_binary_rubbish_under_any_name(tmp_path: Path, name: str) -> None:
    content = np.random.default_rng(5).bytes(5_000)
    assert "binary data" in refusal(written(tmp_path, name, content))


@pytest.mark.parametrize(
    ("start", "said"),
    [
        (b"PK\x03\x04", "spreadsheet"),
        (b"SQLite format 3\0", "run file"),
        (b"%PDF-1.7", "PDF"),
        (b"\x89HDF\r\n", "HDF5"),
    ],
)
def test_a_file_of_another_kind_is_called_by_its_name(tmp_path: Path, start: bytes, said: str) -> None:
    message = refusal(written(tmp_path, "x.csv", start + bytes(100)))
    assert said in message
    assert "Known formats" in message


def test_no_numeric_column_lists_what_the_columns_are(tmp_path: Path) -> None:
    path = written(tmp_path, "t.csv", b"who,ok,k\nann,true,5\nbob,false,5\n")
    message = refusal(path)
    assert "who (text: 100 % of its cells are not numbers)" in message
    assert "ok (true or false, not a measurement)" in message
    assert "k (constant: every reading is 5.0)" in message


def test_a_columnar_file_without_rows_or_columns(tmp_path: Path) -> None:
    for frame in (pl.DataFrame({"a": pl.Series([], dtype=pl.Float64)}), pl.DataFrame()):
        frame.write_parquet(tmp_path / "none.parquet")
        assert "no readings" in refusal(tmp_path / "none.parquet")


@pytest.mark.parametrize("share", [0.002, 0.5, 0.95])
@pytest.mark.parametrize("name", ["t.csv.gz", "t.csv.zst", "t.parquet", "t.arrow", "t.stream"])
def test_a_file_that_is_cut_off(tmp_path: Path, name: str, share: float) -> None:
    path = tmp_path / name
    write(MANY, path)
    assert open_table(path, Plan()).facts.rows == 20_000
    path.write_bytes(path.read_bytes()[: max(16, int(path.stat().st_size * share))])
    assert "cut off" in refusal(path)


def write(frame: pl.DataFrame, path: Path) -> None:
    match path.suffix:
        case ".gz":
            path.write_bytes(gzip.compress(frame.write_csv().encode()))
        case ".zst":
            frame.write_csv(path, compression="zstd")
        case ".parquet":
            frame.write_parquet(path)
        case ".arrow":
            frame.write_ipc(path)
        case _:
            frame.write_ipc_stream(path)


def test_a_compressed_columnar_file(tmp_path: Path) -> None:
    MANY.write_parquet(tmp_path / "t.parquet")
    packed = written(tmp_path, "t.parquet.gz", gzip.compress((tmp_path / "t.parquet").read_bytes()))
    assert "Parquet file inside gzip. Unpack it first." in refusal(packed)


@pytest.mark.parametrize("content", [b"rubbish\n", b'{"a": 1}\n{"a": NaN}\n', b'{"a": 1}\n[2]\n', b'{"a": 1}\n{"a": 2'])
def test_lines_that_are_not_json_objects(tmp_path: Path, content: bytes) -> None:
    assert "every line must be one JSON object" in refusal(written(tmp_path, "t.ndjson", content))


def test_one_json_array(tmp_path: Path) -> None:
    assert "one JSON array" in refusal(written(tmp_path, "t.json", b'[{"a": 1}]'))


def test_a_header_with_fewer_names_than_the_rows_have_cells(tmp_path: Path) -> None:
    message = refusal(written(tmp_path, "t.csv", b"a,b\nr1,1,2\nr2,3,5\n"))
    assert "its header names 2 columns, but the rows have more cells. Give every column a name." in message


@pytest.mark.parametrize("content", [b'a,b\n1,"2\n3,5\n', b'a,b\n1,"', b'a,b\n1,"\r'])
def test_a_quotation_mark_that_is_not_closed(tmp_path: Path, content: bytes, capfd: pytest.CaptureFixture[str]) -> None:
    assert "a quotation mark is not closed" in refusal(written(tmp_path, "t.csv", content))
    assert capfd.readouterr().err == ""


def test_a_table_removed_after_it_was_opened(tmp_path: Path) -> None:
    path = tmp_path / "t.parquet"
    MANY.write_parquet(path)
    table = open_table(path, Plan(), held_bytes=0)
    path.unlink()
    with pytest.raises(TableError, match=r"t\.parquet"):
        table.read(spans(table.facts)[0])


@settings(max_examples=150, suppress_health_check=[HealthCheck.function_scoped_fixture], deadline=None)
@given(content=st.binary(max_size=200) | st.text(alphabet='a1,;\t\n\r" .-e{}:[]é', max_size=80).map(str.encode))
@pytest.mark.parametrize("name", ["x.csv", "x.ndjson"])
def test_no_content_whatever_gives_a_traceback(tmp_path: Path, name: str, content: bytes) -> None:
    path = written(tmp_path, name, content)
    try:
        table = open_table(path, Plan())
    except ScreenerError as error:
        assert str(error)
    else:
        assert all(table.read(span).readings.shape[1] == table.facts.rows for span in spans(table.facts))
