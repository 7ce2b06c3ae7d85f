"""Share of truly normal channels that are flagged, from table to verdict, with its Monte Carlo error.

    python tests/bench/bench_false_flags.py [--readings 40_000_000]

For each n, tables of normal readings are written as Parquet and screened by `screener score`; verdicts are read from
the run files. Errors are binomial, one standard error. `z` is how many of them the share lies from alpha; the null
tables have an error of their own of at most 0.1 percentage points at 5 %.
"""

import argparse
import contextlib
import io
import tempfile
from pathlib import Path

import numpy as np
import polars as pl

from screener.cli.group import group
from screener.runs import RunFile

SIZES = (10, 50, 200, 1_000, 10_000)
ALPHAS = (0.05, 0.01)
MOST_CHANNELS = 40_000
TABLE_READINGS = 20_000_000


def main() -> None:
    """Print the table."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--readings", type=int, default=40_000_000, help="Readings for each n, at most.")
    given = parser.parse_args()
    print(f"{'n':>7} {'channels':>9}" + "".join(f"   {f'flagged at {alpha:g}':>24} {'z':>5}" for alpha in ALPHAS))
    for n in SIZES:
        channels = min(MOST_CHANNELS, given.readings // n)
        flagged = dict.fromkeys(ALPHAS, 0)
        for number, part in enumerate(parts(channels, n)):
            for alpha, count in flags(n, part, seed=number).items():
                flagged[alpha] += count
        cells = "".join(cell(flagged[alpha] / channels, alpha, channels) for alpha in ALPHAS)
        print(f"{n:>7,} {channels:>9,}{cells}", flush=True)


def parts(channels: int, n: int) -> list[int]:
    """The channels of each table, so that none grows too large."""
    most = max(1, TABLE_READINGS // n)
    return [min(most, channels - first) for first in range(0, channels, most)]


def flags(n: int, channels: int, *, seed: int) -> dict[float, int]:
    """How many channels of one table are flagged, by alpha."""
    readings = np.random.default_rng([n, seed]).standard_normal((n, channels))
    with tempfile.TemporaryDirectory() as name:
        table, run_path = Path(name) / "normal.parquet", Path(name) / "normal.run"
        pl.DataFrame(readings, schema=[f"c{k}" for k in range(channels)]).write_parquet(table)
        return {alpha: flagged(table, run_path.with_stem(f"at_{alpha}"), alpha, channels) for alpha in ALPHAS}


def flagged(table: Path, run_path: Path, alpha: float, channels: int) -> int:
    """Flagged channels of a table that is scored by the command."""
    with contextlib.redirect_stdout(io.StringIO()), contextlib.redirect_stderr(io.StringIO()):
        arguments = ["score", str(table), "-o", str(run_path), "--alpha", str(alpha)]
        assert not group.main(arguments, prog_name="screener", standalone_mode=False)
    with RunFile.open(run_path, read_only=True) as run:
        verdicts = run.results()["verdict"]
    assert len(verdicts) == channels
    assert verdicts.is_in(["flagged", "clear"]).all()
    return int((verdicts == "flagged").sum())


def cell(share: float, alpha: float, channels: int) -> str:
    """A share with its error in percent, and its distance from alpha in errors."""
    error = (alpha * (1 - alpha) / channels) ** 0.5
    return f"   {f'{100 * share:.3f} +- {100 * error:.3f} %':>24} {(share - alpha) / error:>5.1f}"


if __name__ == "__main__":
    main()
