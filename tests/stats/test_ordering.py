"""Sorting with missing and infinite readings."""

import numpy as np
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra.numpy import array_shapes, arrays

from screener.stats.ordering import sort_in_place


@given(arrays(np.float64, array_shapes(min_dims=2, max_dims=2, max_side=12), elements=st.floats(allow_nan=True)))
def test_finite_readings_come_first_in_order_and_are_counted(readings: np.ndarray) -> None:
    expected = [np.sort(channel[np.isfinite(channel)]) for channel in readings]
    ordered = readings.copy()
    n = sort_in_place(ordered)
    for channel, count, finite in zip(ordered, n, expected, strict=True):
        assert np.array_equal(channel[:count], finite)
        assert np.all(np.isnan(channel[count:]))
