"""What happens when the other end of a stream is gone, full, or cannot show a character."""

from pathlib import Path
from random import Random

import pytest
from command_line import program, shell


@pytest.mark.parametrize(
    "line",
    [
        "screener flagged rig.run | true",
        "screener flagged rig.run | head -1",
        "screener rig.run | head -1",
        "screener show rig.run wait | head -1",
        "screener export rig.run out.csv 2>&1 | true",
        "screener score rig.csv 2>&1 | true",
        "screener nulls info | head -1",
    ],
)
def test_a_reader_that_has_read_enough_is_no_failure(run_file: Path, line: str) -> None:
    outcome = shell(line, Path.cwd())
    assert (outcome.code, outcome.err.replace("3 channels written to out.csv\n", "")) == (0, "")


def test_the_verdict_is_told_by_the_exit_code_also_when_nobody_reads(run_file: Path) -> None:
    assert shell("screener flagged rig.run --fail-on-flag | true", Path.cwd()).code == 1


def test_output_that_cannot_be_written_is_one_sentence(run_file: Path) -> None:
    full = shell("screener flagged rig.run > /dev/full", Path.cwd())
    assert full.code == 1
    assert full.complaints == [full.err.rstrip()]
    assert "No space left on device" in full.err
    closed = shell("screener flagged rig.run >&-", Path.cwd())
    assert closed.code == 1
    assert closed.complaints == [closed.err.rstrip()]


def test_closed_streams_are_no_failure(run_file: Path) -> None:
    assert shell("screener score rig.csv 2>&- <&-", Path.cwd()).code == 0


def test_a_name_that_the_encoding_lacks_is_shown_as_an_escape() -> None:
    cubes = [k**3 for k in range(60)]
    Random(1).shuffle(cubes)
    Path("t.csv").write_text("µ_ε [°C]\n" + "".join(f"{cube}\n" for cube in cubes), encoding="utf-8")
    outcome = program("flagged", "t.csv", folder=Path.cwd(), PYTHONIOENCODING="ascii")
    assert (outcome.code, outcome.out) == (0, "\\xb5_\\u03b5 [\\xb0C]\n")
