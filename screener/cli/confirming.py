"""Confirming a channel from the command line, with progress on standard error."""

import sys
import time
from typing import TYPE_CHECKING

from screener.cli.output import tell
from screener.cli.progress import PAUSE

if TYPE_CHECKING:
    from screener.runs import RunFile


def confirm_and_keep(run: "RunFile", position: int, samples: int) -> None:
    """Hold the channel against samples of its own process, and keep the result in the run file.

    Raises: ScreenerError when that cannot be done.
    """
    from screener.runs import RunFile
    from screener.screening.confirmation import confirm

    rewriting = sys.stderr is not None and sys.stderr.isatty()
    told = time.monotonic()
    for reached in confirm(run.facts, run.plan, position, samples):
        line = f"{reached.made:,} of {reached.wanted:,} samples"
        if rewriting:
            tell("\r" + line.ljust(40), end="" if reached.made < reached.wanted else "\n")
        elif time.monotonic() - told >= PAUSE:
            told = time.monotonic()
            tell(line)
    with RunFile.open(run.path) as writable:
        writable.store_confirmation(position, reached.confirmation)
