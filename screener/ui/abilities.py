"""What the terminal can show, by what its environment says."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

PLAIN_TERMINALS = ("linux", "vt", "cons25", "ansi", "sun")
"""Beginnings of the names of terminals whose fonts lack the characters that plots are drawn with."""
COERCED = {"C.UTF-8", "C.utf8", "UTF-8"}
"""Values of LC_CTYPE that Python sets by itself when the locale is C (PEP 538)."""
C_LOCALES = {"", "C", "POSIX"}


@dataclass(frozen=True, slots=True)
class Abilities:
    """What may be sent to the terminal."""

    unicode: bool
    """More than ASCII."""


def refusal(environment: Mapping[str, str]) -> str:
    """Why no screen can be shown on this terminal, with the way out; empty when one can."""
    if environment.get("TERM", "dumb") in {"", "dumb", "unknown"}:
        return (
            "Couldn't open the screen: this terminal (TERM=dumb) cannot place text. "
            "Use `screener score`, `flagged`, `show` or `export`, or set TERM to what the terminal is."
        )
    return ""


def abilities(environment: Mapping[str, str]) -> Abilities:
    """Plain ASCII where UTF-8 is not declared, where NO_COLOR asks for plain output, and on terminals of few glyphs."""
    plain = "NO_COLOR" in environment or environment.get("TERM", "").startswith(PLAIN_TERMINALS)
    return Abilities(unicode=not plain and _declares_utf8(environment))


def _declares_utf8(environment: Mapping[str, str]) -> bool:
    everything, text, language = (environment.get(name, "") for name in ("LC_ALL", "LC_CTYPE", "LANG"))
    if not everything and text in COERCED and language in C_LOCALES:
        return False
    declared = everything or text or language
    return declared.lower().replace("-", "").endswith("utf8")
