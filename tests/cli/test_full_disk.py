"""A disk that fills during a run costs the run file nothing that was stored; with room again the run ends as usual."""

from pathlib import Path

import numpy as np
import polars as pl
import pytest
from command_line import screener, shell
from polars.testing import assert_frame_equal

from screener.runs import RunFile

CHANNELS = 100


@pytest.fixture
def table() -> Path:
    """A table of four blocks, whose run file takes 1.5 MB."""
    readings = np.random.default_rng(1).normal(size=(20_000, CHANNELS)).round(3)
    path = Path("rig.parquet")
    pl.DataFrame(readings, schema=[f"c{k}" for k in range(CHANNELS)]).write_parquet(path)
    return path


@pytest.mark.parametrize("kilobytes", [20, 1000])
def test_a_full_disk_is_one_sentence_and_the_same_command_ends_the_run(table: Path, kilobytes: int) -> None:
    cut = shell(f"ulimit -f {kilobytes}; screener score {table} -o cut.run", Path.cwd())
    assert cut.code == 4
    assert len(cut.complaints) == 1
    assert "run file 'cut.run': the disk" in cut.complaints[0]
    assert "Traceback" not in cut.err
    stored = Path("cut.run").exists()
    assert stored == (kilobytes > 20)
    if stored:
        with RunFile.open(Path("cut.run"), read_only=True) as run:
            assert not run.finished
            assert 0 < run.results().height < CHANNELS
    assert screener("score", table, "-o", "cut.run").code == 0
    assert screener("score", table, "-o", "whole.run").code == 0
    with RunFile.open(Path("cut.run"), read_only=True) as cut_run, RunFile.open(Path("whole.run")) as whole:
        assert_frame_equal(cut_run.results(), whole.results())
