"""The command line as its users meet it: what it prints where, and its exit code."""

import io
import os
import subprocess
import sys
from collections.abc import Sequence
from contextlib import redirect_stderr, redirect_stdout
from dataclasses import dataclass
from pathlib import Path

from screener.cli import main

PROGRAM = (sys.executable, "-m", "screener")


@dataclass(frozen=True, slots=True)
class Outcome:
    """How a command ended."""

    code: int
    out: str
    err: str

    @property
    def complaints(self) -> list[str]:
        """The lines that begin as complaints do."""
        return [line for line in self.err.splitlines() if line.startswith("screener: ")]


def screener(*arguments: str | Path) -> Outcome:
    """Run the command line in this process, without a terminal."""
    out, err = io.TextIOWrapper(io.BytesIO(), "utf-8"), io.StringIO()
    before, sys.argv = sys.argv, ["screener", *map(str, arguments)]
    try:
        with redirect_stdout(out), redirect_stderr(err):
            code = _exit_code()
    finally:
        sys.argv = before
    out.seek(0)
    return Outcome(code, out.read(), err.getvalue())


def program(*arguments: str | Path, folder: Path, **environment: str) -> Outcome:
    """Run the installed program."""
    done = subprocess.run(
        [*PROGRAM, *map(str, arguments)],
        cwd=folder,
        capture_output=True,
        text=True,
        stdin=subprocess.DEVNULL,
        env={**os.environ, **environment},
        check=False,
    )
    return Outcome(done.returncode, done.stdout, done.stderr)


def shell(line: str, folder: Path, names: Sequence[str] = ()) -> Outcome:
    """Run a line of bash in which `screener` is the program and $1, $2, ... are the names."""
    script = f'screener() {{ "{sys.executable}" -m screener "$@"; }}; set -o pipefail; {line}'
    done = subprocess.run(
        ["bash", "-c", script, "bash", *names],
        cwd=folder,
        capture_output=True,
        text=True,
        stdin=subprocess.DEVNULL,
        check=False,
    )
    return Outcome(done.returncode, done.stdout, done.stderr)


def _exit_code() -> int:
    try:
        main()
    except SystemExit as end:
        return int(end.code or 0)
    raise AssertionError("the command line always ends the process")
