"""The conditions found in the sample run, held against how its channels were made."""

from pathlib import Path

import numpy as np
import polars as pl
import pytest
from made_channels import conditions
from numpy.typing import NDArray

from screener.stats.conditions import Conditions, words_of

FOLDER = Path(__file__).parents[3] / "sample_runs"
TABLE = "pump_rig.parquet"


@pytest.fixture(scope="module")
def truth() -> pl.DataFrame:
    return pl.read_csv(FOLDER / "truth.csv").filter(pl.col("table") == TABLE)


@pytest.fixture(scope="module")
def found(truth: pl.DataFrame) -> Conditions:
    table = pl.read_parquet(FOLDER / TABLE)
    return conditions(np.array([table[name].cast(pl.Float64).to_numpy() for name in truth["channel"]]))


def called(found: Conditions, word: str) -> NDArray[np.bool_]:
    return np.array([word in words_of(found, channel) for channel in range(found.n.size)])


def test_every_step_is_the_converter_s(found: Conditions, truth: pl.DataFrame) -> None:
    assert found.step == pytest.approx(truth["step"].to_numpy(), rel=1e-9)


def test_clipped_stuck_and_interrupted_channels_are_exactly_those_made_so(
    found: Conditions, truth: pl.DataFrame
) -> None:
    clipped = truth.select(pl.col("clipped_low") + pl.col("clipped_high") > 0).to_series().to_numpy()
    assert np.array_equal(called(found, "clipped"), clipped)
    assert np.array_equal(called(found, "stuck"), (truth["stuck_share"] > 0).to_numpy())
    assert np.array_equal(called(found, "gaps"), truth["missing_in_one_stretch"].to_numpy())
    assert not called(found, "repeated values").any()


def test_clipped_readings_are_counted(found: Conditions, truth: pl.DataFrame) -> None:
    whole = (truth["missing"] == 0).to_numpy()
    assert np.array_equal(found.clipped_low[whole], truth["clipped_low"].to_numpy()[whole])
    assert np.array_equal(found.clipped_high[whole], truth["clipped_high"].to_numpy()[whole])


def test_serial_channels_are_those_made_so_but_for_the_stuck(found: Conditions, truth: pl.DataFrame) -> None:
    serial = truth["ar"].is_not_null().to_numpy() & (truth["ar"].cast(pl.String).fill_null("") != "").to_numpy()
    comparable = (truth["stuck_share"] == 0).to_numpy() & ~found.drifting
    assert np.array_equal(called(found, "serial")[comparable], serial[comparable])


def test_drifting_channels_are_only_those_made_so_and_most_of_them(found: Conditions, truth: pl.DataFrame) -> None:
    drifting = ((truth["trend_in_sd"] != 0) | (truth["walk_in_sd"] != 0)).to_numpy()
    said = called(found, "drifting")
    assert not np.any(said & ~drifting)
    # The readings of a random walk may look like those of a slow channel about a level: one does here.
    assert np.sum(said & drifting) >= np.sum(drifting) - 1
