"""Conditions on rows: words, SQL, and what is said of those that cannot be used."""

import polars as pl
import pytest
from made_run import made_run

from screener.records import RESULT_COLUMNS
from screener.ui.conditions import ConditionError, matching


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> pl.DataFrame:
    """Sixty channels, two of them decided about."""
    with made_run(tmp_path_factory.mktemp("run") / "a.run", 60) as run:
        run.annotate([3], "Seal changed")
        return run.results()


@pytest.mark.parametrize(
    ("condition", "same"),
    [
        ("r < 0.98 AND n > 100", (pl.col("r") < 0.98) & (pl.col("n") > 100)),
        ("verdict = 'flagged' or r > 0.999", (pl.col("verdict") == "flagged") | (pl.col("r") > 0.999)),
        ("channel LIKE 'flow_1%'", pl.col("channel").str.starts_with("flow_1")),
        ("p IS NULL", pl.col("p").is_null()),
        ("not scored", pl.col("verdict") == "not scored"),
        ("FLAGGED", pl.col("verdict") == "flagged"),
        ("seal", pl.col("note").is_not_null()),
        ("1 = 1", pl.col("position") >= 0),
    ],
)
def test_rows_that_fulfil_it_are_found(results: pl.DataFrame, condition: str, same: pl.Expr) -> None:
    found = results.filter(matching(results, condition))
    assert found["position"].to_list() == results.filter(same)["position"].to_list()
    assert found.height > 0


@pytest.mark.parametrize(
    ("condition", "said"),
    [
        ("r <", "Couldn't use that condition"),
        ("rr < 0.5", "There is no column 'rr' (a text stands in single quotes). Columns: channel, unit, n,"),
        ("r + 1", "neither true nor false"),
        ("max(r) = 'x'", "Couldn't use that condition"),
        ("sausage", "No channel has 'sausage' in its verdict"),
        ("r < 1; DROP TABLE x", "Couldn't use that condition"),
        ("(SELECT count(*) FROM read_csv('/etc/passwd')) > 0", "Couldn't use that condition"),
        ("r < 1\x1b[2J", "Couldn't use that condition"),
        ("position > 3", "There is no column 'position'"),
    ],
)
def test_what_cannot_be_used_is_explained(results: pl.DataFrame, condition: str, said: str) -> None:
    with pytest.raises(ConditionError) as caught:
        matching(results, condition)
    assert said in str(caught.value)
    assert str(caught.value).isprintable()


def test_every_export_column_can_be_asked_for(results: pl.DataFrame) -> None:
    for name in RESULT_COLUMNS:
        matching(results, f"{name} IS NOT NULL")
