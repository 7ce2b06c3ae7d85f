"""`screener compare` on two real runs."""

import json
from pathlib import Path

import numpy as np
import polars as pl
import pytest
from command_line import screener


@pytest.fixture
def runs() -> tuple[Path, Path]:
    """A run before and one after: one channel has worn, one was mended, one has gone, one is new."""
    for seed, name in ((1, "before"), (2, "after")):
        rng = np.random.default_rng(seed)
        table = {f"level_{k}": rng.normal(size=400) for k in range(6)}
        bent, straight = rng.exponential(size=400), rng.normal(size=400)
        table["worn"], table["mended"] = (straight, bent) if name == "before" else (bent, straight)
        table["gone" if name == "before" else "added"] = rng.normal(size=400)
        pl.DataFrame(table).write_csv(f"{name}.csv")
        assert screener("score", f"{name}.csv", "--alpha", "0.001").code == 0
    return Path("before.run"), Path("after.run")


def test_only_changes_are_printed_the_heaviest_first(runs: tuple[Path, Path]) -> None:
    outcome = screener("compare", *runs)
    assert outcome.code == 0
    head, _, titles, *rows = outcome.out.splitlines()
    assert head == "10 channels: 1 newly flagged, 1 cleared, 1 missing, 1 new, 6 same"
    assert titles.split()[:2] == ["channel", "change"]
    assert [row.split()[0] for row in rows] == ["worn", "mended", "gone", "added"]
    assert len(screener("compare", *runs, "--all").out.splitlines()) == 13


@pytest.mark.parametrize("ending", [".csv", ".parquet", ".json"])
def test_a_comparison_is_exported(runs: tuple[Path, Path], ending: str) -> None:
    outcome = screener("compare", *runs, "-o", f"x{ending}", "--sort", "channel", "--all")
    assert (outcome.code, outcome.out) == (0, "")
    if ending == ".json":
        names = [row["channel"] for row in json.loads(Path("x.json").read_text())["channels"]]
    else:
        names = (pl.read_csv if ending == ".csv" else pl.read_parquet)(f"x{ending}")["channel"].to_list()
    assert names == sorted(names)
    assert len(names) == 10


def test_a_run_compared_with_itself_has_no_changes(runs: tuple[Path, Path]) -> None:
    outcome = screener("compare", runs[0], runs[0])
    assert outcome.out == "9 channels: 9 same\n"


@pytest.mark.parametrize(
    ("names", "code", "said"),
    [
        (("before.csv", "after.run"), 4, "it is not a run file. Score it first"),
        (("none.run", "after.run"), 4, "there is no such file"),
        (("before.run", "after.run", "-o", "x.pdf"), 4, "Use one of .csv, .parquet, .json."),
    ],
)
def test_what_cannot_be_compared_is_refused_in_a_sentence(
    runs: tuple[Path, Path], names: tuple[str, ...], code: int, said: str
) -> None:
    assert runs[0].exists()
    outcome = screener("compare", *names)
    assert outcome.code == code
    assert said in outcome.complaints[0]
