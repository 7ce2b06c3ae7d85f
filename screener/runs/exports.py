"""Results for other programs: CSV, Parquet and JSON with the columns of RESULT_COLUMNS."""

import io
import json
import os
import secrets
from collections.abc import Callable
from dataclasses import asdict
from pathlib import Path

import polars as pl

from screener import __version__
from screener.errors import RunFileError
from screener.records import RESULT_COLUMNS, Plan, TableFacts
from screener.runs.failures import why_refused

REPORTS = (".md", ".html")
"""Extensions of reports, which are written elsewhere since they have plots."""

_FORMULA = r"^([=+\-@\t\r])"
"""What a spreadsheet takes for the start of a formula."""


def export(results: pl.DataFrame, facts: TableFacts, plan: Plan, path: Path) -> None:
    """Write the rows as they are filtered and sorted, in the format of the path's extension, all or nothing.

    Raises: RunFileError when the extension is unknown or the file cannot be written.
    """
    render = _RENDERERS.get(path.suffix.lower())
    if render is None:
        known = ", ".join([*_RENDERERS, *REPORTS])
        raise _refusal(path, "its extension names no known format", f"Use one of {known}.")
    floats = [name for name, kind in RESULT_COLUMNS.items() if kind is float]
    rows = results.select(RESULT_COLUMNS.keys()).with_columns(pl.col(floats).fill_nan(None))
    write_whole(path, render(rows, facts, plan))


def export_comparison(rows: pl.DataFrame, path: Path) -> None:
    """Write the rows of a comparison, as they are sorted, as .csv, .parquet or .json, all or nothing.

    Raises: RunFileError when the extension is unknown or the file cannot be written.
    """
    render = {".csv": _csv_of, ".parquet": _parquet_of, ".json": _json_of}.get(path.suffix.lower())
    if render is None:
        raise _refusal(path, "its extension names no known format", "Use one of .csv, .parquet, .json.")
    write_whole(path, render(rows))


def _csv(rows: pl.DataFrame, _facts: TableFacts, _plan: Plan) -> bytes:
    return _csv_of(rows)


def _csv_of(rows: pl.DataFrame) -> bytes:
    """Text that a spreadsheet would run is preceded by an apostrophe; numbers are left alone."""
    texts = [name for name, kind in rows.schema.items() if kind == pl.String]
    defused = rows.with_columns(pl.col(texts).str.replace(_FORMULA, "'$1"))
    return defused.write_csv().encode()


def _parquet(rows: pl.DataFrame, _facts: TableFacts, _plan: Plan) -> bytes:
    return _parquet_of(rows)


def _parquet_of(rows: pl.DataFrame) -> bytes:
    written = io.BytesIO()
    rows.write_parquet(written)
    return written.getvalue()


def _json(rows: pl.DataFrame, facts: TableFacts, plan: Plan) -> bytes:
    """One object: `about` says what was run on which table, `channels` has an object for each row, one a line."""
    table = asdict(facts) | {"path": str(facts.path)}
    del table["channels"]
    about = {"exported_by": f"screener {__version__}", "plan": asdict(plan), "table": table}
    head, body = json.dumps(about, ensure_ascii=False, indent=1), _json_rows(rows)
    # A file name that is no text has lone surrogates in its path: written as the escapes that JSON reads back.
    return f'{{"about": {head},\n"channels": [\n{body}\n]}}\n'.encode(errors="backslashreplace")


def _json_of(rows: pl.DataFrame) -> bytes:
    return f'{{"exported_by": "screener {__version__}",\n"channels": [\n{_json_rows(rows)}\n]}}\n'.encode()


def _json_rows(rows: pl.DataFrame) -> str:
    """One object for each row, one a line."""
    numbers = pl.col(pl.Float64)
    finite = rows.with_columns(pl.when(numbers.is_finite()).then(numbers))
    return ",\n".join(json.dumps(row, ensure_ascii=False, allow_nan=False) for row in finite.iter_rows(named=True))


_RENDERERS: dict[str, Callable[[pl.DataFrame, TableFacts, Plan], bytes]] = {
    ".csv": _csv,
    ".parquet": _parquet,
    ".json": _json,
}


def write_whole(path: Path, content: bytes) -> None:
    """Write beside the path, then rename, so that a reader finds the old file or the new one, never half of one.

    Raises: RunFileError when it cannot be written.
    """
    if path.is_dir():
        raise _refusal(path, "it is a folder", "Give the name of a file in it.")
    draft = path.with_name(f".{secrets.token_hex(6)}.export-new")
    try:
        try:
            with draft.open("xb") as file:
                file.write(content)
                file.flush()
                os.fsync(file.fileno())
            draft.replace(path)
        finally:
            draft.unlink(missing_ok=True)
    except OSError as error:
        raise _refusal(path, *why_refused(error)) from error


def _refusal(path: Path, why: str, way_out: str) -> RunFileError:
    return RunFileError(f"Couldn't export to {str(path)!r}: {why}. {way_out}")
