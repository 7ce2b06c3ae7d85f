"""Flagged share of channels that depart, rounded or not, beside that of the same r with an exactly simulated value.

    python tests/bench/bench_power.py [--channels 2000]

The exact critical value is the alpha quantile of r of 20,000 normal samples rounded to the same step, whose phase is
random. `!` marks shares more than 5 points below.
"""

import argparse
from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from screener.stats.correlation import fit_families
from screener.stats.families import family_named
from screener.stats.null.on_demand import SimulatedNulls
from screener.stats.null.packing import shipped_nulls
from screener.stats.scoring import score

Readings = NDArray[np.float64]

NORMAL = [family_named("normal")]
SIZES, STEPS = (200, 1000), (0.0, 0.1, 0.25, 0.5)
ALPHA, EXACT_SAMPLES = 0.05, 20_000

ALTERNATIVES: dict[str, Callable[[np.random.Generator, tuple[int, int]], Readings]] = {
    "Student t 5": lambda rng, shape: rng.standard_t(5, shape),
    "gamma k = 25": lambda rng, shape: rng.gamma(25.0, size=shape),
    "uniform": lambda rng, shape: rng.random(shape),
    "two clusters, 3 sd apart": lambda rng, shape: rng.standard_normal(shape) + 3.0 * (rng.random(shape) < 0.5),
}


def rounded(rng: np.random.Generator, readings: Readings, step: float) -> Readings:
    """Readings on a lattice of random phase."""
    if step == 0.0:
        return readings
    return np.asarray(step * np.round(readings / step + rng.random((len(readings), 1))), dtype=np.float64)


def plain_r(readings: Readings) -> Readings:
    """r against the normal, over all readings."""
    n = np.full(len(readings), readings.shape[1])
    return fit_families(np.sort(readings, axis=1), n, NORMAL, "filliben").r[:, 0]


def exact_value(rng: np.random.Generator, n: int, step: float) -> float:
    """The critical value of rounded normal channels, simulated."""
    parts = [plain_r(rounded(rng, rng.standard_normal((2000, n)), step)) for _ in range(EXACT_SAMPLES // 2000)]
    return float(np.quantile(np.concatenate(parts), ALPHA))


def main() -> None:
    """Print the table."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--channels", type=int, default=2000, help="Channels a cell.")
    given = parser.parse_args()
    rng, nulls, simulated = np.random.default_rng(1), shipped_nulls(), SimulatedNulls()
    print("flagged (with the exact critical value; called clipped), in percent")
    for n in SIZES:
        exact = {step: exact_value(rng, n, step) for step in STEPS}
        for name, draw in ALTERNATIVES.items():
            text = ""
            for step in STEPS:
                drawn = draw(rng, (given.channels, n))
                readings = rounded(rng, (drawn - drawn.mean()) / drawn.std(), step)
                scoring = score(40.0 + readings, NORMAL, nulls, ALPHA, simulated=simulated)
                judged = np.array([not reason for reason in scoring.reasons])
                share = np.mean(judged & (scoring.fits.r[:, 0] < scoring.critical_r[:, 0]))
                best = np.mean(plain_r(readings) < exact[step])
                clipped = np.mean((scoring.conditions.clipped_low > 0) | (scoring.conditions.clipped_high > 0))
                mark = "!" if share < best - 0.05 else " "
                text += f"{f'{100 * share:.1f}{mark}({100 * best:.1f}; {100 * clipped:.0f})':>22}"
            print(f"n = {n:>5,} {name:<26}{text}", flush=True)
    print(f"steps: {', '.join(f'{step:g}' for step in STEPS)} sd")


if __name__ == "__main__":
    main()
