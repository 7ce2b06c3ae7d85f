"""Triage in a real pseudo-terminal: filter, view, decide, undo, resize, dropped connection, compare, plain ASCII."""

import os
import re
import shutil
import signal
import sysconfig
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from command_line import screener
from pseudo_terminal import PseudoTerminal

from screener.runs import RunFile
from screener.ui.views import View

SHORT = Path(__file__).parents[2] / "sample_runs" / "pump_rig_short.csv"
PROGRAM = Path(sysconfig.get_path("scripts")) / "screener"
DOWN, END = "\x1b[B", "\x1b[F"


def terminal(folder: Path, *arguments: str, size: tuple[int, int] = (80, 24), **more: str) -> PseudoTerminal:
    kept = {name: os.environ[name] for name in ("PATH", "HOME", "PYTHONPATH") if name in os.environ}
    environment = {**kept, "TERM": "xterm-256color", "LANG": "C.UTF-8", **more}
    return PseudoTerminal(
        [str(PROGRAM), *arguments], columns=size[0], rows=size[1], environment=environment, folder=folder
    )


def pointed(text: str) -> str:
    """The channel under the cursor."""
    return next((line[3:].split()[0] for line in text.splitlines() if line.startswith(">")), "")


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A folder with the short sample run, scored."""
    shutil.copy(SHORT, tmp_path)
    assert screener("score", tmp_path / SHORT.name).code == 0
    return tmp_path


@pytest.mark.parametrize("size", [(80, 24), (140, 45)])
def test_filter_view_family_decide_undo_and_report(folder: Path, size: tuple[int, int]) -> None:
    with terminal(folder, "pump_rig_short.run", size=size) as screen:
        screen.wait_for("1 of 40 channels")
        screen.send("wr <\r")
        screen.wait_for("Couldn't use that condition")
        screen.send(" 0.99 AND n > 100\r")
        screen.wait_for("channels where r < 0.99 AND n > 100")
        with RunFile.open(folder / "pump_rig_short.run", read_only=True) as run:
            results = run.results()
        few = results.filter((pl.col("r") < 0.99) & (pl.col("n") > 100))
        assert f"1 of {few.height} channels" in screen.text
        name = few["channel"][0]
        assert pointed(screen.text).split(" ")[0][:4] == name[:4]
        screen.send("\rv")
        screen.wait_for("actual minus expected")
        screen.send("]")
        screen.wait_for("expected if logistic")
        screen.send("\x1b")
        screen.wait_for("critical r")
        screen.send("x")
        screen.wait_for("leave out: 1 channel")
        screen.send("z")
        screen.wait_for("Undone for 1 channel")
        screen.send("y")
        screen.wait_for("Done again for 1 channel")
        screen.send("e" + "\x15" + "report.html\r")
        screen.wait_for("'report.html'")
        screen.send("q")
        assert screen.exit_code() == 0
        assert screen.attributes == screen.attributes_before
    with RunFile.open(folder / "pump_rig_short.run", read_only=True) as run:
        decided = run.results().filter(pl.col("decision") == "leave out")
    assert decided["channel"].to_list() == [name]
    assert "leave out" in (folder / "report.html").read_text()


def test_after_a_dropped_connection_the_screen_comes_back_to_row_sort_and_filter(folder: Path) -> None:
    with terminal(folder, "pump_rig_short.run") as screen:
        screen.wait_for("1 of 40 channels")
        screen.send("6" + DOWN * 4)
        screen.wait_for("5 of 40 channels, sorted by p")
        screen.send("x")
        screen.wait_for("leave out: 1 channel")
        screen.send(DOWN)
        name = pointed(screen.wait_for("6 of 40 channels, sorted by p"))
        with RunFile.open(folder / "pump_rig_short.run", read_only=True) as run:
            for _ in range(200):
                screen.read(0.05)
                if run.view().get("channel", "")[:4] == name[:4] and run.view().get("sort") == "p":
                    break
        screen.process.send_signal(signal.SIGHUP)
        assert screen.exit_code() == 128 + signal.SIGHUP
        assert screen.attributes == screen.attributes_before
    with terminal(folder, "pump_rig_short.csv") as screen:
        # The line at the foot may tell that everything was scored before: the row and the sort are seen in the table.
        screen.wait_for(lambda text: pointed(text) == name and " ^p " in text)
        screen.send("q")
        assert screen.exit_code() == 0
    with RunFile.open(folder / "pump_rig_short.run", read_only=True) as run:
        assert run.results()["decision"].to_list().count("leave out") == 1


def test_the_window_may_change_its_size_at_any_moment(folder: Path) -> None:
    with terminal(folder, "pump_rig_short.run") as screen:
        screen.wait_for("1 of 40 channels")
        for columns, rows, wanted in ((140, 45, "expected if"), (59, 20, "This window has 59"), (80, 24, "1 of 40")):
            screen.resize(columns, rows)
            screen.wait_for(wanted)
        screen.send("q")
        assert screen.exit_code() == 0


@pytest.mark.parametrize(
    "environment",
    [{"NO_COLOR": "1"}, {"TERM": "vt100", "LANG": "C"}, {"TERM": "linux"}],
    ids=["NO_COLOR", "C", "linux"],
)
def test_plain_terminals_get_nothing_but_ascii(folder: Path, environment: dict[str, str]) -> None:
    with terminal(folder, "pump_rig_short.run", size=(140, 45), **environment) as screen:
        screen.wait_for("expected if normal")
        for view in [*View][1:]:
            screen.send("v")
            screen.wait_for(f"   {view}")
        assert screen.text.isascii()
        if "NO_COLOR" in environment:
            styles = {code for found in re.findall(rb"\x1b\[([0-9;]*)m", screen.raw) for code in found.split(b";")}
            assert not styles & {str(code).encode() for code in (*range(30, 39), *range(40, 49), *range(90, 108))}
        screen.send("q")
        assert screen.exit_code() == 0


@pytest.mark.parametrize("term", ["screen", "tmux-256color", "xterm", "vt100"])
def test_usual_terminals_are_served(folder: Path, term: str) -> None:
    with terminal(folder, "pump_rig_short.run", TERM=term) as screen:
        screen.wait_for("1 of 40 channels")
        screen.send("\r")
        screen.wait_for("expected if normal")
        screen.send("q")
        assert screen.exit_code() == 0


def test_two_runs_are_compared_on_the_screen(folder: Path) -> None:
    table = pl.read_csv(SHORT, infer_schema_length=None)
    numbers = [name for name, kind in table.schema.items() if kind.is_float() and table[name].n_unique() > 1]
    bent = numbers[0]
    worn = table.with_columns(pl.Series(bent, np.random.default_rng(1).exponential(size=table.height)))
    worn.drop(numbers[1]).write_csv(folder / "after.csv")
    assert screener("score", folder / "after.csv").code == 0
    with terminal(folder, "compare", "pump_rig_short.run", "after.run") as screen:
        screen.wait_for("heaviest changes first")
        assert "1 missing" in screen.text
        screen.send("a1" + END)
        screen.wait_for("sorted by channel")
        screen.send("e" + "\x15" + "changes.csv\r")
        screen.wait_for("Wrote 40 channels")
        screen.send("q")
        assert screen.exit_code() == 0
        assert screen.attributes == screen.attributes_before
    changes = dict(pl.read_csv(folder / "changes.csv").select("channel", "change").iter_rows())
    assert changes[numbers[1]] == "missing"
    assert changes[bent] in {"newly flagged", "changed"}
