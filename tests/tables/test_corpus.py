"""Every file of the corpus is read as expected."""

import json
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from numpy.testing import assert_array_equal

from screener.records import Plan
from tests.tables.conftest import opened

CORPUS = Path(__file__).parent / "corpus"
EXPECTED: dict[str, dict[str, Any]] = json.loads((CORPUS / "expected.json").read_text(encoding="utf-8"))


@pytest.mark.parametrize("name", EXPECTED)
def test_a_file_of_the_corpus_is_read_as_expected(name: str) -> None:
    expected = EXPECTED[name]
    settings: dict[str, Any] = {
        key: tuple(value) if isinstance(value, list) else value for key, value in expected["plan"].items()
    }
    table = opened(CORPUS / name, replace(Plan(), **settings))
    assert table.names == list(expected["channels"])
    assert_array_equal(table.readings, np.array(list(expected["channels"].values()), dtype=np.float64))
    assert tuple(table.reasons) == tuple(expected["aside"])
    units = {channel.name: channel.unit for channel in table.facts.channels}
    assert {name: units[name] for name in expected["units"]} == expected["units"]
    censored = {channel.name: [channel.below, channel.above] for channel in table.facts.channels}
    assert {name: counts for name, counts in censored.items() if any(counts)} == expected["censored"]
    assert expected["dialect"] in {None, table.facts.dialect}
    assert expected["remark"] in " ".join(table.facts.remarks)
    proposed = [[one.value, one.channels, one.cells] for one in table.facts.proposals]
    assert proposed == expected["proposals"]


def test_the_corpus_is_whole() -> None:
    made = {path.name for path in CORPUS.iterdir() if path.is_file()} - {"make.py", "expected.json"}
    assert made == set(EXPECTED)
    assert len(made) >= 40
