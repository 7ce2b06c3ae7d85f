"""Ctrl-C leaves a run file that the same command finishes, as if nothing had happened."""

import signal
import subprocess
from collections.abc import Callable, Generator
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from command_line import PROGRAM, screener
from polars.testing import assert_frame_equal

from screener.cli.progress import Begin, StoppedError, watched
from screener.records import BlockScored, Event, Plan
from screener.runs import RunFile
from screener.screening.start import start

CHANNELS = 1200


@pytest.fixture
def wide() -> Path:
    """A table of many blocks."""
    readings = np.random.default_rng(4).normal(size=(8000, CHANNELS))
    path = Path("wide.parquet")
    pl.DataFrame(readings, schema=[f"c{k}" for k in range(CHANNELS)]).write_parquet(path, compression="uncompressed")
    return path


def interrupted_after(blocks: int, table: Path) -> Begin:
    """A run in which Ctrl-C is pressed as soon as so many blocks are scored."""

    def begin(cancelled: Callable[[], bool]) -> Generator[Event, None, None]:
        seen = 0
        for event in start(table, Plan(), Path("cut.run"), jobs=2, cancelled=cancelled):
            if isinstance(event, BlockScored):
                seen += 1
                if seen == blocks:
                    signal.raise_signal(signal.SIGINT)
            yield event

    return begin


def test_ctrl_c_ends_the_run_between_two_blocks_and_the_next_run_ends_like_an_undisturbed_one(
    wide: Path,
) -> None:
    with pytest.raises(StoppedError, match="of 1,200 channels; the same command goes on from there") as stopped:
        watched(interrupted_after(3, wide))
    assert stopped.value.exit_code == 130
    assert signal.getsignal(signal.SIGINT) is signal.default_int_handler
    with RunFile.open(Path("cut.run"), read_only=True) as run:
        kept = run.results().height
        assert 0 < kept < CHANNELS
        assert not run.finished
    assert [path.name for path in Path().glob("cut*")] == ["cut.run"]

    review = screener("flagged", "cut.run")
    assert review.code == 0
    assert f"stopped after {kept:,} of 1,200 channels; `screener score wide.parquet -o cut.run` goes on" in review.err

    resumed = screener("score", wide, "-o", "cut.run")
    assert f"scored before: {kept:,} of 1,200 channels" in resumed.err
    undisturbed = screener("score", wide, "-o", "whole.run")
    assert resumed.out == undisturbed.out
    assert_same_content(Path("cut.run"), Path("whole.run"))


def assert_same_content(one: Path, other: Path) -> None:
    with RunFile.open(one, read_only=True) as first, RunFile.open(other, read_only=True) as second:
        assert first.finished
        assert_frame_equal(first.results(), second.results(), check_exact=True)
        for position in range(0, CHANNELS, 97):
            assert_frame_equal(first.fits(position), second.fits(position), check_exact=True)
            assert np.array_equal(first.points(position), second.points(position))


def test_a_second_ctrl_c_interrupts_at_once(wide: Path) -> None:
    def impatient(cancelled: Callable[[], bool]) -> Generator[Event, None, None]:
        for event in start(wide, Plan(), Path("cut.run"), jobs=1, cancelled=lambda: False):
            if isinstance(event, BlockScored):
                signal.raise_signal(signal.SIGINT)
            yield event

    with pytest.raises(KeyboardInterrupt):
        watched(impatient)
    with RunFile.open(Path("cut.run"), read_only=True) as run:
        assert 0 < run.results().height < CHANNELS


def test_ctrl_c_is_left_alone_where_the_shell_has_turned_it_off(wide: Path) -> None:
    before = signal.signal(signal.SIGINT, signal.SIG_IGN)
    try:
        watched(interrupted_after(3, wide))
    finally:
        signal.signal(signal.SIGINT, before)
    with RunFile.open(Path("cut.run"), read_only=True) as run:
        assert run.finished


def test_the_program_tells_how_to_go_on_and_exits_with_130(wide: Path) -> None:
    ends = [interrupted_program(wide) for _ in range(3)]
    assert {code for code, _ in ends} <= {130, 0}, ends
    told = [err for code, err in ends if code == 130]
    assert told, "no attempt was quick enough to interrupt the program"
    assert all("the same command goes on" in err and "Traceback" not in err for err in told)
    assert screener("score", wide).code == 0


def interrupted_program(table: Path) -> tuple[int, str]:
    """Exit code and complaints of the program, interrupted as soon as it says where the results go."""
    with subprocess.Popen([*PROGRAM, "score", table, "--jobs", "1"], stderr=subprocess.PIPE, text=True) as running:
        assert running.stderr is not None
        for line in running.stderr:
            if "run file:" in line:
                break
        running.send_signal(signal.SIGINT)
        rest = running.stderr.read()
    Path("wide.run").unlink()
    return running.returncode, rest
