"""A program in a pseudo-terminal, watched through a terminal emulator."""

import fcntl
import os
import pty
import select
import signal
import struct
import subprocess
import termios
import time
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import Self

import pyte

PATIENCE = 60.0
"""Seconds after which something that was waited for is taken not to happen; generous, since machines are busy."""


class PseudoTerminal:
    """Runs a program; what it shows is in `lines`, what it sent in `raw`."""

    def __init__(
        self, program: Sequence[str], *, columns: int, rows: int, environment: Mapping[str, str], folder: Path
    ) -> None:
        self._screen = pyte.Screen(columns, rows)
        self._stream = pyte.ByteStream(self._screen)
        self.raw = b""
        self.read_at = 0.0
        """When the last piece was taken in, by `time.perf_counter`, before the emulator had looked at it."""
        self._master, slave = pty.openpty()
        self.attributes_before = termios.tcgetattr(self._master)
        self._set_size(columns, rows)
        self.process = subprocess.Popen(
            program, stdin=slave, stdout=slave, stderr=slave, env=environment, cwd=folder, start_new_session=True
        )
        # The slave stays open here, so that its settings can still be read when the program has gone.
        self._slave = slave

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        if self.process.poll() is None:
            self.process.kill()
        self.process.wait()
        os.close(self._master)
        os.close(self._slave)

    @property
    def lines(self) -> list[str]:
        """The text on the screen."""
        return list(self._screen.display)

    @property
    def text(self) -> str:
        """The text on the screen as one string."""
        return "\n".join(self.lines)

    @property
    def attributes(self) -> list[object]:
        """The settings of the terminal line."""
        return termios.tcgetattr(self._slave)

    def send(self, keys: str) -> None:
        """Type."""
        os.write(self._master, keys.encode())

    def resize(self, columns: int, rows: int) -> None:
        """Make the window another size."""
        self._set_size(columns, rows)
        self._screen.resize(rows, columns)
        self.process.send_signal(signal.SIGWINCH)

    def read(self, seconds: float) -> int:
        """Take in what comes within that time, at most; the number of bytes of the first piece."""
        ready, _, _ = select.select([self._master], [], [], seconds)
        if not ready:
            return 0
        piece = os.read(self._master, 1 << 16)
        self.read_at = time.perf_counter()
        self.raw += piece
        self._stream.feed(piece)
        return len(piece)

    def wait_for(self, wanted: str | Callable[[str], bool]) -> str:
        """The text on the screen once it contains, or fulfils, what is wanted."""
        end = time.monotonic() + PATIENCE
        while time.monotonic() < end:
            if wanted in self.text if isinstance(wanted, str) else wanted(self.text):
                return self.text
            if not self.read(0.05) and self.process.poll() is not None and not self.read(0.05):
                break
        raise AssertionError(f"Waited in vain for {wanted!r}; the screen shows:\n{self.text}")

    def exit_code(self) -> int:
        """The exit code, once the program has ended."""
        end = time.monotonic() + PATIENCE
        while self.process.poll() is None and time.monotonic() < end:
            self.read(0.05)
        while self.read(0.05):
            pass
        return self.process.wait(timeout=1)

    def _set_size(self, columns: int, rows: int) -> None:
        fcntl.ioctl(self._master, termios.TIOCSWINSZ, struct.pack("HHHH", rows, columns, 0, 0))
