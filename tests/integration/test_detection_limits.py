"""Readings beyond detection limits in a text table are censored at that side, from file to verdict."""

from pathlib import Path

import numpy as np
import polars as pl
import pytest
from command_line import screener
from numpy.typing import NDArray
from scipy import stats

N = 400
RNG = np.random.default_rng(5)
NORMAL = RNG.normal(10.0, 1.0, (4, N)).round(3)
WAITS = RNG.exponential(3.0, N).round(3)


def limited(values: NDArray[np.float64], low: float = -np.inf, high: float = np.inf) -> list[str]:
    """Cells as a laboratory reports them."""
    return [f"<{low:g}" if v < low else f">{high:g}" if v > high else f"{v:.3f}" for v in values]


LIMITS = RNG.uniform(9.0, 11.0, N).round(2)

CELLS = {
    "whole": limited(NORMAL[0]),
    "low": limited(NORMAL[1], low=9.2),
    "both": limited(NORMAL[2], low=9.0, high=11.0),
    # The second half was measured with the better instrument.
    "two": [*limited(NORMAL[3, : N // 2], low=9.2), *limited(NORMAL[3, N // 2 :], low=8.5)],
    "waits": limited(WAITS, low=1.0),
    # Every specimen has a limit of its own.
    "each": [f"<{low}" if v < low else str(v) for v, low in zip(NORMAL[0], LIMITS, strict=True)],
}
KNOWN = {
    "whole": (NORMAL[0], -np.inf, np.inf),
    "low": (NORMAL[1], 9.2, np.inf),
    "both": (NORMAL[2], 9.0, 11.0),
    "two": (NORMAL[3], 9.2, np.inf),
    "waits": (WAITS, 1.0, np.inf),
}


@pytest.fixture(scope="module")
def results(tmp_path_factory: pytest.TempPathFactory) -> dict[str, dict[str, object]]:
    """The exported rows, by channel."""
    folder: Path = tmp_path_factory.mktemp("limits")
    rows = [",".join(CELLS), *(",".join(cells) for cells in zip(*CELLS.values(), strict=True))]
    (folder / "lab.csv").write_text("\n".join(rows) + "\n")
    assert screener("score", folder / "lab.csv", "-o", folder / "lab.run").code == 0
    assert screener("export", folder / "lab.run", folder / "lab.parquet").code == 0
    return {str(row["channel"]): row for row in pl.read_parquet(folder / "lab.parquet").iter_rows(named=True)}


@pytest.mark.parametrize("channel", KNOWN)
def test_r_is_that_of_the_known_readings_at_the_positions_of_all(
    results: dict[str, dict[str, object]], channel: str
) -> None:
    values, low, high = KNOWN[channel]
    expected, ordered = stats.probplot(values, fit=False)
    known = (ordered >= low) & (ordered <= high)
    assert results[channel]["r"] == pytest.approx(np.corrcoef(expected[known], ordered[known])[0, 1], abs=1e-8)
    assert results[channel]["n"] == N


def test_limits_alone_flag_no_normal_channel_and_hide_no_other(results: dict[str, dict[str, object]]) -> None:
    verdicts = {name: row["verdict"] for name, row in results.items()}
    assert verdicts == {"whole": "clear", "low": "clear", "both": "clear", "two": "clear", "waits": "flagged"} | {
        "each": "not scored"
    }


def test_a_channel_of_which_too_little_is_known_says_so(results: dict[str, dict[str, object]]) -> None:
    beyond = np.count_nonzero(NORMAL[0] < max(low for v, low in zip(NORMAL[0], LIMITS, strict=True) if v < low))
    assert 2 * beyond > N
    assert results["each"]["reason"] == f"{beyond} of {N} readings lie beyond a limit: too few are known"


def test_conditions_count_the_cells_beyond_a_limit(results: dict[str, dict[str, object]]) -> None:
    for name, cells in CELLS.items():
        said = str(results[name]["conditions"] or "")
        assert "clipped" not in said, said
        for side, sign in (("below", "<"), ("above", ">")):
            count = sum(cell.startswith(sign) for cell in cells)
            assert (f"{count} {side} detection limit" in said) == (count > 0), said
