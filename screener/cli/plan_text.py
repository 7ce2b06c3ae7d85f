"""A plan as a commented TOML file, with what was found in a table beside the settings that it concerns."""

import json
import re
import textwrap
from collections import Counter
from collections.abc import Iterator, Sequence
from fnmatch import fnmatchcase
from typing import Any

from screener.cli.output import path_text, safe
from screener.cli.plan_file import SETTINGS, TABLE_SETTINGS
from screener.records import Plan, TableFacts

MEANINGS = {
    "family": "The family that channels are held against: {families}.",
    "alpha": "Share of channels truly of their family that is flagged by chance.",
    "control": 'A flag means: r below its critical value ("each"), or q below alpha ("fdr").',
    "positions": "Plotting positions: a rule's name or a number.",
    "match": "true: critical values for the condition of a channel (rounded, clipped, serial); false: textbook ones.",
    "seed": "Seed of everything random.",
    "channels": "Names of the columns to screen, * and ? standing for any text and any sign; none means all.",
    "skip": "Names of columns to leave aside.",
    "missing": "Cell texts that mean a missing reading, beside the usual ones.",
    "separator": "What separates cells: a sign or its name.",
    "decimal": "The decimal sign, . or ,",
    "header_line": "The line of the names, counted from 1; 0: there is none.",
    "units_line": "The line of the units; 0: there is none.",
    "encoding": "The encoding of the text, such as cp1252.",
    "comment": "How lines begin that are left out.",
    "shape": "Where a channel stands: columns, rows, or long (a name beside each value).",
    "part": "The sheet, group or variable to read.",
}
GROUPS_SHOWN = 40
LINE = 110
LEAST_STEM = 3
"""Signs that the names of a group must share."""


def plan_lines(plan: Plan, facts: TableFacts | None = None) -> list[str]:
    """The lines of a plan file that `plan_file.read_plan` reads back as this plan."""
    return [*_head(facts), *_settings(plan, facts), *_expectations(plan, facts), *_table(plan, facts)]


def _head(facts: TableFacts | None) -> Iterator[str]:
    yield "# A plan: what channels are held against, and how their table is read. Use it with --plan FILE;"
    yield "# an option given beside it replaces the setting of that name."
    if facts is not None:
        size = f"{facts.rows:,} rows x {len(facts.channels):,} channels"
        yield f"# Made for {path_text(facts.path)}: {safe(facts.format)}, {size}."
        yield from _listed("Remarks of its reader:", [safe(remark) for remark in _remarks(facts)])


def _settings(plan: Plan, facts: TableFacts | None) -> Iterator[str]:
    from screener.stats.families import FAMILIES

    families = ", ".join(family.name for family in FAMILIES)
    for key in SETTINGS:
        yield ""
        yield from (f"# {line}" for line in textwrap.wrap(MEANINGS[key].format(families=families), LINE))
        yield f"{key} = {_written(getattr(plan, key))}"
        if facts is not None and key == "channels":
            aside = [f"{safe(one.name)}: {safe(one.reason)}" for one in facts.set_aside]
            yield from _listed('Set aside; channels = ["*", "its name"] screens one that holds numbers:', aside)
        if facts is not None and key == "missing":
            yield from _proposals(plan, facts)


def _proposals(plan: Plan, facts: TableFacts) -> Iterator[str]:
    """Codes that look like missing readings, ready to be taken."""
    if facts.proposals:
        yield "# Read as numbers, but far off all others: if they mean missing readings, take this line instead."
        counted = [f"{one.value} in {one.cells:,} cells of {one.channels:,} channels" for one in facts.proposals]
        codes = (*plan.missing, *(one.value for one in facts.proposals))
        yield f"# missing = {_written(codes)}  # {safe('; '.join(counted))}"


def _expectations(plan: Plan, facts: TableFacts | None) -> Iterator[str]:
    yield from ("", "# Channels of these names are held against another family; the first pattern that fits decides.")
    yield "[expect]"
    for expectation in plan.expect:
        pattern, _, family = expectation.rpartition("=")
        yield f"{_written(pattern)} = {_written(family)}"
    if facts is None:
        yield '# "runout*" = "half-normal"'
        return
    groups = _groups([channel.name for channel in facts.channels], [channel.unit for channel in facts.channels])
    for pattern, count in groups[:GROUPS_SHOWN]:
        yield f"# {_written(pattern)} = {_written(plan.family)}  # {count:,} channels"
    if len(groups) > GROUPS_SHOWN:
        yield f"# and {len(groups) - GROUPS_SHOWN:,} more groups of names"


def _groups(names: Sequence[str], units: Sequence[str]) -> list[tuple[str, int]]:
    """Patterns of names that differ only in the number or the letter at their end, and how many channels each fits."""
    stems = Counter(_stem(name, unit) for name, unit in zip(names, units, strict=True))
    patterns = [re.sub(r"([*?[])", r"[\1]", stem) + "*" for stem, count in stems.items() if count > 1 and stem]
    return [(pattern, sum(fnmatchcase(name, pattern) for name in names)) for pattern in patterns]


def _stem(name: str, unit: str) -> str:
    bare = re.sub(r"\s*[\[(_]\s*" + re.escape(unit) + r"\s*[\])]?$", "", name) if unit else name
    stem = re.sub(r"([0-9]+|(?<=[_. -])[A-Za-z])$", "", bare)
    return stem if len(stem) >= LEAST_STEM else ""


def _table(plan: Plan, facts: TableFacts | None) -> Iterator[str]:
    yield from ("", '# How the table is written; "" and -1 mean as found.', "[table]")
    if facts is not None and facts.dialect:
        yield f"# Found: {safe(facts.dialect)}"
    for key in TABLE_SETTINGS:
        yield f"{key} = {_written(getattr(plan, key))}  # {MEANINGS[key]}"


def _remarks(facts: TableFacts) -> list[str]:
    asked = {proposal.sentence() for proposal in facts.proposals}
    return [remark for remark in facts.remarks if remark not in asked]


def _listed(heading: str, lines: Sequence[str]) -> Iterator[str]:
    if lines:
        yield f"# {heading}"
        yield from (f"#   {line}" for line in lines)


def _written(value: Any) -> str:
    """The value in TOML, whose texts are those of JSON but for one control character."""
    if isinstance(value, tuple):
        return f"[{', '.join(map(_written, value))}]"
    if isinstance(value, str):
        return json.dumps(str(value), ensure_ascii=False).replace("\x7f", "\\u007f")
    return json.dumps(value)
