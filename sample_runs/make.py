"""Writes the sample runs and the file that states how each of their channels was made.

    python sample_runs/make.py [FOLDER]

The same readings come out every time: each channel has its own seed, from its table and its name.
"""

import sys
import zlib
from dataclasses import dataclass
from datetime import datetime, timedelta
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy as np
import polars as pl
from laws import FloatArray
from numpy.typing import NDArray
from rig import Recipe, rig
from scipy.special import ndtr

IntArray = NDArray[np.int64]

SEED = 20_240
ROUNDED_FROM = 0.03
"""A channel counts as rounded when its step is at least this share of its standard deviation."""
SPARE = "spare_07 [mV]"
"""An input of the logger to which nothing is wired."""
FINITE = 1e-12
"""Probabilities are kept this far from 0 and 1, where quantiles are infinite."""


@dataclass(frozen=True)
class Run:
    """One table to be made."""

    file: str
    rows: int
    recipes: tuple[Recipe, ...]
    began: datetime


@dataclass(frozen=True)
class Made:
    """One channel's readings, None where absent, and its line of the truth file."""

    readings: list[float | None]
    truth: dict[str, Any]


def echo(coefficients: tuple[float, ...], terms: int = 400) -> FloatArray:
    """The answer of an autoregression to one impulse, scaled so that its output has variance 1."""
    answer = np.zeros(terms)
    answer[0] = 1.0
    for time in range(1, terms):
        answer[time] = sum(c * answer[time - lag] for lag, c in enumerate(coefficients, 1) if lag <= time)
    return answer / float(np.sqrt(np.sum(answer**2)))


def normal_scores(rng: np.random.Generator, rows: int, coefficients: tuple[float, ...]) -> FloatArray:
    """Standard normal values that follow themselves by the autoregression."""
    weights = echo(coefficients) if coefficients else np.ones(1)
    return np.convolve(rng.standard_normal(rows + len(weights) - 1), weights, mode="valid")


def location_and_scale(recipe: Recipe) -> tuple[float, float]:
    """What the law's standard values are moved and multiplied by."""
    if recipe.law.from_zero:
        return 0.0, recipe.level / recipe.law.mean
    scale = recipe.sd / recipe.law.sd
    return recipe.level - scale * recipe.law.mean, scale


def undisturbed(recipe: Recipe, rng: np.random.Generator, rows: int) -> FloatArray:
    """Readings of the law in their serial dependence, before anything happens to them."""
    scores = normal_scores(rng, rows, recipe.ar)
    location, scale = location_and_scale(recipe)
    if recipe.law.name == "normal":
        return location + scale * scores
    return location + scale * recipe.law.quantile(np.clip(ndtr(scores), FINITE, 1.0 - FINITE))


def disturbed(recipe: Recipe, rng: np.random.Generator, readings: FloatArray, sd: float) -> FloatArray:
    """The readings with the channel's drift and its outlying readings."""
    rows = len(readings)
    drift = recipe.trend * np.linspace(-0.5, 0.5, rows)
    drift += recipe.walk * np.cumsum(rng.standard_normal(rows)) / np.sqrt(rows)
    moved = readings + sd * drift
    places = rng.choice(rows, recipe.outlying, replace=False)
    away = recipe.moved * rng.uniform(1.0, 1.5, recipe.outlying) * rng.choice([-1.0, 1.0], recipe.outlying)
    moved[places] = recipe.level + sd * away
    return moved


def rails(recipe: Recipe, sd: float) -> tuple[int | None, int | None]:
    """The lowest and highest counts that the converter can give; None where it has room."""
    low = None if recipe.clip_low is None else round((recipe.level + recipe.clip_low * sd) / float(recipe.step))
    high = None if recipe.clip_high is None else round((recipe.level + recipe.clip_high * sd) / float(recipe.step))
    return low, high


def converted(recipe: Recipe, readings: FloatArray, sd: float) -> tuple[IntArray, int, int]:
    """The readings as whole counts of the converter, and how many lie at its low and at its high rail."""
    counts = np.rint(readings / float(recipe.step)).astype(np.int64)
    low, high = rails(recipe, sd)
    below = int(np.sum(counts <= low)) if low is not None else 0
    above = int(np.sum(counts >= high)) if high is not None else 0
    clipped = np.clip(counts, low, high) if below or above else counts
    return clipped, below, above


def hold(counts: IntArray, held: slice) -> None:
    """Repeat, in place, the first of the held counts through all of them."""
    counts[held] = counts[held][:1]


def stretch(rng: np.random.Generator, rows: int, share: float) -> slice:
    """A run of neighbouring readings that holds this share of the record, somewhere within it."""
    length = round(share * rows)
    first = int(rng.integers(0, rows - length + 1))
    return slice(first, first + length)


def absent(recipe: Recipe, rng: np.random.Generator, rows: int) -> NDArray[np.bool_]:
    """True where no reading was recorded."""
    away = rng.random(rows) < recipe.missing
    away[stretch(rng, rows, recipe.gap)] = True
    return away


def departure(recipe: Recipe) -> str:
    """The one word for what is wrong with a channel; empty for a channel that is normal in its own conditions."""
    if recipe.trend or recipe.walk:
        return "drifting"
    if recipe.stuck:
        return "stuck"
    return "outlying readings" if recipe.outlying else recipe.law.departure


def truth_class(recipe: Recipe, step_over_sd: float) -> str:
    """What the channel truly is."""
    clipped = recipe.clip_low is not None or recipe.clip_high is not None
    traits = {"clipped": clipped, "rounded": step_over_sd >= ROUNDED_FROM, "serial": bool(recipe.ar)}
    found = [word for word, is_so in traits.items() if is_so]
    return departure(recipe) or ("normal but " + " and ".join(found) if found else "normal")


def right_answer(recipe: Recipe) -> str:
    """The verdict of a screen that allows for every condition and has enough readings."""
    if recipe.trend or recipe.walk or recipe.stuck > 0.5:
        return "not scored"
    return "flagged" if departure(recipe) else "clear"


def make_channel(recipe: Recipe, run: Run) -> Made:
    """One channel's readings and how they were made."""
    rng = np.random.default_rng([SEED, zlib.crc32(run.file.encode()), zlib.crc32(recipe.name.encode())])
    location, scale = location_and_scale(recipe)
    sd = scale * recipe.law.sd
    readings = disturbed(recipe, rng, undisturbed(recipe, rng, run.rows), sd)
    counts, below, above = converted(recipe, readings, sd)
    hold(counts, stretch(rng, run.rows, recipe.stuck))
    away = absent(recipe, rng, run.rows)
    step_over_sd = float(recipe.step) / sd
    truth = {
        "table": run.file,
        "channel": recipe.name,
        "unit": recipe.unit,
        "right_answer": right_answer(recipe),
        "class": truth_class(recipe, step_over_sd),
        "distribution": recipe.law.name,
        "shape": recipe.law.shape,
        "location": float(f"{location:.6g}"),
        "scale": float(f"{scale:.6g}"),
        "ar": " ".join(f"{coefficient:g}" for coefficient in recipe.ar),
        "step": float(recipe.step),
        "step_over_sd": float(f"{step_over_sd:.4f}"),
        "clipped_low": below,
        "clipped_high": above,
        "stuck_share": recipe.stuck,
        "trend_in_sd": recipe.trend,
        "walk_in_sd": recipe.walk,
        "outlying": recipe.outlying,
        "outlying_at_least_sd": recipe.moved if recipe.outlying else None,
        "missing": int(np.sum(away)),
        "missing_in_one_stretch": bool(recipe.gap),
    }
    return Made([None if gone else exact(int(k), recipe.step) for k, gone in zip(counts, away, strict=True)], truth)


def exact(count: int, step: Fraction) -> float:
    """The decimal nearest to so many steps, free of the noise that multiplying by a binary fraction brings."""
    return count * step.numerator / step.denominator


def log_columns(run: Run) -> dict[str, pl.Series]:
    """The columns of a rig's log that are no measurement channels."""
    shifts = ("A. Lindqvist", "M. Okafor", "J. Ferreira")
    every = np.arange(run.rows)
    warming = every < run.rows // 40
    return {
        "timestamp": pl.Series(
            [run.began + timedelta(seconds=15 * int(row)) for row in every], dtype=pl.Datetime("ms")
        ),
        "cycle": pl.Series(118_200 + 25 * every),
        "operator": pl.Series([shifts[(int(row) * 15 // 28_800) % 3] for row in every]),
        "relief_valve_open": pl.Series(warming),
        "supply_setpoint [V]": pl.Series(np.full(run.rows, 24.0)),
        SPARE: pl.Series([None] * run.rows, dtype=pl.Float64),
    }


def make_run(run: Run) -> tuple[pl.DataFrame, pl.DataFrame]:
    """The table, log columns first and the empty one last, and its lines of the truth file."""
    made = {recipe.name: make_channel(recipe, run) for recipe in run.recipes}
    log = log_columns(run)
    channels = {name: pl.Series(channel.readings, dtype=pl.Float64) for name, channel in made.items()}
    table = pl.DataFrame(log | channels).select(pl.exclude(SPARE), SPARE)
    return table, pl.DataFrame([channel.truth for channel in made.values()], infer_schema_length=None)


def write(folder: Path) -> None:
    """Write both tables and the truth file into the folder."""
    recipes = rig()
    full = Run("pump_rig.parquet", 4_000, recipes, datetime(2024, 3, 11, 6, 0))
    short = Run("pump_rig_short.csv", 300, recipes[::6], datetime(2024, 3, 8, 14, 30))
    full_table, full_truth = make_run(full)
    short_table, short_truth = make_run(short)
    full_table.write_parquet(folder / full.file, compression="zstd", compression_level=19, statistics=False)
    short_table.write_csv(folder / short.file, datetime_format="%Y-%m-%d %H:%M:%S")
    pl.concat([full_truth, short_truth]).write_csv(folder / "truth.csv")


if __name__ == "__main__":
    write(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent)
