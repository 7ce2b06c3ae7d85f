"""What the program loads before it has anything to do."""

import subprocess
import sys

import pytest

HEAVY = {"numpy", "polars", "scipy", "textual", "rich", "plotext", "sqlite3", "concurrent"}
COMMANDS = ["open", "score", "flagged", "export", "show", "critical", "nulls", "plan", "compare"]


def loaded_by(*arguments: str) -> tuple[str, set[str]]:
    """What `screener` prints with these arguments, and the libraries that Python loads for it."""
    command = [sys.executable, "-X", "importtime", "-m", "screener", *arguments]
    done = subprocess.run(command, capture_output=True, text=True, check=True)
    reports = [line for line in done.stderr.splitlines() if line.startswith("import time:")]
    return done.stdout, {line.rpartition("|")[2].strip().partition(".")[0] for line in reports}


@pytest.mark.parametrize(
    "arguments", [["--help"], ["--version"], *([command, "--help"] for command in COMMANDS)], ids=" ".join
)
def test_help_loads_no_heavy_library(arguments: list[str]) -> None:
    printed, loaded = loaded_by(*arguments)
    assert printed
    assert {"click", "screener"} <= loaded
    assert loaded & HEAVY == set()
