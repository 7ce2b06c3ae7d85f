"""A program for others to kill: it stores made-up blocks in a run file, new or begun, and says of each when it is."""

import sys
from pathlib import Path

from screener.records import Span
from screener.runs import RunFile, is_run_file
from tests.runs.synthetic import block, new_run

CHANNELS = 1600
SPANS = tuple(Span(first, first + 2) for first in range(0, CHANNELS, 2))


def main(path: Path) -> None:
    """Store what is missing, then finish."""
    run = RunFile.open(path) if is_run_file(path) else new_run(path, CHANNELS)
    with run:
        done = run.done()
        for span in SPANS:
            if span not in done:
                run.store(block(span.first, span.stop))
                sys.stdout.write(f"{span.first}\n")
                sys.stdout.flush()
        run.finish()


if __name__ == "__main__":
    main(Path(sys.argv[1]))
