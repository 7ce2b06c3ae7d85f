"""Bits of rows, held against plain loops."""

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import array_shapes, arrays
from numpy.typing import NDArray

from screener.stats.conditions import bits

FLAGS = arrays(np.bool_, array_shapes(min_dims=2, max_dims=2, max_side=300), elements=st.booleans())


def put(flags: NDArray[np.bool_]) -> bits.Bits:
    packed = bits.empty(*flags.shape)
    bits.put(flags, packed)
    return packed


def longest(flags: NDArray[np.bool_]) -> int:
    """The longest run of true flags, by one loop."""
    most = run = 0
    for flag in flags:
        run = run + 1 if flag else 0
        most = max(most, run)
    return most


@settings(deadline=None, max_examples=50)
@given(FLAGS, st.integers(0, 8))
def test_longest_runs_are_those_of_a_loop(flags: NDArray[np.bool_], dense: int) -> None:
    denser = flags | (np.arange(flags.shape[1]) % 9 < dense)
    assert bits.longest_run(put(denser)).tolist() == [longest(channel) for channel in denser]


@settings(deadline=None, max_examples=50)
@given(FLAGS, st.integers(0, 200))
def test_pairs_are_those_of_shifted_flags(flags: NDArray[np.bool_], lag: int) -> None:
    rows = flags.shape[1]
    wanted = [[int(np.sum(c[: rows - k] & c[k:])) for k in range(min(lag, rows - 1) + 1)] for c in flags]
    assert bits.pairs(put(flags), min(lag, rows - 1)).tolist() == wanted


@settings(deadline=None, max_examples=50)
@given(FLAGS)
def test_bits_are_unpacked_as_they_were_put(flags: NDArray[np.bool_]) -> None:
    assert np.array_equal(bits.unpacked(put(flags), flags.shape[1]), flags)
