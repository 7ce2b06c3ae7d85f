"""Sums of products of readings with the readings k rows later, for many k at once, by matrix products.

A channel is cut into frames of LAGS readings. The products of each frame with itself, and with the next frame, summed
over frames, are two LAGS x LAGS matrices; their diagonals add up to the lag products. All pairs are counted.
"""

import numpy as np
from numpy.lib.stride_tricks import as_strided
from numpy.typing import NDArray

SmallFloats = NDArray[np.float32]
FloatArray = NDArray[np.float64]

LAGS = 16
"""Lags 0 to LAGS of one resolution."""


def padded(rows: int) -> int:
    """Length of a channel's buffer: its rows, then zeros that stand for the readings after the last."""
    return (-(-rows // LAGS) + 2) * LAGS


def lag_products(buffer: SmallFloats) -> FloatArray:
    """Sums over i of x[i] x[i + k] for k = 0 to LAGS, float64[C, LAGS + 1], of buffers float32[C, padded(rows)]."""
    channels, length = buffer.shape
    frames = length // LAGS - 1
    here = buffer[:, : frames * LAGS].reshape(channels, frames, LAGS).transpose(0, 2, 1)
    # One reading later: another address, so that the matrix product is not taken for the slower symmetric one.
    later = buffer[:, 1 : 1 + frames * LAGS].reshape(channels, frames, LAGS)
    products = np.empty((channels, LAGS, 2 * LAGS), dtype=np.float32)
    np.matmul(here, later, out=products[:, :, :LAGS])
    np.matmul(here[:, :, :-1], later[:, 1:], out=products[:, :, LAGS:])
    channel, row, column = products.strides
    shifted = as_strided(products, (channels, LAGS, LAGS), (channel, row + column, column))
    sums = np.empty((channels, LAGS + 1))
    sums[:, 0] = np.vecdot(buffer, buffer)
    sums[:, 1:] = shifted.sum(axis=1, dtype=np.float64)
    return sums
