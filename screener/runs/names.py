"""Where the run file of a table goes."""

import re
from pathlib import Path

_PACKED = {".gz", ".zst", ".xz", ".bz2", ".zip"}
_TEXT = {".csv", ".tsv", ".txt", ".dat", ".ndjson", ".jsonl", ".json"}
_BINARY = {".parquet", ".pq", ".arrow", ".ipc", ".feather", ".xlsx", ".h5", ".hdf5", ".tdms", ".mf4", ".mat"}
_BINARY |= {".xls", ".xlsb", ".ods", ".mdf"}
_VARYING = re.compile(r"[*?]+|\[[^]]*\]")


def default_run_path(table_path: Path) -> Path:
    """Beside the table, with `.run` for its ending: `pump_rig.csv.gz` gives `pump_rig.run`.

    An ending that names no format is part of the name: `log.2024` gives `log.2024.run`. Of a pattern for several files
    what they have in common stays: `run_*.csv` gives `run.run`.
    """
    bare = _without(_without(table_path, _PACKED), _TEXT | _BINARY)
    name = bare.name
    if _VARYING.search(table_path.name) and not table_path.exists():
        name = next((part for part in _common_parts(name) if part), "tables")
    return bare.with_name(f"{name}.run")


def _common_parts(pattern: str) -> list[str]:
    """What stands between the varying parts of a pattern, without the signs that joined them."""
    return [part.strip(" _-.") for part in _VARYING.split(pattern)]


def _without(path: Path, endings: set[str]) -> Path:
    return path.with_suffix("") if path.suffix.lower() in endings else path
