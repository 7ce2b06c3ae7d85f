"""Tables written by hand and read back."""

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

from screener.records import Plan, TableFacts
from screener.tables import open_table, spans


@dataclass(frozen=True)
class Opened:
    """What a test looks at."""

    facts: TableFacts
    readings: NDArray[np.float64]

    @property
    def names(self) -> list[str]:
        return [channel.name for channel in self.facts.channels]

    @property
    def reasons(self) -> dict[str, str]:
        return {column.name: column.reason for column in self.facts.set_aside}

    def of(self, name: str) -> list[float]:
        """The readings of one channel."""
        values: list[float] = self.readings[self.names.index(name)].tolist()
        return values


def opened(path: Path, plan: Plan | None = None) -> Opened:
    """The table with all its readings."""
    table = open_table(path, plan or Plan())
    blocks = [table.read(span).readings for span in spans(table.facts)]
    return Opened(table.facts, np.vstack(blocks))


OpenText = Callable[..., Opened]


@pytest.fixture
def open_text(tmp_path: Path) -> OpenText:
    """Writes a text table and opens it."""

    def write_and_open(content: str | bytes, plan: Plan | None = None, *, name: str = "table.csv") -> Opened:
        path = tmp_path / name
        path.write_bytes(content if isinstance(content, bytes) else content.encode())
        return opened(path, plan)

    return write_and_open
