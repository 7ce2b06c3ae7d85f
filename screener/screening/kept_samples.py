"""Simulated samples of r that outlast a run, in the user's cache."""

import zipfile
from collections.abc import Callable
from hashlib import sha256
from pathlib import Path

import numpy as np

from screener.screening.null_build import write_arrays
from screener.screening.null_source import null_folder
from screener.stats.families.family import FloatArray
from screener.stats.null.on_demand import SimulatedNulls
from screener.stats.null.packing import NULL_VERSION


class KeptSamples:
    """One file for each condition; a damaged one, or one of another condition, counts as missing."""

    def __init__(self, folder: Path) -> None:
        self._folder = folder

    def load(self, key: str) -> FloatArray | None:
        """ln(1 - r) of the samples kept under a key."""
        try:
            with self._path(key).open("rb") as stream, np.load(stream) as arrays:
                samples, held = arrays["log_gap"], str(arrays["key"])
        except (OSError, ValueError, KeyError, EOFError, zipfile.BadZipFile):
            return None
        whole = held == key and samples.dtype == np.float64 and samples.ndim == 1 and not np.any(samples > 0.0)
        return samples if whole else None

    def save(self, key: str, samples: FloatArray) -> None:
        """Keep samples; where nothing can be written, they are simulated again next time."""
        try:
            write_arrays({"log_gap": samples, "key": np.array(key)}, self._path(key))
        except OSError:
            return

    def _path(self, key: str) -> Path:
        return self._folder / f"{sha256(f'{NULL_VERSION} {key}'.encode()).hexdigest()[:32]}.npz"


def simulated_nulls(cancelled: Callable[[], bool]) -> SimulatedNulls:
    """Nulls that are simulated while a run needs them, and kept in the user's cache."""
    return SimulatedNulls(KeptSamples(null_folder() / "conditions"), cancelled)
