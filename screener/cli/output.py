"""Writing to standard output (data only) and to standard error (all else)."""

import os
import sys
from collections.abc import Iterable
from contextlib import suppress
from pathlib import Path

from screener.errors import ScreenerError


def put(lines: Iterable[str]) -> None:
    """Write lines of data; quietly into nothing when the next program has read enough.

    Raises: ScreenerError when they cannot be written.
    """
    if sys.stdout is None:
        raise ScreenerError("Couldn't write the output: standard output is closed.")
    try:
        sys.stdout.write("".join(f"{line}\n" for line in lines))
        sys.stdout.flush()
    except BrokenPipeError:
        _write_into_nothing()
    except OSError as error:
        _write_into_nothing()
        raise ScreenerError(
            f"Couldn't write the output: {error.strerror}. Send it somewhere else; the run file is kept."
        ) from error


def tell(*lines: str, end: str = "\n") -> None:
    """Write for the person at the terminal; nobody there to read it is no reason to stop."""
    if sys.stderr is not None:
        with suppress(OSError):
            sys.stderr.write("\n".join(lines) + end)
            sys.stderr.flush()


def safe(text: str) -> str:
    """The text with whatever a terminal might act on made visible."""
    if text.isprintable():
        return text
    from screener.runs.text import visible

    return visible(text)


def path_text(path: Path) -> str:
    """A path as it is shown."""
    return safe(str(path))


def on_terminal() -> bool:
    """Whether a person sits before both ends."""
    return all(stream is not None and stream.isatty() for stream in (sys.stdin, sys.stdout))


def _write_into_nothing() -> None:
    """What is still in the buffer must not fail again when the program ends."""
    nothing = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nothing, sys.stdout.fileno())
    os.close(nothing)
