"""Flagged share of truly normal channels in every condition: held to between 3 and 6 % at alpha = 5 %.

python tests/bench/bench_matched.py [channels a cell] [alpha]

Channels are scored as a run scores them, conditions estimated from their own readings. A channel that is not scored
(drifting, or of too few distinct readings) is counted apart; shares are of the scored.
"""

import sys

import numpy as np
from threadpoolctl import threadpool_limits

from screener.stats.families import family_named
from screener.stats.null.matched import autoregressive
from screener.stats.null.packing import shipped_nulls
from screener.stats.scoring import score

NORMAL = [family_named("normal")]
SIZES = (50, 200, 1000, 10_000)
STEPS = (0.0, 0.1, 0.25, 0.5, 1.0)
COEFFICIENTS = (0.0, 0.3, 0.6, 0.9)
BLOCK_READINGS = 4_000_000


def shares(n: int, step: float, coefficient: float, channels: int, alpha: float) -> tuple[float, float, float]:
    """Flagged share of the scored by the matched and by the plain critical value, and share not scored."""
    rng = np.random.default_rng([n, int(100 * step), int(100 * coefficient)])
    flagged = plain = scored = 0
    block = max(1, BLOCK_READINGS // n)
    for first in range(0, channels, block):
        count = min(block, channels - first)
        readings = 40.0 + autoregressive(rng, count, n, coefficient)
        if step:
            readings = step * np.round((readings + step * rng.random((count, 1))) / step)
        scoring = score(readings, NORMAL, shipped_nulls(), alpha)
        judged = np.array([not reason for reason in scoring.reasons])
        r = scoring.fits.r[judged, 0]
        scored += int(judged.sum())
        flagged += int(np.count_nonzero(r < scoring.critical_r[judged, 0]))
        plain += int(np.count_nonzero(r < scoring.plain_critical_r[judged, 0]))
    of = max(scored, 1)
    return flagged / of, plain / of, 1.0 - scored / channels


def main() -> None:
    """Print the table and the cells that miss."""
    channels = int(sys.argv[1]) if len(sys.argv) > 1 else 2000
    alpha = float(sys.argv[2]) if len(sys.argv) > 2 else 0.05
    low, high = 0.6 * alpha, 1.2 * alpha
    print(f"flagged at alpha {alpha:g} in percent, {channels:,} channels a cell: matched (plain; not scored)")
    print(f"{'n':>7} {'step':>5}" + "".join(f"{f'AR {coefficient:g}':>22}" for coefficient in COEFFICIENTS))
    missed = 0
    for n in SIZES:
        for step in STEPS:
            cells = [shares(n, step, coefficient, channels, alpha) for coefficient in COEFFICIENTS]
            text = ""
            for matched, plain, unscored in cells:
                bad = unscored < 1.0 and not low <= matched <= high
                missed += bad
                cell = f"{100 * matched:.1f}{'!' if bad else ' '}({100 * plain:.0f}; {100 * unscored:.0f})"
                text += f"{cell:>22}"
            print(f"{n:>7,} {step:>5g}{text}", flush=True)
    print(f"cells outside {100 * low:g} to {100 * high:g} %: {missed}")


if __name__ == "__main__":
    with threadpool_limits(1):
        main()
