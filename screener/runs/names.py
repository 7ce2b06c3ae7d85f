"""Where the run file of a table goes."""

from pathlib import Path

_PACKED = {".gz", ".zst", ".xz", ".bz2", ".zip"}
_TEXT = {".csv", ".tsv", ".txt", ".dat", ".ndjson", ".jsonl", ".json"}
_BINARY = {".parquet", ".pq", ".arrow", ".ipc", ".feather", ".xlsx", ".h5", ".hdf5", ".tdms", ".mf4", ".mat"}


def default_run_path(table_path: Path) -> Path:
    """Beside the table, with `.run` for its ending: `pump_rig.csv.gz` gives `pump_rig.run`.

    An ending that names no format is part of the name: `log.2024` gives `log.2024.run`.
    """
    bare = _without(_without(table_path, _PACKED), _TEXT | _BINARY)
    return bare.with_name(f"{bare.name}.run")


def _without(path: Path, endings: set[str]) -> Path:
    return path.with_suffix("") if path.suffix.lower() in endings else path
