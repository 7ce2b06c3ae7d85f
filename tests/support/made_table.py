"""A table held in memory, of which some channels cannot be read."""

import threading
from collections.abc import Mapping
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from screener.records import Block, Channel, Span, TableFacts


class MadeTable:
    """Gives out copies of its readings, float64[channels, rows]; raises for a span that holds a broken channel."""

    def __init__(self, readings: NDArray[np.float64], broken: Mapping[int, BaseException] | None = None) -> None:
        channels, rows = readings.shape
        self._readings = readings
        self._broken = broken or {}
        self.facts = TableFacts(
            path=Path("made.csv"),
            format="CSV",
            rows=rows,
            channels=tuple(Channel(k, f"c{k}") for k in range(channels)),
            set_aside=(),
            fingerprint="made",
        )
        self.read_spans: list[Span] = []
        self.threads: set[int] = set()

    def read(self, span: Span) -> Block:
        """The readings of a span."""
        self.read_spans.append(span)
        self.threads.add(threading.get_ident())
        for position in range(span.first, span.stop):
            if position in self._broken:
                raise self._broken[position]
        return Block(span, self._readings[span.first : span.stop].copy())
