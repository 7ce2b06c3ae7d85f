"""Sums of products of readings with the readings k rows later, for many k at once.

A channel is cut into pieces; dot products of each piece with the rows that begin 0, 1, 2, ... rows after it are taken
over overlapping views of the same memory, all in one call, and added up in double precision. All pairs are counted.
"""

import numpy as np
from numpy.typing import NDArray

SmallFloats = NDArray[np.float32]
FloatArray = NDArray[np.float64]

LAGS = 16
"""Lags 0 to LAGS of one resolution."""
PIECE = 2048
"""Readings of a piece, at most: few enough to stay in the processor's cache."""


def _cut(rows: int) -> tuple[int, int]:
    """How many pieces, and readings in each."""
    pieces = max(1, -(-rows // PIECE))
    return pieces, -(-rows // pieces)


def padded(rows: int) -> int:
    """Length of a channel's buffer: its rows, then zeros that stand for the readings after the last."""
    pieces, length = _cut(rows)
    return -(-(pieces * length + LAGS) // LAGS) * LAGS


def lag_products(buffer: SmallFloats, rows: int) -> FloatArray:
    """Sums over i of x[i] x[i + k] for k = 0 to LAGS, float64[C, LAGS + 1], of buffers float32[C, padded(rows)]."""
    pieces, length = _cut(rows)
    channel, row = buffer.strides
    shape, strides = (buffer.shape[0], pieces), (channel, length * row)
    here = np.ndarray((*shape, 1, length), np.float32, buffer, 0, (*strides, 0, row))
    later = np.ndarray((*shape, LAGS + 1, length), np.float32, buffer, 0, (*strides, row, row))
    return np.asarray(np.vecdot(here, later).sum(axis=1, dtype=np.float64))
