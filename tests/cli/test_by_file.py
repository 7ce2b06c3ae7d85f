"""Several files of one layout: each reading keeps its file as a possible factor."""

import sqlite3
from contextlib import closing
from pathlib import Path

import numpy as np
import pytest
from command_line import screener

SIZES = {"run_1.csv": 50, "run_2.csv": 70, "run_10.csv": 40}
MEANS = (5.0, 5.5, 9.0)


@pytest.fixture
def torque() -> dict[str, np.ndarray[tuple[int], np.dtype[np.float64]]]:
    """What the files hold of one channel, in counting order; the third file has another mean."""
    rng = np.random.default_rng(8)
    made = {}
    for (name, size), mean in zip(SIZES.items(), MEANS, strict=True):
        made[name] = rng.normal(mean, 1.0, size).round(3)
        cells = [f"{a},{b:.3f}" for a, b in zip(made[name], rng.normal(0.0, 2.0, size), strict=True)]
        cells[4] = f"OPEN,{cells[4].split(',')[1]}"
        made[name] = np.delete(made[name], 4)
        Path(name).write_text("torque,play\n" + "\n".join(cells) + "\n")
    return made


def test_show_by_file_gives_rows_n_mean_and_sd_of_each_file(
    torque: dict[str, np.ndarray[tuple[int], np.dtype[np.float64]]],
) -> None:
    screener("score", "run_*.csv")
    told = screener("show", "run.run", "torque", "--by", "file").out.splitlines()
    at = next(number for number, line in enumerate(told) if line.startswith("file "))
    lines = [line.split() for line in told[at + 1 : at + 4]]
    assert [line[0] for line in lines] == list(SIZES)
    assert [" ".join(line[1:5]) for line in lines] == ["rows 1 to 50", "rows 51 to 120", "rows 121 to 160"]
    for line, readings in zip(lines, torque.values(), strict=True):
        assert int(line[5]) == readings.size
        assert [float(cell) for cell in line[6:]] == pytest.approx([readings.mean(), readings.std(ddof=1)], rel=1e-5)
    every = np.concatenate(list(torque.values()))
    between = sum(part.size * (part.mean() - every.mean()) ** 2 for part in torque.values())
    share = 100 * between / np.sum((every - every.mean()) ** 2)
    assert told[at + 4] == f"{share:.2g} % of the sum of squares lies between the files"


@pytest.mark.usefixtures("torque")
def test_the_run_order_plot_marks_where_a_file_begins() -> None:
    screener("score", "run_*.csv")
    shown = screener("show", "run.run", "torque", "--view", "run-order", "--ascii", "--width", "100").out
    frame = [line for line in shown.splitlines() if line.count("|") == 2]
    columns = [{line[at] for line in frame[1:-1]} for at in range(len(frame[0]))]
    marks = [at for at, seen in enumerate(columns) if "." in seen and seen <= {".", "o", "|"}]
    edge = frame[0].index("|")
    inside = frame[0].rindex("|") - edge
    low, high = 1 - 0.03 * 159, 160 + 0.03 * 159
    expected = [edge + inside * (row - low) / (high - low) for row in (50.5, 120.5)]
    assert marks == pytest.approx(expected, abs=1.5)
    assert "a line: the next file" in shown


def test_by_file_of_a_single_file_is_refused_with_the_way_out(run_file: Path) -> None:
    outcome = screener("show", run_file, "level_1", "--by", "file")
    assert outcome.code == 2
    assert "for a table of several files, such as 'run_*.csv'" in outcome.err


@pytest.mark.usefixtures("torque")
def test_a_run_that_does_not_keep_it_says_so() -> None:
    screener("score", "run_*.csv")
    with closing(sqlite3.connect("run.run")) as connection:
        connection.execute("DELETE FROM by_file")
        connection.commit()
    outcome = screener("show", "run.run", "torque", "--by", "file")
    assert outcome.code == 2
    assert "Score the table again" in outcome.err
