"""Tables larger than memory, what they leave behind, and archives that only fill memory."""

import gzip
import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from numpy.testing import assert_array_equal

from screener.errors import TableError
from screener.records import Plan
from screener.tables import Table, open_table, spans
from screener.tables.packed import zstd_size

RNG = np.random.default_rng(3)
FRAME = pl.DataFrame(RNG.normal(size=(4_000, 6)), schema=[f"c{at}" for at in range(6)])


@pytest.fixture(autouse=True)
def temporary(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A temporary folder of the test's own."""
    folder = tmp_path / "temporary"
    folder.mkdir()
    monkeypatch.setenv("TMPDIR", str(folder))
    monkeypatch.setattr("tempfile.tempdir", None)
    return folder


def readings_of(table: Table) -> list[list[float]]:
    rows: list[list[float]] = np.vstack([table.read(span).readings for span in spans(table.facts)]).tolist()
    return rows


LAST = {
    "footer": "\nrun ended,by hand\n",
    "sums": "\nMean,1,2,3,4,5\nMittelwert:,1,2,3,4,5\n",
    "ragged": "\n1,2\n\n4,5,6,7,8,9,10\n",
    "comments": "# stopped\n1,2,3,4,5,6\n",
}


@pytest.mark.parametrize("change", ["none", "words", "gzip", "zstd", "utf-16", "decimal comma", "blanks", *LAST])
def test_a_text_too_large_for_memory_reads_as_one_that_is_held(tmp_path: Path, temporary: Path, change: str) -> None:
    path = tmp_path / ("t.csv.gz" if change == "gzip" else "t.csv")
    text = FRAME.write_csv(separator={"decimal comma": ";", "blanks": " "}.get(change, ","))
    if change == "words":
        text = text.replace("\n", "\nOVER,1,2,3,4,5\n", 3000).replace("OVER,1,2,3,4,5\n", "", 2990) + "1,2,<3,4,5,6\n"
    text = text.replace(".", ",") if change == "decimal comma" else text
    text += LAST.get(change, "")
    text = "# rig 3\n" + text if change == "comments" else text
    content = text.encode("utf-16" if change == "utf-16" else "utf-8")
    path.write_bytes(gzip.compress(content) if change == "gzip" else content)
    if change == "zstd":
        FRAME.write_csv(path, compression="zstd", check_extension=False)
    plan = Plan(comment="#" if change == "comments" else "")
    held = open_table(path, plan)
    spooled = open_table(path, plan, held_bytes=0)
    assert_array_equal(readings_of(spooled), readings_of(held))
    assert (spooled.facts.channels, spooled.facts.rows) == (held.facts.channels, held.facts.rows)
    assert (spooled.facts.remarks, spooled.facts.dialect) == (held.facts.remarks, held.facts.dialect)
    assert held.facts.rows == len(FRAME) + {"words": 11, "ragged": 2, "comments": 1}.get(change, 0)
    assert list(temporary.glob("screener-*/*"))
    del spooled
    assert not list(temporary.glob("screener-*/*"))


def test_blank_lines_of_a_large_text_are_left_out(tmp_path: Path) -> None:
    (tmp_path / "t.csv").write_text("a,b\n1,2\n\n4,9\n5\n")
    table = open_table(tmp_path / "t.csv", Plan(), held_bytes=0)
    assert_array_equal(readings_of(table), [[1, 4, 5], [2, 9, np.nan]])
    assert "1 blank line was left out." in table.facts.remarks


OPEN_AND_WAIT = """
import sys, time
from pathlib import Path
from screener.records import Plan
from screener.tables import open_table
table = open_table(Path(sys.argv[1]), Plan(), held_bytes=0)
print("open", flush=True)
time.sleep(60)
"""


def test_what_a_killed_program_left_is_removed_when_the_next_table_is_opened(tmp_path: Path, temporary: Path) -> None:
    FRAME.write_csv(tmp_path / "t.csv")
    with subprocess.Popen(
        [sys.executable, "-c", OPEN_AND_WAIT, str(tmp_path / "t.csv")], stdout=subprocess.PIPE, text=True
    ) as program:
        assert program.stdout is not None
        assert program.stdout.readline() == "open\n"
        (left,) = temporary.glob("screener-*/*")
        other = open_table(tmp_path / "t.csv", Plan(), held_bytes=0)
        assert left.exists(), "the folder of a running program stays"
        program.send_signal(signal.SIGKILL)
        program.wait()
        assert left.exists()
    del other
    table = open_table(tmp_path / "t.csv", Plan())
    assert not left.exists(), "also by a program that keeps nothing itself"
    assert readings_of(table)


def test_a_folder_without_a_lock_is_removed_once_it_is_old(tmp_path: Path, temporary: Path) -> None:
    FRAME.write_csv(tmp_path / "t.csv")
    home = temporary / f"screener-{os.getuid()}"
    for name, age in (("new", 0), ("old", 3600)):
        (home / name).mkdir(parents=True)
        os.utime(home / name, (time.time() - age,) * 2)
    open_table(tmp_path / "t.csv", Plan(), held_bytes=0)
    assert [folder.name for folder in home.iterdir()] == ["new"]


ON_A_FULL_DISK = """
import resource, signal, sys
from pathlib import Path
from screener.errors import TableError
from screener.records import Plan
from screener.tables import open_table
signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
resource.setrlimit(resource.RLIMIT_FSIZE, (20_000, 20_000))
try:
    open_table(Path(sys.argv[1]), Plan(), held_bytes=0)
except TableError as error:
    print(error)
"""


@pytest.mark.parametrize("encoding", ["utf-8", "utf-16"])
def test_a_full_disk_is_one_sentence(tmp_path: Path, temporary: Path, encoding: str) -> None:
    (tmp_path / "t.csv").write_bytes(FRAME.write_csv().encode(encoding))
    command = [sys.executable, "-c", ON_A_FULL_DISK, str(tmp_path / "t.csv")]
    said = subprocess.run(command, capture_output=True, text=True, check=False)
    assert (said.returncode, said.stderr) == (0, "")
    assert "the disk is full. Make room, or set TMPDIR" in said.stdout
    assert not list(temporary.glob("screener-*/*"))


def test_a_columnar_file_changed_after_it_was_opened_is_not_read_on(tmp_path: Path) -> None:
    FRAME.write_parquet(tmp_path / "t.parquet")
    table = open_table(tmp_path / "t.parquet", Plan(), held_bytes=0)
    (FRAME * 2).write_parquet(tmp_path / "t.parquet")
    with pytest.raises(TableError, match="was changed after it was opened"):
        table.read(spans(table.facts)[0])


def test_an_archive_that_expands_beyond_all_tables_is_refused(tmp_path: Path) -> None:
    line = b"1.5,2.5\n" * 131_072
    with gzip.open(tmp_path / "t.csv.gz", "wb", compresslevel=9) as file:
        for _ in range(300):
            file.write(line)
    with pytest.raises(TableError, match=r"which no table of readings does\. Unpack it yourself"):
        open_table(tmp_path / "t.csv.gz", Plan())


def test_a_zstd_file_s_size_is_told_from_its_blocks(tmp_path: Path) -> None:
    FRAME.write_csv(tmp_path / "t.csv.zst", compression="zstd")
    size = len(FRAME.write_csv())
    assert size <= zstd_size(tmp_path / "t.csv.zst") <= size + (1 << 18)
    pl.DataFrame({"a": ["1.5"] * 80_000_000}).write_csv(tmp_path / "bomb.csv.zst", compression="zstd")
    with pytest.raises(TableError, match="which no table of readings does"):
        open_table(tmp_path / "bomb.csv.zst", Plan())


APPEND = """
import sys, time
with open(sys.argv[1], "ab") as file:
    while True:
        file.write(b"1.5,2.5\\n" * 1000)
        file.flush()
        time.sleep(0.002)
"""


def test_of_a_text_that_grows_whole_lines_are_read_and_fingerprinted(tmp_path: Path) -> None:
    path = tmp_path / "log.csv"
    path.write_text("a,b\n" + "".join(f"{k % 7}.5,{k % 11}\n" for k in range(200_000)))
    with subprocess.Popen([sys.executable, "-c", APPEND, str(path)]) as writer:
        while path.stat().st_size < 1_700_000:
            time.sleep(0.01)
        table = open_table(path, Plan())
        writer.kill()
    assert table.facts.remarks[-1].startswith("The file grew while it was read")
    (a, b) = readings_of(table)
    assert len(a) == table.facts.rows < len(path.read_text().splitlines()) - 1
    assert set(b[200_000:]) <= {2.5}
    size = int(table.facts.remarks[-1].split("first ")[1].split(" ")[0].replace(",", ""))
    (tmp_path / "copy.csv").write_bytes(path.read_bytes()[:size])
    assert open_table(tmp_path / "copy.csv", Plan()).facts.fingerprint == table.facts.fingerprint


def test_without_a_place_for_temporary_files_only_what_needs_one_is_refused(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    FRAME.write_csv(tmp_path / "t.csv")
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path / "t.csv"))
    assert open_table(tmp_path / "t.csv", Plan()).facts.rows == len(FRAME)
    with pytest.raises(TableError, match=r"^Couldn't make temporary folder .*: Not a directory\. Set TMPDIR\.$"):
        open_table(tmp_path / "t.csv", Plan(), held_bytes=0)
