"""The conditions of a channel in words."""

from collections.abc import Callable

from screener.stats.conditions.conditions import FEWEST_EFFECTIVE, LASTING, Conditions

ROUNDED, CLIPPED, STUCK, REPEATED = "rounded", "clipped", "stuck", "repeated values"
SERIAL, DRIFTING, GAPS = "serial", "drifting", "gaps"

WORDS = (ROUNDED, CLIPPED, STUCK, REPEATED, SERIAL, DRIFTING, GAPS)
"""Every word, in the order in which they are said."""


def words_of(conditions: Conditions, channel: int) -> tuple[str, ...]:
    """The words that hold for one channel, in the order of WORDS; empty for a channel without any condition."""
    return tuple(word for word in WORDS if _holds(conditions, channel, word))


def conditions_of(conditions: Conditions, channel: int) -> str:
    """One channel's words with their numbers: `rounded to 0.25 sd; serial, effective n 410`."""
    return "; ".join(_said(conditions, channel, word) for word in words_of(conditions, channel))


def _holds(conditions: Conditions, channel: int, word: str) -> bool:
    drifting = bool(conditions.drifting[channel])
    return {
        ROUNDED: bool(conditions.rounded[channel]),
        CLIPPED: any(_ends(conditions, channel).values()),
        STUCK: bool(conditions.stuck[channel]),
        REPEATED: bool(conditions.repeated[channel]),
        SERIAL: bool(conditions.serial[channel]) and not drifting,
        DRIFTING: drifting,
        GAPS: bool(conditions.gaps[channel]),
    }[word]


def _said(conditions: Conditions, channel: int, word: str) -> str:
    return f"{word}{_SAID[word](conditions, channel)}"


def _rounded(conditions: Conditions, channel: int) -> str:
    return f" to {conditions.step_in_sd[channel]:.2g} sd"


def _clipped(conditions: Conditions, channel: int) -> str:
    n = int(conditions.n[channel])
    ends = _ends(conditions, channel)
    return ", " + " and ".join(f"{_share(count, n)} at the {end}" for end, count in ends.items() if count)


def _ends(conditions: Conditions, channel: int) -> dict[str, int]:
    """Clipped readings at each end; those of a detection limit are none."""
    low, high = int(conditions.clipped_low[channel]), int(conditions.clipped_high[channel])
    return {
        "minimum": low if low > conditions.below[channel] else 0,
        "maximum": high if high > conditions.above[channel] else 0,
    }


def _stuck(conditions: Conditions, channel: int) -> str:
    share = _share(int(conditions.stuck[channel]), int(conditions.n[channel]))
    return f", {conditions.longest_run[channel]:,} readings in a row, {share} in all"


def _repeated(conditions: Conditions, channel: int) -> str:
    share = _share(int(conditions.repeated[channel]), int(conditions.n[channel]))
    return f", {conditions.repeated_value[channel]:.6g} in {share} beyond the expected"


def _serial(conditions: Conditions, channel: int) -> str:
    return f", effective n {conditions.n_effective[channel]:,.0f}"


def _drifting(conditions: Conditions, channel: int) -> str:
    if conditions.serial[channel] and conditions.n_effective[channel] < FEWEST_EFFECTIVE:
        return _serial(conditions, channel)
    if conditions.serial[channel] and conditions.slow[channel] >= LASTING:
        return f", correlation {conditions.slow[channel]:.2g} over a sixteenth of the record"
    rise = conditions.rise[channel]
    return f", {'rises' if rise > 0 else 'falls'} by {abs(rise):.2g} sd over the record"


def _gaps(conditions: Conditions, channel: int) -> str:
    return f", {conditions.longest_gap[channel]:,} readings missing in a row"


def _share(count: int, n: int) -> str:
    share = 100.0 * count / n
    return f"{share:.2g} %" if share < 9.95 else f"{share:.0f} %"


_SAID: dict[str, Callable[[Conditions, int], str]] = {
    ROUNDED: _rounded,
    CLIPPED: _clipped,
    STUCK: _stuck,
    REPEATED: _repeated,
    SERIAL: _serial,
    DRIFTING: _drifting,
    GAPS: _gaps,
}
