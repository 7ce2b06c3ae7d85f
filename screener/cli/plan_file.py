"""The plan file: the settings of a run in TOML, all its faults told at once."""

import difflib
import tomllib
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

from screener.cli.output import safe
from screener.errors import PlanError
from screener.records import Control

Read = Callable[[Any], Any]
"""Turns a value of the file into that of the option; raises ValueError with what it must be."""

HOW = "`screener plan` prints a plan that works"


def read_plan(path: Path) -> dict[str, Any]:
    """What the file sets, by the name of the option.

    Raises: PlanError with every fault, each by its key.
    """
    faults: list[str] = []
    found: dict[str, Any] = {}
    for name, value in _parsed(path).items():
        if name in SECTIONS:
            _take_section(name, value, found, faults)
        else:
            _take(name, value, SETTINGS, found, faults, prefix="")
    if faults:
        raise PlanError(f"Couldn't use plan {str(path)!r}: {'; '.join(map(safe, faults))}. {HOW}.")
    return found


def _parsed(path: Path) -> dict[str, Any]:
    try:
        return tomllib.loads(path.read_bytes().decode("utf-8-sig"))
    except OSError as error:
        raise PlanError(f"Couldn't read plan {str(path)!r}: {error.strerror}. {HOW}.") from error
    except UnicodeDecodeError as error:
        raise PlanError(f"Couldn't read plan {str(path)!r}: it is not UTF-8 text. {HOW}.") from error
    except tomllib.TOMLDecodeError as error:
        raise PlanError(f"Couldn't read plan {str(path)!r} as TOML: {safe(str(error))}. {HOW}.") from error


def _take_section(name: str, value: Any, found: dict[str, Any], faults: list[str]) -> None:
    if not isinstance(value, dict):
        faults.append(f"{name} must be a section, [{name}], with its settings below")
    elif name == "expect":
        found["expect"] = tuple(_expectations(value, faults))
    else:
        for key, given in value.items():
            _take(key, given, TABLE_SETTINGS, found, faults, prefix=f"{name}.")


def _take(
    key: str, value: Any, settings: Mapping[str, Read], found: dict[str, Any], faults: list[str], *, prefix: str
) -> None:
    if key not in settings:
        faults.append(_unknown(key, prefix))
        return
    try:
        found[key] = settings[key](value)
    except (ValueError, PlanError) as error:
        faults.append(f"{prefix}{key} is {value!r}: {str(error).rstrip('.')}")


def _unknown(key: str, prefix: str) -> str:
    """There is no such setting; where it stands instead, or what comes near."""
    home = {**dict.fromkeys(SETTINGS, "above the first section"), **dict.fromkeys(TABLE_SETTINGS, "in [table]")}
    if key in home:
        return f"{key} belongs {home[key]}"
    near = difflib.get_close_matches(key, [*home, *SECTIONS], n=1)
    return f"there is no setting {prefix + key!r}" + (f", perhaps {near[0]!r} is meant" if near else "")


def _expectations(section: Mapping[str, Any], faults: list[str]) -> list[str]:
    """`PATTERN=FAMILY`, in the order of the file, which decides."""
    made = []
    for pattern, family in section.items():
        try:
            if not pattern:
                raise ValueError("a pattern must not be empty, such as 'runout*'")
            made.append(f"{pattern}={_family(family)}")
        except (ValueError, PlanError) as error:
            where = f"; {_unknown(pattern, '')}" if pattern in {*SETTINGS, *TABLE_SETTINGS} else ""
            faults.append(f"expect.{pattern!r} is {family!r}: {str(error).rstrip('.')}{where}")
    return made


def _text(value: Any) -> str:
    if not isinstance(value, str):
        raise ValueError("it must be a text in quotes")
    return value


def _family(value: Any) -> str:
    from screener.stats.families import family_named

    return family_named(_text(value)).name


def _alpha(value: Any) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float) or not 0.0 < value < 1.0:
        raise ValueError("it must be a number between 0 and 1, such as 0.05")
    return float(value)


def _one_of(*known: str) -> Read:
    def read(value: Any) -> str:
        if not isinstance(value, str) or value not in known:
            raise ValueError(f"it must be one of {', '.join(map(repr, known))}")
        return value

    return read


def _positions(value: Any) -> str:
    from screener.stats.positions import rule_key

    rule = str(value) if isinstance(value, int | float) and not isinstance(value, bool) else _text(value)
    rule_key(rule)
    return rule


def _truth(value: Any) -> bool:
    if not isinstance(value, bool):
        raise ValueError("it must be true or false")
    return value


def _whole(at_least: int | None = None) -> Read:
    def read(value: Any) -> int:
        if isinstance(value, bool) or not isinstance(value, int) or (at_least is not None and value < at_least):
            raise ValueError("it must be a whole number" + ("" if at_least is None else f", {at_least} or more"))
        return value

    return read


def _texts(value: Any) -> tuple[str, ...]:
    if not isinstance(value, list) or not all(isinstance(item, str) and item for item in value):
        raise ValueError('it must be a list of texts, such as ["level*"]')
    return tuple(value)


def _codes(value: Any) -> tuple[str, ...]:
    """Texts, or numbers as they are written."""
    if isinstance(value, list):
        value = [str(item) if isinstance(item, int | float) and not isinstance(item, bool) else item for item in value]
    try:
        return _texts(value)
    except ValueError:
        raise ValueError('it must be a list of cell texts, such as ["-9999", "n.d."]') from None


SETTINGS: dict[str, Read] = {
    "family": _family,
    "alpha": _alpha,
    "control": _one_of(*(control.value for control in Control)),
    "positions": _positions,
    "match": _truth,
    "seed": _whole(),
    "channels": _texts,
    "skip": _texts,
    "missing": _codes,
}
TABLE_SETTINGS: dict[str, Read] = {
    "separator": _text,
    "decimal": _text,
    "header_line": _whole(-1),
    "units_line": _whole(-1),
    "encoding": _text,
    "comment": _text,
    "shape": _one_of("", "columns", "rows", "long"),
    "part": _text,
}
SECTIONS = ("expect", "table")
