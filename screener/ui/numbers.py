"""Numbers as people read them in a table cell: short, never rounded into a falsehood."""

from __future__ import annotations

import math

COUNT_LIMIT = 7


def count_text(value: int | None) -> str:
    """A count in at most 7 characters: thousands separated while that fits, in millions when even digits do not."""
    if value is None:
        return ""
    separated = f"{value:,}"
    if len(separated) <= COUNT_LIMIT:
        return separated
    if value < 10**COUNT_LIMIT:
        return str(value)
    return f"{value / 1e6:.{2 if value < 10**8 else 1 if value < 10**9 else 0}f}M"


def p_text(value: float | None) -> str:
    """A probability; never 0, and never 1 unless it is 1."""
    if value is None or math.isnan(value):
        return ""
    if value <= 0:
        return "<1e-300"
    if value < 0.001:
        return _short_exponent(f"{value:.1e}")
    text = f"{value:.4f}"
    return ">0.9999" if value < 1 and text == "1.0000" else text


def r_text(value: float | None) -> str:
    """A correlation, with three digits of its distance from 1; never 1 unless it is 1."""
    if value is None or math.isnan(value):
        return ""
    short_of_one = 1 - value
    if short_of_one <= 0:
        return "1.0000"
    decimals = min(8, max(4, 2 - math.floor(math.log10(short_of_one))))
    text = f"{value:.{decimals}f}"
    return ">0.99999999"[: decimals + 3] if text.startswith("1.") else text


def size_text(value: float | None) -> str:
    """A departure size in standard deviations."""
    return "" if value is None or math.isnan(value) else f"{value:.3f}"


def reading_text(value: float | None) -> str:
    """A reading, location or scale, to six figures."""
    return "" if value is None or math.isnan(value) else _short_exponent(f"{value:.6g}")


def seconds_text(seconds: float) -> str:
    """A duration, to the precision in which a person waits."""
    if seconds < 1:
        return "under 1 s"
    if seconds < 90:
        return f"{seconds:.0f} s"
    minutes = round(seconds / 60)
    return f"{minutes} min" if minutes < 90 else f"{minutes // 60} h {minutes % 60} min"


def _short_exponent(text: str) -> str:
    """3.2e-09 as 3.2e-9."""
    mantissa, mark, exponent = text.partition("e")
    return f"{mantissa}e{int(exponent)}" if mark else text
