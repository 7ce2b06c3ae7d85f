"""The screen in a real pseudo-terminal."""

import os
import signal
import sys
import textwrap
from pathlib import Path

import polars as pl
import pytest
from made_run import made_run
from pseudo_terminal import PseudoTerminal

from screener.runs import RunFile

SUPPORT = Path(__file__).parent.parent / "support"
REVIEW = """
    import sys
    from pathlib import Path
    from screener.ui import Source, run_screen
    sys.exit(run_screen(Source("made.run", None, Path("made.run"))))
"""
ENDLESS = """
    import sys, time
    from pathlib import Path
    sys.path.insert(0, {support!r})
    from made_run import made_facts, made_scores
    from screener.records import BlockScored, Plan, TableOpened
    from screener.runs import RunFile
    from screener.ui import Source, run_screen

    def start(cancelled):
        facts, plan = made_facts(100), Plan()
        run = RunFile.create(Path("endless.run"), facts, plan, version="0", null_version="0")
        yield TableOpened(facts, plan, run.path, 0)
        scores = made_scores(0, 10)
        run.store(scores)
        yield BlockScored(scores)
        time.sleep(3600)

    sys.exit(run_screen(Source("endless.csv", start, None)))
"""
CRASHING = """
    import sys
    from pathlib import Path
    from screener.ui import Source, run_screen
    from screener.ui.widgets.channel_table import ChannelTable

    def crash(*_, **__):
        raise RuntimeError("crash of a test")

    ChannelTable.show = crash
    sys.exit(run_screen(Source("made.run", None, Path("made.run"))))
"""
DUMB = """
    import sys
    from pathlib import Path
    from screener.errors import ScreenerError
    from screener.ui import Source, run_screen
    try:
        run_screen(Source("made.run", None, Path("made.run")))
    except ScreenerError as error:
        print(error)
        sys.exit(error.exit_code)
"""
MAIN_SCREEN_BACK = b"\x1b[?1049l"
CURSOR_SHOWN = b"\x1b[?25h"


def environment(**more: str) -> dict[str, str]:
    """What a user's shell hands down, without anything of this test run."""
    kept = {name: os.environ[name] for name in ("PATH", "HOME", "PYTHONPATH") if name in os.environ}
    return {**kept, "TERM": "xterm-256color", "LANG": "C.UTF-8", **more}


def program(folder: Path, script: str, *, size: tuple[int, int] = (80, 24), **more: str) -> PseudoTerminal:
    """The script in a pseudo-terminal of that size."""
    text = textwrap.dedent(script).format(support=str(SUPPORT))
    given = environment(**more)
    return PseudoTerminal([sys.executable, "-c", text], columns=size[0], rows=size[1], environment=given, folder=folder)


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A folder with a run file of 240 channels."""
    made_run(tmp_path / "made.run", 240).close()
    return tmp_path


def test_rows_sort_plot_export_and_quit(folder: Path) -> None:
    with program(folder, REVIEW) as run:
        run.wait_for("1 of 240 channels")
        assert run.lines[0].startswith("bench_run.csv   120 rows x 240 channels")
        assert run.lines[3].startswith(">!  flow_0")
        run.send("6")
        run.wait_for("sorted by p, rising")
        run.send("\x1b[H")
        run.wait_for(lambda text: "1 of 240 channels, sorted by p" in text)
        run.send("\r")
        run.wait_for("expected if normal")
        assert any("•" in line for line in run.lines)
        run.send("]")
        run.wait_for("expected if logistic")
        run.send("\x1b")
        run.wait_for("critical r")
        run.send("e")
        run.wait_for("Export these rows")
        run.send("\x15rows.csv\r")
        run.wait_for("Wrote 240 channels to 'rows.csv'.")
        run.send("q")
        assert run.exit_code() == 0
        assert MAIN_SCREEN_BACK in run.raw[-400:]
        assert CURSOR_SHOWN in run.raw[-400:]
        assert run.attributes == run.attributes_before
    assert pl.read_csv(folder / "rows.csv").height == 240


def test_keys_that_arrive_together_are_acted_upon_in_order(folder: Path) -> None:
    with program(folder, REVIEW) as run:
        run.wait_for("1 of 240 channels")
        run.send("f/w_15x\x7f3")
        run.wait_for("Find: w_153")
        run.wait_for("\n>!  flow_153 ")
        run.send("\x1b")
        run.wait_for("q quit")
        run.send("\x1b[B\x1b[B6f\r]")
        run.wait_for("expected if logistic")
        run.send("q")
        assert run.exit_code() == 0


def test_the_window_may_change_its_size_at_any_moment(folder: Path) -> None:
    with program(folder, REVIEW) as run:
        run.wait_for("1 of 240 channels")
        run.resize(140, 45)
        run.wait_for("expected if normal")
        run.resize(40, 10)
        run.wait_for("This window has 40 x 10 cells.")
        run.resize(80, 24)
        run.wait_for(lambda text: "1 of 240 channels" in text and "expected if" not in text)
        run.send("q")
        assert run.exit_code() == 0


@pytest.mark.parametrize("more", [{"LANG": "C"}, {"NO_COLOR": "1"}, {"TERM": "linux"}, {"TERM": "vt100"}])
def test_plain_terminals_get_pure_ascii(folder: Path, more: dict[str, str]) -> None:
    with program(folder, REVIEW, size=(140, 45), **more) as run:
        run.wait_for("expected if normal")
        run.send("?")
        run.wait_for("Cautions")
        run.send("\x1b")
        run.wait_for("expected if normal")
        run.send("q")
        assert run.exit_code() == 0
        assert run.raw.isascii()


def test_with_no_color_no_colour_code_is_sent(folder: Path) -> None:
    with program(folder, REVIEW, size=(140, 45), NO_COLOR="1") as run:
        run.wait_for("expected if normal")
        run.send("q")
        assert run.exit_code() == 0
        styles = [piece.partition(b"m")[0] for piece in run.raw.split(b"\x1b")[1:]]
        styles = [style for style in styles if style.startswith(b"[") and set(style[1:]) <= set(b"0123456789;")]
        assert styles
        assert set(b";".join(style[1:] for style in styles).split(b";")) <= {b"", *(b"%d" % k for k in range(28))}


def test_a_dumb_terminal_is_refused_in_a_sentence(folder: Path) -> None:
    with program(folder, DUMB, TERM="dumb") as run:
        assert run.exit_code() == 2
        assert b"this terminal (TERM=dumb) cannot place text" in run.raw
        assert b"\x1b" not in run.raw


@pytest.mark.parametrize("number", [signal.SIGTERM, signal.SIGHUP])
def test_a_signal_to_end_restores_the_terminal(folder: Path, number: signal.Signals) -> None:
    with program(folder, REVIEW) as run:
        run.wait_for("1 of 240 channels")
        run.process.send_signal(number)
        assert run.exit_code() == 128 + number
        assert MAIN_SCREEN_BACK in run.raw[-400:]
        assert CURSOR_SHOWN in run.raw[-400:]
        assert run.attributes == run.attributes_before


def test_ctrl_z_hands_the_terminal_back_and_fg_brings_the_screen_back(folder: Path) -> None:
    with PseudoTerminal(
        ["bash", "--norc", "--noprofile", "-i"], columns=80, rows=24, environment=environment(PS1="% "), folder=folder
    ) as shell:
        shell.wait_for("% ")
        shell.send(f"{sys.executable} -m screener made.run; echo left with $?\r")
        shell.wait_for("1 of 240 channels")
        shell.send("\x1b[B")
        shell.wait_for("2 of 240 channels")
        shell.send("\x1a")
        shell.wait_for("Stopped")
        shell.send("echo cooked $((6 * 7))\r")
        shell.wait_for("cooked 42")
        shell.send("fg\r")
        shell.wait_for("2 of 240 channels")
        shell.send("\x1b[B")
        shell.wait_for("3 of 240 channels")
        shell.send("q")
        shell.wait_for(lambda _: shell.raw.count(MAIN_SCREEN_BACK) == 2)
        shell.send("stty -a; exit\r")
        shell.exit_code()
        settings = shell.raw.rpartition(MAIN_SCREEN_BACK)[2].split()
        assert {b"icanon", b"echo", b"isig"} <= set(settings)


def test_a_crash_restores_the_terminal_and_says_where_the_run_file_is(folder: Path) -> None:
    with program(folder, CRASHING) as run:
        run.wait_for("crash of a test")
        assert run.exit_code() != 0
        last = run.raw.rpartition(MAIN_SCREEN_BACK)[2].decode()
        assert CURSOR_SHOWN in run.raw
        assert "What was scored is in the run file 'made.run'." in last
        assert "RuntimeError: " in last
        assert run.attributes == run.attributes_before


def test_quitting_does_not_wait_for_a_running_task_and_the_run_file_is_whole(folder: Path) -> None:
    with program(folder, ENDLESS) as run:
        run.wait_for("of 10 channels")
        run.send("q")
        assert run.exit_code() == 0
        assert b"the same command goes on from there" in run.raw
        assert run.attributes == run.attributes_before
    with RunFile.open(folder / "endless.run") as left:
        assert left.results().height == 10


@pytest.mark.parametrize("size", [(80, 24), (140, 45)])
def test_names_from_a_file_send_nothing_to_the_terminal(tmp_path: Path, size: tuple[int, int]) -> None:
    names = {0: "a\x1b]0;owned\x07b\x9b2Jc\u202ed", 1: "[@click=app.quit]x[/]", 2: "[/] y"}
    made_run(tmp_path / "made.run", 3, names=names).close()
    with program(tmp_path, REVIEW, size=size) as run:
        run.wait_for("1 of 3 channels")
        run.send("i")
        run.wait_for("Columns set aside")
        run.send("\x1b")
        run.wait_for("1 of 3 channels")
        run.send("\r")
        run.wait_for("expected if normal")
        run.send("q")
        assert run.exit_code() == 0
        assert b"owned" not in run.raw.replace(b"\\x1b]0;owned", b"")
        assert b"\x1b]0;owned" not in run.raw
        assert b"\x9b2J" not in run.raw
        assert "\u202e".encode() not in run.raw
