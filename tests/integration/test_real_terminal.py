"""The installed program on the sample run, in a real pseudo-terminal: rows, sort, plot, export, quit; and Ctrl-C."""

import os
import shutil
import signal
import sysconfig
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from pseudo_terminal import PseudoTerminal

from screener.records import RESULT_COLUMNS
from screener.runs import RunFile

SAMPLE = Path(__file__).parents[2] / "sample_runs" / "pump_rig.parquet"
PROGRAM = Path(sysconfig.get_path("scripts")) / "screener"
HOME, ESCAPE, CLEAR_LINE = "\x1b[H", "\x1b", "\x15"


def terminal(folder: Path, *arguments: str, size: tuple[int, int] = (80, 24), **more: str) -> PseudoTerminal:
    kept = {name: os.environ[name] for name in ("PATH", "HOME", "PYTHONPATH") if name in os.environ}
    environment = {**kept, "TERM": "xterm-256color", "LANG": "C.UTF-8", **more}
    program = [str(PROGRAM), *arguments]
    return PseudoTerminal(program, columns=size[0], rows=size[1], environment=environment, folder=folder)


def wait_until_all_are_scored(screen: PseudoTerminal) -> None:
    """The sentence of result counts what was tried until nothing is left to try."""
    screen.wait_for(lambda text: "\n240 channels: " in text)


def leave(screen: PseudoTerminal) -> None:
    """Quit; the terminal is as it was."""
    screen.send("q")
    assert screen.exit_code() == 0
    assert screen.attributes == screen.attributes_before


@pytest.mark.parametrize("size", [(80, 24), (140, 45)])
def test_from_a_table_to_an_exported_file(tmp_path: Path, size: tuple[int, int]) -> None:
    shutil.copy(SAMPLE, tmp_path)
    with terminal(tmp_path, "pump_rig.parquet", size=size) as screen:
        screen.wait_for("outlet_p")
        wait_until_all_are_scored(screen)
        screen.send("6" + HOME)
        screen.wait_for(lambda text: "1 of 240 channels, sorted by p" in text)
        with RunFile.open(tmp_path / "pump_rig.run", read_only=True) as run:
            results = run.results().sort("p", nulls_last=True)
        names = results["channel"].to_list()
        # A name that is too long for its column keeps its beginning and its end.
        head, _, tail = screen.lines[3][4:].split()[0].partition("~")
        assert names[0].startswith(head)
        assert names[0].split(" [")[0].endswith(tail)
        if size == (80, 24):
            screen.send("\r")
        screen.wait_for("expected if normal")
        assert sum(line.count("•") for line in screen.lines) > 20
        if size == (80, 24):
            screen.send(ESCAPE)
            screen.wait_for("critical r")
        screen.send("f")
        screen.wait_for(" flagged, sorted by p")
        screen.send("e")
        screen.wait_for("Export these rows")
        screen.send(CLEAR_LINE + "flagged.csv\r")
        screen.wait_for("'flagged.csv'")
        leave(screen)
    exported = pl.read_csv(tmp_path / "flagged.csv")
    assert exported.columns == list(RESULT_COLUMNS)
    assert exported["channel"].to_list() == results.filter(pl.col("verdict") == "flagged")["channel"].to_list()
    assert exported["p"].is_sorted()


def test_the_run_file_is_opened_again_without_its_table(tmp_path: Path) -> None:
    shutil.copy(SAMPLE, tmp_path)
    with terminal(tmp_path, "pump_rig.parquet") as screen:
        wait_until_all_are_scored(screen)
        leave(screen)
    (tmp_path / "pump_rig.parquet").unlink()
    with terminal(tmp_path, "pump_rig.run") as screen:
        wait_until_all_are_scored(screen)
        screen.wait_for("outlet_p")
        leave(screen)


def test_an_unusable_table_closes_the_screen_with_one_sentence_and_its_exit_code(tmp_path: Path) -> None:
    (tmp_path / "rubbish.csv").write_bytes(np.random.default_rng(1).bytes(3000))
    for name, code in (("missing.csv", 3), ("rubbish.csv", 3)):
        with terminal(tmp_path, name) as screen:
            assert screen.exit_code() == code
            last = screen.raw.rpartition(b"\x1b[?1049l")[2].decode()
            assert f"screener: Couldn't read '{name}'" in last
            assert "Traceback" not in last
            assert screen.attributes == screen.attributes_before


def test_ctrl_c_on_a_terminal_tells_how_to_go_on(tmp_path: Path) -> None:
    readings = np.random.default_rng(5).normal(size=(20_000, 1_000))
    pl.DataFrame(readings).write_parquet(tmp_path / "wide.parquet", compression="uncompressed")
    with terminal(tmp_path, "score", "wide.parquet", "--jobs", "1", size=(200, 24)) as screen:
        screen.wait_for("a second")
        screen.process.send_signal(signal.SIGINT)
        assert screen.exit_code() == 130
        assert "the same command goes on from there." in screen.text
        assert "Traceback" not in screen.text
    with RunFile.open(tmp_path / "wide.run", read_only=True) as run:
        assert 0 < run.results().height < 1000
