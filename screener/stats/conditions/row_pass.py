"""The one pass over readings in row order: lag products at several resolutions, equal neighbours, missing readings."""

from dataclasses import dataclass

import numpy as np

from screener.stats.conditions import bits
from screener.stats.conditions.bits import Bits
from screener.stats.conditions.counting import FloatArray, IntArray, at_rank
from screener.stats.conditions.lag_products import LAGS, SmallFloats, lag_products, padded

COARSER = 8
"""Rows of one resolution that are added up to a row of the next: as many as the bits of a byte."""
FEWEST_STRETCHES = 16
"""A resolution with fewer stretches tells nothing more."""
TILE = 160_000
"""Readings worked on at a time: few enough to stay in the processor's cache."""
ORDINARY = 60
"""Readings within 2^-60 to 2^60 of the middle one are squared in single precision as they are."""

_SUM_OF = np.repeat(np.eye(LAGS // COARSER, dtype=np.float32), COARSER, axis=0)


@dataclass(frozen=True, slots=True)
class Resolution:
    """Lag products of the sums over stretches of `width` rows."""

    width: int
    products: FloatArray
    """[C, LAGS + 1] of the sums of readings less their mean."""
    pairs: FloatArray
    """[C, LAGS + 1] the same of the numbers of finite readings."""


@dataclass(frozen=True, slots=True)
class RowPass:
    """What one pass over C channels finds."""

    resolutions: tuple[Resolution, ...]
    same: Bits
    """Set where readings i and i + 1 are finite and equal."""
    absent: Bits
    """Set where a reading is missing."""
    sums: FloatArray
    """[C, stretches] readings less their mean, summed over the widest stretches."""
    counts: FloatArray
    """[C, stretches] finite readings in each."""
    exponent: IntArray
    """[C] readings were multiplied by 2^-exponent before they were squared and summed."""


class _Scratch:
    """Room for one tile, used again and again: fresh memory would cost more than the arithmetic."""

    def __init__(self, channels: int, rows: int) -> None:
        self.buffer = np.zeros((channels, padded(rows)), dtype=np.float32)
        self.ones = np.ones(rows, dtype=np.float32)
        self.finite = np.empty((channels, rows), dtype=np.bool_)
        self.mask = np.empty((channels, rows), dtype=np.int32)
        self.equal = np.empty((channels, max(rows - 1, 0)), dtype=np.bool_)


def widths(rows: int) -> list[int]:
    """The stretch widths of the resolutions of a record."""
    found = [1]
    while rows // (found[-1] * COARSER) >= FEWEST_STRETCHES:
        found.append(found[-1] * COARSER)
    return found


def pass_over(readings: FloatArray, ordered: FloatArray, n: IntArray) -> RowPass:
    """Pass over readings float64[C, rows]; ordered are the same sorted, n[C] the finite ones."""
    channels, rows = readings.shape
    wide = widths(rows)
    products = np.zeros((channels, len(wide), LAGS + 1))
    same, absent = bits.empty(channels, rows), bits.empty(channels, rows)
    pivot, exponent = _pivot(ordered, n)
    size = max(1, min(channels, TILE // max(rows, 1)))
    room = _Scratch(size, rows)
    coarse = np.empty((channels, -(-rows // COARSER) if len(wide) > 1 else rows), dtype=np.float32)
    for first in range(0, channels, size):
        tile = slice(first, min(first + size, channels))
        _centre(readings[tile], pivot[tile], exponent[tile], n[tile], room, same[tile], absent[tile])
        buffer = room.buffer[: tile.stop - first]
        products[tile, 0] = lag_products(buffer, rows)
        coarse[tile] = _summed(buffer, coarse.shape[1]) if len(wide) > 1 else buffer[:, :rows]
    products[:, 1:], sums = _coarser(coarse, wide)
    pairs, counts = _finite(absent, n, rows, wide)
    found = tuple(Resolution(width, products[:, i], pairs[:, i]) for i, width in enumerate(wide))
    return RowPass(found, same, absent, sums, counts, exponent)


def _pivot(ordered: FloatArray, n: IntArray) -> tuple[FloatArray, IntArray]:
    """The middle reading of each channel, and the power of two to divide the differences from it by."""
    some = n > 0
    pivot = np.where(some, at_rank(ordered, (n // 2)[:, None])[:, 0], 0.0)
    highest = np.where(some, at_rank(ordered, np.maximum(n - 1, 0)[:, None])[:, 0], 0.0)
    with np.errstate(over="ignore"):
        farthest = np.maximum(pivot - np.where(some, ordered[:, 0], 0.0), highest - pivot)
    _, exponent = np.frexp(np.minimum(farthest, np.finfo(np.float64).max))
    return pivot, np.where((np.abs(exponent) > ORDINARY) & (farthest > 0), exponent, 0).astype(np.int64)


def _centre(
    readings: FloatArray, pivot: FloatArray, exponent: IntArray, n: IntArray, room: _Scratch, same: Bits, absent: Bits
) -> None:
    """Write readings less their mean, 0 where missing, into the buffer, and the bits of a tile."""
    channels, rows = readings.shape
    inside, equal = room.buffer[:channels, :rows], room.equal[:channels]
    with np.errstate(over="ignore", invalid="ignore"):
        if np.any(exponent):
            inside[...] = np.ldexp(readings - pivot[:, None], -exponent[:, None])
        else:
            np.subtract(readings, pivot[:, None], out=inside)
    np.equal(inside[:, 1:], inside[:, :-1], out=equal)
    complete = bool(np.all(n == rows))
    if not complete:
        finite = np.isfinite(inside, out=room.finite[:channels])
        equal &= finite[:, 1:]
        # All bits of a word set where a reading is: to blank the others bit by bit costs no branch.
        words, mask = inside.view(np.int32), room.mask[:channels]
        np.negative(finite.view(np.int8), out=mask)
        words &= mask
        bits.put(np.logical_not(finite, out=finite), absent)
    bits.put(equal, same)
    inside -= (np.vecdot(inside, room.ones) / np.maximum(n, 1).astype(np.float32))[:, None]
    if not complete:
        words &= mask


def _coarser(sums: SmallFloats, wide: list[int]) -> tuple[FloatArray, FloatArray]:
    """Lag products of all resolutions but the finest, [C, resolutions - 1, LAGS + 1], and the widest sums.

    `sums` are those of the second resolution, or of the only one.
    """
    products = np.zeros((len(sums), len(wide) - 1, LAGS + 1))
    for i in range(len(wide) - 1):
        rows = sums.shape[1]
        buffer = np.zeros((len(sums), padded(rows)), dtype=np.float32)
        buffer[:, :rows] = sums
        products[:, i] = lag_products(buffer, rows)
        if i + 2 < len(wide):
            sums = _summed(buffer, -(-rows // COARSER))
    return products, sums.astype(np.float64)


def _finite(absent: Bits, n: IntArray, rows: int, wide: list[int]) -> tuple[FloatArray, FloatArray]:
    """Lag products, [C, resolutions, LAGS + 1], and sums over the widest stretches, of ones where a reading is."""
    complete = n == rows
    some = np.flatnonzero(~complete)
    present = bits.empty(some.size + 1, rows)
    every = np.zeros((1, rows), dtype=np.bool_)
    bits.put(~every, present[-1:])
    present[:-1] = ~absent[some] & present[-1]
    products, counts = _pairs(present, rows, wide)
    pairs, stretches = np.empty((n.size, *products.shape[1:])), np.empty((n.size, counts.shape[1]))
    pairs[complete], stretches[complete] = products[-1], counts[-1]
    pairs[some], stretches[some] = products[:-1], counts[:-1]
    return pairs, stretches


def _pairs(present: Bits, rows: int, wide: list[int]) -> tuple[FloatArray, FloatArray]:
    """As `_finite`, of the bits themselves."""
    products = np.zeros((present.shape[0], len(wide), LAGS + 1))
    products[:, 0] = bits.pairs(present, LAGS)
    if len(wide) == 1:
        return products, bits.unpacked(present, rows).astype(np.float64)
    eight = np.bitwise_count(present.view(np.uint8))[:, : -(-rows // COARSER)]
    products[:, 1:], sums = _coarser(eight.astype(np.float32), wide)
    return products, sums


def _summed(buffer: SmallFloats, rows: int) -> SmallFloats:
    """Sums over COARSER neighbours, the first so many of them."""
    channels = buffer.shape[0]
    sums: SmallFloats = buffer.reshape(channels, -1, LAGS) @ _SUM_OF
    return sums.reshape(channels, -1)[:, :rows]
