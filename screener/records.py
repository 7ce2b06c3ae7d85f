"""Frozen facts passed between packages, and the schemas of the result frames.

Readings are `float64[channels, rows]`, C-contiguous, one channel contiguous in memory; NaN means missing.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    FloatArray = NDArray[np.float64]
    IntArray = NDArray[np.int64]


class Control(StrEnum):
    """What a flag means when many channels are tested at once."""

    EACH = "each"
    """r is below its critical value at alpha, channel by channel."""
    FDR = "fdr"
    """The Benjamini-Hochberg adjusted p (q) is below alpha."""


class Decision(StrEnum):
    """What a person decided to do with a channel."""

    USE = "use as it is"
    TRANSFORM = "use transformed"
    LEAVE_OUT = "leave out"
    LOOK_AGAIN = "look again"


class Verdict(StrEnum):
    """The outcome for one channel."""

    FLAGGED = "flagged"
    CLEAR = "clear"
    NOT_SCORED = "not scored"


@dataclass(frozen=True, slots=True)
class Plan:
    """What a run is asked to do."""

    family: str = "normal"
    alpha: float = 0.05
    control: Control = Control.EACH
    positions: str = "filliben"
    channels: tuple[str, ...] = ()
    """Name patterns of the columns to screen; empty means all."""
    skip: tuple[str, ...] = ()
    """Name patterns of the columns to leave aside."""
    missing: tuple[str, ...] = ()
    """Cell texts that mean a missing reading, beside the usual ones."""
    seed: int = 1
    separator: str = ""
    """What stands between the cells of a text table, a character or its name; empty means as found."""
    decimal: str = ""
    """The decimal sign of a text table, `.` or `,`; empty means as voted by its cells."""
    header_line: int = -1
    """The line of a text table that holds the names, from 1; 0 means there is none, -1 as found."""
    units_line: int = -1
    """The line of a text table that holds the units, from 1; 0 means there is none, -1 as found."""
    encoding: str = ""
    """The encoding of a text table; empty means as found."""
    comment: str = ""
    """How a line begins that is no row of a text table; empty means as found."""
    shape: str = ""
    """What holds a channel: `columns`, `rows`, or `long` (each row a name and a value); empty means as found."""
    expect: tuple[str, ...] = ()
    """`PATTERN=FAMILY`: channels of such names are held against that family, instead of `family`; first match."""
    match: bool = True
    """Hold each channel against the critical value of a channel in its own condition, not the textbook one."""
    part: str = ""
    """The sheet, group or variable of a file that holds several; empty means the first that is a table."""


@dataclass(frozen=True, slots=True)
class Channel:
    """One measurement channel of a table."""

    position: int
    """0, 1, ... among the channels of the table, in column order."""
    name: str
    """Unique within the table and safe to show: control characters made visible."""
    unit: str = ""
    below: int = 0
    """Readings only known to lie below a detection limit (`<0.5`); each stands in the readings as the limit itself."""
    above: int = 0
    """Readings only known to lie above a detection limit (`>100`); each stands in the readings as the limit itself."""


@dataclass(frozen=True, slots=True)
class SetAside:
    """A column that is not screened, and why."""

    name: str
    reason: str


@dataclass(frozen=True, slots=True)
class Proposal:
    """A value that looks like a code for a missing reading; it counts as a reading unless `Plan.missing` names it."""

    value: str
    """As `Plan.missing` takes it."""
    channels: int
    cells: int

    def sentence(self) -> str:
        """What the user is asked."""
        where = "1 channel" if self.channels == 1 else f"{self.channels:,} channels"
        cells = "1 cell" if self.cells == 1 else f"{self.cells:,} cells"
        return (
            f"{self.value} looks like a code for a missing reading ({cells} in {where}, far off the rest): "
            f"it was read as a number; --missing={self.value} leaves it out."
        )


@dataclass(frozen=True, slots=True)
class SourceFile:
    """One of several files of one layout that make up a table."""

    name: str
    """Safe to show."""
    first_row: int
    rows: int


@dataclass(frozen=True, slots=True)
class TableFacts:
    """What was read from a measurement table."""

    path: Path
    format: str
    rows: int
    channels: tuple[Channel, ...]
    set_aside: tuple[SetAside, ...]
    fingerprint: str
    """Changes when the content that was read changes."""
    remarks: tuple[str, ...] = ()
    """What the reader did that the user should know, one sentence each."""
    dialect: str = ""
    """How the table is written, on one line: `semicolon, decimal comma, 3 preamble lines, units in line 5`."""
    proposals: tuple[Proposal, ...] = ()
    files: tuple[SourceFile, ...] = ()
    """In the order of their rows; empty for a table of one file."""


@dataclass(frozen=True, slots=True, order=True)
class Span:
    """The channels first, first + 1, ..., stop - 1 of a table."""

    first: int
    stop: int


@dataclass(frozen=True, slots=True)
class Block:
    """The readings of the channels of one span."""

    span: Span
    readings: FloatArray
    """float64[stop - first, rows], owned by the receiver, who may sort it in place."""
    below: IntArray | None = None
    """[stop - first] how many of each channel's lowest readings are only known to lie below a detection limit; None
    where the table has no such limit."""
    above: IntArray | None = None
    """The same of its highest readings, above a limit."""


@dataclass(frozen=True, slots=True)
class BlockScores:
    """The scores of the C channels of a span against F families."""

    span: Span
    families: tuple[str, ...]
    n: IntArray
    """[C] finite readings."""
    missing: IntArray
    """[C] readings absent or infinite."""
    reasons: tuple[str, ...]
    """[C] why the channel is not scored; empty where it is."""
    r: FloatArray
    """[C, F]; NaN where not scored or outside the family's support."""
    critical_r: FloatArray
    plain_critical_r: FloatArray
    p: FloatArray
    extrapolated: NDArray[np.bool_]
    """[C, F] true where p lies beyond the tabled probabilities."""
    location: FloatArray
    scale: FloatArray
    notes: tuple[tuple[str, ...], ...]
    """[C][F] a word about the fit, such as `outside support`; usually empty."""
    shapes: FloatArray
    """[C, F, 2] shape parameters; NaN where the family has fewer."""
    held: IntArray
    """[C] which family the channel is held against."""
    closest: IntArray
    """[C] the closest family that its own test does not reject; -1 when there is none."""
    points: tuple[FloatArray, ...]
    """[C] sorted readings kept for the plot, at the ranks `stats.points.kept_ranks(n)`."""
    in_order: tuple[FloatArray, ...] = ()
    """[C] readings kept in row order, as `stats.row_order.kept_in_order` keeps them; empty when none are."""
    outermost: tuple[IntArray, ...] = ()
    """[C] rows (0-based) of the outermost readings, lowest first, highest last; empty when none are kept."""
    conditions: tuple[str, ...] = ()
    """[C] the conditions of the channel in words; empty where there is none."""
    step: FloatArray | None = None
    """[C] the resolution step, 0 where none was found."""
    n_effective: FloatArray | None = None
    """[C] the number of independent readings that a serial channel is worth."""
    by_file: FloatArray | None = None
    """[C, files, 3] n, mean and standard deviation of the readings of each file, for a table of several."""


@dataclass(frozen=True, slots=True)
class Confirmation:
    """What samples of a channel's own process, with its autocorrelation and condition, say of its r."""

    family: str
    r: float
    samples: int
    """Samples with an r."""
    as_small: int
    """Samples whose r is as small as the channel's, or smaller."""
    p: float
    critical_r: float


@dataclass(frozen=True, slots=True)
class TableOpened:
    """A table was read and the run file is ready."""

    facts: TableFacts
    plan: Plan
    run_path: Path
    channels_done: int
    """Channels already scored by an earlier, interrupted run."""


@dataclass(frozen=True, slots=True)
class BlockScored:
    """One span of channels was scored."""

    scores: BlockScores


@dataclass(frozen=True, slots=True)
class BlockFailed:
    """One span of channels could not be scored; the rest of the run goes on."""

    span: Span
    message: str
    """One sentence that names the channels."""


@dataclass(frozen=True, slots=True)
class RunFinished:
    """All spans were tried, or the run was cancelled."""

    cancelled: bool
    seconds: float


@dataclass(frozen=True, slots=True)
class NullsPrepared:
    """A part of the null distributions that this run needs was simulated."""

    positions: str
    work_done: float
    """Share of the work, 0 to 1."""


Event = TableOpened | NullsPrepared | BlockScored | BlockFailed | RunFinished

RESULT_COLUMNS: dict[str, type[int] | type[float] | type[str]] = {
    "channel": str,
    "unit": str,
    "n": int,
    "missing": int,
    "family": str,
    "r": float,
    "critical_r": float,
    "plain_critical_r": float,
    "p": float,
    "q": float,
    "verdict": str,
    "reason": str,
    "departure": str,
    "departure_size": float,
    "conditions": str,
    "step": float,
    "n_effective": float,
    "closest": str,
    "closest_r": float,
    "closest_p": float,
    "advice": str,
    "decision": str,
    "note": str,
}
"""The export contract: names stay stable, new ones are appended. Absent values are null."""

FIT_COLUMNS: dict[str, type[int] | type[float] | type[str] | type[bool]] = {
    "family": str,
    "r": float,
    "critical_r": float,
    "plain_critical_r": float,
    "p": float,
    "extrapolated": bool,
    "location": float,
    "scale": float,
    "shape_1": float,
    "shape_2": float,
    "note": str,
}
"""One row per family for a single channel, in the order of the registry."""
