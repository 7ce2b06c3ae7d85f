"""Truly normal channels are flagged as often as alpha says, from table to verdict; the benchmark does it at length."""

from pathlib import Path

import numpy as np
import polars as pl
import pytest
from command_line import screener
from scipy import stats

from screener.runs import RunFile

NULL_ERROR = 0.001
"""Allowed for the null tables' own Monte Carlo error, in terms of the flagged share."""


@pytest.mark.parametrize(
    ("n", "channels"), [(10, 10_000), (50, 10_000), (200, 4_000), (1_000, 2_000), (10_000, 400)], ids=str
)
def test_normal_channels_are_flagged_at_the_stated_rate(tmp_path: Path, n: int, channels: int) -> None:
    readings = np.random.default_rng([1, n]).normal(20.0, 3.0, (n, channels))
    path, run_path = tmp_path / "normal.parquet", tmp_path / "normal.run"
    pl.DataFrame(readings, schema=[f"c{k}" for k in range(channels)]).write_parquet(path)
    assert screener("score", path, "-o", run_path).code == 0
    with RunFile.open(run_path, read_only=True) as run:
        results = run.results()
    assert results.height == channels
    for alpha in (0.05, 0.01):
        flagged = int((results["p"] < alpha).sum())
        # Outside these bounds once in ten thousand.
        low = stats.binom.ppf(5e-5, channels, alpha - NULL_ERROR)
        high = stats.binom.isf(5e-5, channels, alpha + NULL_ERROR)
        assert low <= flagged <= high, (alpha, flagged, low, high)
    assert (results["verdict"] == "flagged").to_list() == (results["p"] < 0.05).to_list()
