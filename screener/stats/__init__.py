"""The arithmetic: plotting positions, families, correlation, null distributions. Arrays in, arrays out.

Readings are `float64[channels, rows]`, C-contiguous, one channel contiguous in memory; NaN means missing; the last
axis is reduced. Each function gives only its own shapes.
"""
