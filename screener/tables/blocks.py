"""How the channels of a table are cut into blocks."""

import os

from screener.records import Span, TableFacts

BLOCK_BYTES = 4_000_000
_READING_BYTES = 8


def spans(facts: TableFacts, block_bytes: int = BLOCK_BYTES) -> list[Span]:
    """Spans that cover every channel once, in order; the same table shape always gives the same spans.

    A span holds at least one channel, so with many rows a block is larger than `block_bytes`.
    """
    count = len(facts.channels)
    width = max(1, block_bytes // (_READING_BYTES * max(1, facts.rows)))
    return [Span(first, min(first + width, count)) for first in range(0, count, width)]


def machine_memory() -> int:
    """Bytes of memory in this machine."""
    return os.sysconf("SC_PAGE_SIZE") * os.sysconf("SC_PHYS_PAGES")


def block_bytes(facts: TableFacts) -> int:
    """The readings of the largest block, in bytes."""
    return max((span.stop - span.first for span in spans(facts)), default=0) * facts.rows * _READING_BYTES
