"""The terminal screen: what a run found, channel by channel, while it is found and afterwards.

Threads read and score and post messages; widgets show what the messages bring. Nothing heavy is imported before the
first frame is on the terminal.
"""

from screener.ui.source import Source
from screener.ui.terminal import run_screen

__all__ = ["Source", "run_screen"]
