"""Column names: what is shown of them, their unit, and how equal ones are told apart."""

import re
import unicodedata
from collections import Counter
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

_BRACKETED = re.compile(r"^.*\S\s*\[\s*([^\[\]]{1,16}?)\s*\]$")
_IN_PARENTHESES = re.compile(r"^.*\S\s*\(\s*([^()]{1,8}?)\s*\)$")
_QUALIFIERS = re.compile(
    r"max|min|mean|avg|average|median|rms|std|sd|raw|left|right|front|rear|top|bottom|old|new|\d+", re.I
)
_REMARKS_SHOWN = 5
_LONGEST_UNIT = 16


@dataclass(frozen=True, slots=True)
class Label:
    """A column name that is unique in its table and safe to show, and the unit written in it."""

    name: str
    unit: str


def visible(text: str) -> str:
    r"""The text with line ends as blanks and every other unprintable character as an escape such as \x1b."""
    text = text.strip()
    if text.isprintable():
        return text
    return "".join(map(_visible_character, re.sub(r"\s*[\r\n\t]+\s*", " ", text)))


def unit_of(name: str) -> str:
    """The unit in brackets or parentheses at the end of a name; empty when there is none."""
    if found := _BRACKETED.match(name):
        return found[1]
    found = _IN_PARENTHESES.match(name)
    if found and not _QUALIFIERS.fullmatch(found[1]):
        return found[1]
    return ""


def bare_unit(written: str) -> str:
    """A unit from a row or attribute of units, without brackets; a dash stands for none."""
    unit = visible(written).strip("[](){} ")[:_LONGEST_UNIT]
    return "" if unit in {"-", "--", "none", "None"} else unit


def labels(written: Sequence[str], units: Sequence[str] = ()) -> tuple[tuple[Label, ...], tuple[str, ...]]:
    """One label per name as written, in order, and a remark for every name that had to be changed."""
    shown = [visible(name) for name in written]
    named = [name or f"column {number}" for number, name in enumerate(shown, 1)]
    unique = list(_told_apart(named))
    apart = [bare_unit(unit) for unit in units[: len(named)]] + [""] * (len(named) - len(units))
    known = zip(unique, named, apart, strict=True)
    made = tuple(Label(name, unit_of(plain) or unit) for name, plain, unit in known)
    return made, (*_nameless_remark(shown), *_repeated_remarks(named, unique))


def shortlist(names: Sequence[str], limit: int = 3) -> str:
    """The first few names, and how many more there are."""
    more = len(names) - limit
    return ", ".join(names[:limit]) + (f" and {more:,} more" if more > 0 else "")


def _visible_character(character: str) -> str:
    if character.isprintable():
        return character
    if unicodedata.category(character) == "Zs":
        return " "
    code = ord(character)
    if code < 0x100:
        return f"\\x{code:02x}"
    return f"\\u{code:04x}" if code < 0x10000 else f"\\U{code:08x}"


def _told_apart(names: Sequence[str]) -> Iterator[str]:
    taken = set(names)
    seen: Counter[str] = Counter()
    for name in names:
        seen[name] += 1
        if seen[name] == 1:
            yield name
            continue
        while (candidate := f"{name} ({seen[name]})") in taken:
            seen[name] += 1
        taken.add(candidate)
        yield candidate


def _nameless_remark(shown: Sequence[str]) -> Iterator[str]:
    nameless = [f"column {number}" for number, name in enumerate(shown, 1) if not name]
    if len(nameless) == 1:
        yield f"A column without a name is called by its place: {nameless[0]}."
    elif nameless and len(nameless) < len(shown):
        yield f"{len(nameless):,} columns without a name are called by their place: {shortlist(nameless)}."


def _repeated_remarks(named: Sequence[str], unique: Sequence[str]) -> Iterator[str]:
    repeated = [name for name, count in Counter(named).items() if count > 1]
    for name in repeated[:_REMARKS_SHOWN]:
        now = [new for old, new in zip(named, unique, strict=True) if old == name]
        yield f"{len(now):,} columns are called {name!r}; they are shown as {shortlist(now)}."
    if (rest := len(repeated) - _REMARKS_SHOWN) > 0:
        yield f"{rest:,} more names occur more than once; each repetition carries its number."
