"""One bit a row: runs of set bits and pairs of set bits, 64 rows at a time.

Bit i of a channel is bit i % 64 of its word i // 64; bits beyond the last row are 0.
"""

import numpy as np
from numpy.typing import NDArray

Bits = NDArray[np.uint64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]


WORDS = 12_000
"""Words counted at a time, so that they stay in the processor's cache."""


def together(bits: Bits) -> int:
    """Channels whose bits are counted at a time."""
    return max(1, WORDS // int(bits.shape[1]))


def empty(channels: int, rows: int) -> Bits:
    """No bit set, uint64[C, words]."""
    return np.zeros((channels, max(1, -(-rows // 64))), dtype=np.uint64)


def put(flags: BoolArray, into: Bits) -> None:
    """Write flags, bool[C, rows], into bits made by `empty` for as many rows."""
    into.view(np.uint8)[:, : -(-flags.shape[1] // 8)] = np.packbits(flags, axis=1, bitorder="little")


def unpacked(bits: Bits, rows: int) -> BoolArray:
    """The bits as bool[C, rows]."""
    return np.unpackbits(bits.view(np.uint8), axis=1, count=rows, bitorder="little").view(np.bool_)


def later(bits: Bits, rows: int) -> Bits:
    """Bit i is bit i + rows of the given ones."""
    whole, part = divmod(rows, 64)
    if whole:
        moved = np.zeros_like(bits)
        kept = max(bits.shape[1] - whole, 0)
        moved[:, :kept] = bits[:, whole:]
        return later(moved, part) if part else moved
    moved = bits >> np.uint64(part)
    if part:
        moved[:, :-1] |= bits[:, 1:] << np.uint64(64 - part)
    return moved


def earlier(bits: Bits) -> Bits:
    """Bit i is bit i - 1 of the given ones."""
    moved = bits << np.uint64(1)
    moved[:, 1:] |= bits[:, :-1] >> np.uint64(63)
    return moved


def count(bits: Bits) -> IntArray:
    """How many bits of each channel are set."""
    found: IntArray = np.bitwise_count(bits).sum(axis=1, dtype=np.int64)
    return found


def pairs(bits: Bits, lags: int) -> IntArray:
    """How many pairs of set bits are k rows apart, int64[C, lags + 1], for k = 0 to lags."""
    found = np.zeros((bits.shape[0], lags + 1), dtype=np.int64)
    step = together(bits)
    for first in range(0, bits.shape[0], step):
        some = bits[first : first + step]
        found[first : first + step, 0] = count(some)
        for k in range(1, lags + 1):
            found[first : first + step, k] = count(some & later(some, k))
    return found


def run_of_eight(bits: Bits) -> BoolArray:
    """Whether eight bits of a channel or more are set side by side, bool[C]."""
    for length in (1, 2, 4):
        bits = bits & later(bits, length)
    return np.asarray(np.any(bits != 0, axis=1), dtype=np.bool_)


def beginnings(bits: Bits, most: int) -> IntArray:
    """From how many bits of each channel on 1, 2, ..., most bits are set, int64[C, most]."""
    found = np.zeros((bits.shape[0], most), dtype=np.int64)
    found[:, 0] = count(bits)
    so_far = bits
    for length in range(1, most):
        so_far = so_far & later(bits, length)
        found[:, length] = count(so_far)
    return found


def longest_run(bits: Bits) -> IntArray:
    """Length of the longest run of set bits of each channel.

    Bit i of `powers[j]` says that 2^j bits from i on are set; the longest run is put together from them.
    """
    powers, length = [bits], 1
    while np.any(powers[-1]) and length < 64 * bits.shape[1]:
        powers.append(powers[-1] & later(powers[-1], length))
        length *= 2
    longest, run = np.zeros(bits.shape[0], dtype=np.int64), None
    for j in range(len(powers) - 1, -1, -1):
        run, longest = _longer(run, longest, powers[j], 1 << j)
    return longest


def _longer(run: Bits | None, longest: IntArray, power: Bits, length: int) -> tuple[Bits | None, IntArray]:
    """Runs lengthened by so many bits in the channels where some run goes on for as long."""
    if run is None:
        found = np.any(power != 0, axis=1)
        return (power, np.where(found, length, 0)) if np.any(found) else (None, longest)
    moved = run.copy()
    for so_far in np.unique(longest):
        at = longest == so_far
        moved[at] = (run[at] & later(power[at], int(so_far))) if so_far else power[at]
    found = np.any(moved != 0, axis=1)
    return np.where(found[:, None], moved, run), longest + np.where(found, length, 0)
