"""Runs the screen on the terminal, and leaves the terminal as it was, however the screen ends."""

from __future__ import annotations

import os
import select
import signal
import sys
import termios
from threading import Thread
from types import FrameType
from typing import Any

from screener.errors import ScreenerError
from screener.ui.abilities import refusal
from screener.ui.source import Source

PATIENCE = 0.3
"""Seconds that quitting waits for the run file to be closed; what is in it is safe without."""

LEAVE_SCREEN = b"\x1b[0m\x1b[?1000;1002;1003;1006;1015;2004;1004;2048l\x1b[<u\x1b[?25h\x1b[?1049l"
"""Colours, mouse, paste, focus and size reports and extended keys off; the cursor shown; the main screen back."""


class NoScreenError(ScreenerError):
    """The terminal cannot show a screen."""

    exit_code = 2


def run_screen(source: Source) -> int:
    """Show the screen until the user leaves it; the exit code.

    Raises: ScreenerError when the terminal cannot show it, or when the run turns out to be impossible.
    """
    impossible = refusal(os.environ)
    if impossible:
        raise NoScreenError(impossible)
    from screener.ui.app import ScreenerApp

    end_with_terminal()
    app = ScreenerApp(source)
    code = app.run() or 0
    stopped = app.feed.stopped_within(PATIENCE)
    broken = app.return_code or not isinstance(app.failure, ScreenerError | None)
    if broken and app.run_path is not None:
        sys.stderr.write(f"What was scored is in the run file {str(app.run_path)!r}.\n")
    if app.failure is not None:
        raise app.failure
    if app.unfinished:
        sys.stderr.write(app.unfinished + "\n")
    code = code or app.return_code or 0
    if not stopped:
        # A block in hand may take long, its thread cannot be stopped, and the run file is whole after every block.
        sys.stderr.flush()
        os._exit(code)
    return code


def end_with_terminal() -> None:
    """On SIGHUP and SIGTERM, or when the terminal is gone, end at once.

    The run file needs no farewell, the terminal does. A terminal that hangs up without a signal, as one that is not the
    controlling terminal does, would otherwise keep the reader of its keys busy for ever.
    """
    terminal = sys.__stdin__.fileno() if sys.__stdin__ is not None and sys.__stdin__.isatty() else None
    attributes = termios.tcgetattr(terminal) if terminal is not None else None

    def end(number: int, _frame: FrameType | None) -> None:
        _restore(terminal, attributes)
        os._exit(128 + number)

    signal.signal(signal.SIGHUP, end)
    signal.signal(signal.SIGTERM, end)
    if terminal is not None:
        Thread(target=_end_on_hang_up, args=(terminal,), daemon=True).start()


def _end_on_hang_up(terminal: int) -> None:
    """Sleep until the terminal hangs up, which is reported without being asked for."""
    hang_up = select.poll()
    hang_up.register(terminal, 0)
    hang_up.poll()
    os._exit(128 + signal.SIGHUP)


def _restore(terminal: int | None, attributes: list[Any] | None) -> None:
    """Bring the terminal back as far as it still listens, without waiting for it."""
    try:
        os.set_blocking(2, False)
        os.write(2, LEAVE_SCREEN)
        if terminal is not None and attributes is not None:
            termios.tcsetattr(terminal, termios.TCSANOW, attributes)
    except (OSError, termios.error):
        return
    finally:
        os.set_blocking(2, True)
