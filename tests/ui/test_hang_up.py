"""A terminal that goes away without a signal ends the program, instead of leaving it busy for ever."""

import fcntl
import os
import pty
import select
import struct
import subprocess
import sys
import termios
import time
from pathlib import Path

from made_run import made_run


def test_the_screen_ends_when_its_terminal_hangs_up(tmp_path: Path) -> None:
    made_run(tmp_path / "a.run", 20).close()
    ours, theirs = pty.openpty()
    fcntl.ioctl(theirs, termios.TIOCSWINSZ, struct.pack("HHHH", 24, 80, 0, 0))
    environment = {**os.environ, "TERM": "xterm-256color", "LANG": "C.UTF-8"}
    program = subprocess.Popen(
        [sys.executable, "-m", "screener", "a.run"],
        stdin=theirs,
        stdout=theirs,
        stderr=theirs,
        cwd=tmp_path,
        env=environment,
        start_new_session=True,
    )
    os.close(theirs)
    seen, deadline = b"", time.monotonic() + 30
    while b"channels" not in seen and time.monotonic() < deadline:
        if select.select([ours], [], [], 0.2)[0]:
            seen += os.read(ours, 65536)
    assert b"channels" in seen
    os.close(ours)
    assert program.wait(20) == 129
