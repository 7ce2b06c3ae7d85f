"""Round tick values and their labels for one axis of a plot."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

LABEL_LIMIT = 9
"""Longest tick label, in characters, before a common offset is taken out of the labels."""


@dataclass(frozen=True, slots=True)
class Ticks:
    """Tick positions on an axis and what is written beside them."""

    values: tuple[float, ...]
    labels: tuple[str, ...]
    offset: str = ""
    """What must be added to every label, as text; empty when the labels are the values themselves."""


def round_ticks(low: float, high: float, *, at_most: int) -> Ticks:
    """Ticks at multiples of 1, 2 or 5 times a power of ten within [low, high], at most `at_most` (2 to 20) of them."""
    if not low < high:
        return Ticks((), ())
    step = next(step for step in _round_steps((high - low) / 20) if len(_multiples(low, high, step)) <= at_most)
    values = tuple(multiple * step for multiple in _multiples(low, high, step))
    labels = tuple(_label(value, step) for value in values)
    if max(map(len, labels), default=0) <= LABEL_LIMIT:
        return Ticks(values, labels)
    return _offset_ticks(values, step)


def _round_steps(at_least: float) -> Iterator[float]:
    """Steps of 1, 2 or 5 times a power of ten, rising without end."""
    power = math.floor(math.log10(at_least))
    while True:
        yield from (float(f"{mantissa}e{power}") for mantissa in (1, 2, 5))
        power += 1


def _multiples(low: float, high: float, step: float) -> range:
    return range(math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9) + 1)


def _label(value: float, step: float) -> str:
    """The shortest text that tells value from value + step."""
    if value == 0:
        return "0"
    decimals = max(0, -math.floor(math.log10(step) + 1e-9))
    plain = f"{value:.{decimals}f}"
    if len(plain) <= LABEL_LIMIT:
        return plain
    digits = max(0, math.floor(math.log10(abs(value)) + 1e-9) - math.floor(math.log10(step) + 1e-9))
    mantissa, exponent = f"{value:.{digits}e}".split("e")
    return f"{mantissa}e{int(exponent)}"


def _offset_ticks(values: tuple[float, ...], step: float) -> Ticks:
    """The same ticks, labelled by their distance from a round value near them."""
    unit = float(f"1e{math.ceil(math.log10(values[-1] - values[0] + step))}")
    offset = round(values[len(values) // 2] / unit) * unit
    labels = tuple(_label(round((value - offset) / step) * step, step) for value in values)
    return Ticks(values, labels, offset=f"{offset:.15g}")
