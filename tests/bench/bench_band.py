"""The local levels of the simultaneous band by simulation, and the coverage of the band that is in use.

python tests/bench/bench_band.py            coverage at sizes between the tabled ones
python tests/bench/bench_band.py --make     the table LEVELS of screener/stats/band.py (some minutes)
"""

import argparse

import numpy as np

from screener.stats.band import BEHIND, SIZES, local_level, simulated_level, smallest_level
from screener.stats.families import family_named

REPLICATES = 20_000
BETWEEN = (7, 15, 70, 300, 1500, 7000)


def main() -> None:
    """Print the table asked for."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--make", action="store_true")
    make = parser.parse_args().make
    for name in dict.fromkeys(BEHIND.values()):
        family, rng = family_named(name), np.random.default_rng(2013)
        if make:
            levels = (simulated_level(family, n, max(4000, min(REPLICATES, 20_000_000 // n)), rng) for n in SIZES)
            print(f'    "{name}": ({", ".join(f"{level:.6f}" for level in levels)}),', flush=True)
        else:
            for n in BETWEEN:
                share = np.mean(smallest_level(family, n, 2000, rng) >= local_level(name, n))
                print(f"{name:24} n {n:6,}: {share:.1%} of 2,000 samples within the band", flush=True)


if __name__ == "__main__":
    main()
