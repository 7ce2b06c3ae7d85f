"""Tables that several tests of the command line need."""

from pathlib import Path

import numpy as np
import polars as pl
import pytest


@pytest.fixture(autouse=True)
def in_a_folder_of_its_own(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """The working directory is empty but for what the test puts there."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


@pytest.fixture
def table(tmp_path: Path) -> Path:
    """A CSV file: two normal channels, one of waiting times, and a column of text."""
    rng = np.random.default_rng(2)
    frame = pl.DataFrame(
        {
            "operator": ["ann", "bo"] * 100,
            "level_1 [mm]": rng.normal(10.0, 1.0, 200).round(4),
            "level_2 [mm]": rng.normal(20.0, 2.0, 200).round(4),
            "wait [s]": rng.exponential(3.0, 200).round(4),
        }
    )
    path = tmp_path / "rig.csv"
    frame.write_csv(path)
    return Path(path.name)


@pytest.fixture
def run_file(table: Path) -> Path:
    """The run file of that table."""
    from command_line import screener

    assert screener("score", table).code == 0
    return Path("rig.run")
