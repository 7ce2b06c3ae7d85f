"""Confirming a channel from the command line, with progress on standard error."""

import sys
import time
from typing import TYPE_CHECKING

from screener.cli.output import tell
from screener.cli.progress import PAUSE
from screener.errors import RunFileError

if TYPE_CHECKING:
    from screener.records import Confirmation
    from screener.runs import RunFile


def confirmed(run: "RunFile", position: int, samples: int) -> "Confirmation":
    """What samples of the channel's own process say, kept in the run file; told when it cannot be kept there.

    Raises: ScreenerError when the channel cannot be confirmed.
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
    try:
        with RunFile.open(run.path) as writable:
            writable.store_confirmation(position, reached.confirmation)
    except RunFileError as error:
        tell(f"screener: {error}")
    return reached.confirmation
