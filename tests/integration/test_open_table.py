"""An open table that a package bundles, screened from file to verdict, and judged again by other means.

The table: breast cancer measurements of W. H. Wolberg et al. (1995), 569 rows of 30, as scikit-learn bundles them.
"""

import json
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from command_line import screener
from handbook import table as published_table
from scipy import stats
from sklearn.datasets import load_breast_cancer

ROWS, CHANNELS = 569, 30


@pytest.fixture(scope="module")
def measurements() -> pl.DataFrame:
    bundled = load_breast_cancer()
    assert bundled.data.shape == (ROWS, CHANNELS)
    return pl.DataFrame(bundled.data, schema=[str(name) for name in bundled.feature_names])


def screened(measurements: pl.DataFrame, ending: str, folder: Path, *options: str) -> pl.DataFrame:
    """The exported results of the measurements, written to a file and screened by commands."""
    path = folder / f"cells{ending}"
    if ending == ".csv":
        measurements.write_csv(path)
    else:
        measurements.write_parquet(path)
    assert screener("score", path, "-o", folder / "cells.run", *options).code == 0
    assert screener("export", folder / "cells.run", folder / "out.json").code == 0
    return pl.DataFrame(json.loads((folder / "out.json").read_text())["channels"], infer_schema_length=None)


@pytest.mark.parametrize("ending", [".csv", ".parquet"])
@pytest.mark.parametrize(
    ("rows", "alpha", "flagged"), [(569, 0.05, 30), (569, 0.01, 30), (50, 0.05, 14), (50, 0.01, 11)]
)
def test_flags_are_those_of_scipy_and_the_handbook(
    measurements: pl.DataFrame, tmp_path: Path, ending: str, rows: int, alpha: float, flagged: int
) -> None:
    first = measurements.head(rows)
    # Some measurements have a heap at 0, which counts as clipped unless the textbook value is asked for.
    results = screened(first, ending, tmp_path, "--plain", "--alpha", str(alpha))
    assert results["channel"].to_list() == first.columns
    assert set(results["n"]) == {rows}

    r = np.array([stats.probplot(first[name].to_numpy(), dist="norm")[1][2] for name in first.columns])
    assert results["r"].to_numpy() == pytest.approx(r, abs=1e-9)

    # NIST/SEMATECH e-Handbook 1.3.6.7.6. It has n = 50; of 569 the neighbours 550 and 575 decide alike, so that no
    # value between them could change a verdict.
    sizes, probability, critical = published_table("nist_normal_filliben")
    neighbours = [50] if rows == 50 else [550, 575]
    below, above = (critical[sizes == n][0, probability == alpha].item() for n in (neighbours[0], neighbours[-1]))
    assert ((r < below) == (r < above)).all()
    assert ((results["verdict"] == "flagged").to_numpy() == (r < below)).all()
    assert (r < below).sum() == flagged


def test_q_is_that_of_scipy_and_decides_under_control_of_false_discoveries(
    measurements: pl.DataFrame, tmp_path: Path
) -> None:
    results = screened(measurements, ".parquet", tmp_path, "--control", "fdr", "--alpha", "0.01")
    q = stats.false_discovery_control(results["p"].to_numpy())
    assert results["q"].to_numpy() == pytest.approx(q, rel=1e-12)
    assert ((results["verdict"] == "flagged").to_numpy() == (q < 0.01)).all()


def test_logarithms_are_judged_as_the_lognormal_family_judges_the_readings(
    measurements: pl.DataFrame, tmp_path: Path
) -> None:
    # A family on the log axis is held against ln x: two ways through the whole program that must end alike.
    positive = measurements.select(column for column in measurements if column.min() > 0)  # type: ignore[operator]
    (tmp_path / "plain").mkdir()
    (tmp_path / "logs").mkdir()
    plain = screened(positive, ".parquet", tmp_path / "plain", "--family", "lognormal")
    logs = screened(positive.select(pl.all().log()), ".parquet", tmp_path / "logs")
    assert plain["r"].to_numpy() == pytest.approx(logs["r"].to_numpy(), abs=1e-9)
    assert plain["verdict"].to_list() == logs["verdict"].to_list()
    assert 0 < (plain["verdict"] == "flagged").sum() < positive.width
