"""All conditions of a block of channels."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from screener.stats.conditions.clipping import Clipping, find_clipping
from screener.stats.conditions.counting import FloatArray, IntArray
from screener.stats.conditions.drift import find_trend
from screener.stats.conditions.gaps import find_gaps
from screener.stats.conditions.rails import apart_from_rails
from screener.stats.conditions.repeats import Repeats, find_repeats
from screener.stats.conditions.resolution import find_lattice, sample_ranks
from screener.stats.conditions.row_pass import RowPass, pass_over
from screener.stats.conditions.serial import Serial, serial_dependence
from screener.stats.conditions.stuck import Stuck, find_stuck
from screener.stats.ordering import brought_near

BoolArray = NDArray[np.bool_]

ROUNDED_FROM = 1.0
"""A step matters from this many standard deviations over the square root of n."""
FEWEST_EFFECTIVE = 20.0
"""A record worth fewer independent readings does not define a marginal distribution; one that has fewer readings is
short, and is judged as it is."""
SLOW = 2.0
"""tau_4 below which a short record is short, not drifting."""
LASTING = 0.45
"""Autocorrelation over a sixteenth of the record from which it has wandered rather than varied about a level."""


@dataclass(frozen=True, slots=True)
class Conditions:
    """The conditions of C channels; every array is [C]."""

    n: IntArray
    """Finite readings."""
    step: FloatArray
    """The resolution step, in the channel's unit; 0 where there is none or none that matters."""
    step_in_sd: FloatArray
    """The same over the standard deviation of the readings."""
    rounded: BoolArray
    """The step is large enough to matter at this n."""
    clipped_low: IntArray
    clipped_high: IntArray
    """Readings piled up at the least and at the greatest value; 0 where they are no more than to be expected."""
    perhaps_low: IntArray
    perhaps_high: IntArray
    """Readings at the least and at the greatest value where too few tell whether that is a rail; 0 elsewhere."""
    below: IntArray
    above: IntArray
    """Readings that stand at a detection limit, and are known only to lie below it, or above it."""
    longest_run: IntArray
    """Readings in the longest run of equal neighbours, 1 where no two are equal."""
    stuck: IntArray
    """Readings in runs of equal ones that the step and serial dependence do not explain."""
    repeated_value: FloatArray
    """The value that repeats far more than those beside it; NaN where none does."""
    repeated: IntArray
    """Readings of that value beyond the expected; clipped and stuck ones are not counted."""
    serial: BoolArray
    """Readings follow one another beyond chance, and not only slightly."""
    rho_1: FloatArray
    """Autocorrelation at lag 1; NaN where it is not defined."""
    tau_3: FloatArray
    tau_4: FloatArray
    """As estimated, serial or not: near 1 for independent readings."""
    ar: FloatArray
    """The coefficient of the AR(1) that has the same tau_4, of the sign of rho_1; 0 where not serial."""
    n_effective: FloatArray
    """n / tau_4; n where not serial."""
    rise: FloatArray
    """The straight rise over the record, in standard deviations about the line."""
    slow: FloatArray
    """Autocorrelation over about a sixteenth of the record."""
    drifting: BoolArray
    """The record does not define a marginal distribution: its effective n is below 20, it still correlates 0.45 over a
    sixteenth of the record, or its rise is large beyond chance."""
    missing: IntArray
    longest_gap: IntArray
    """Missing readings in the longest run of them."""
    gaps: BoolArray
    """That run is longer than missing readings here and there would make."""


def find_conditions(readings: FloatArray, ordered: FloatArray, n: IntArray) -> Conditions:
    """The conditions of readings, float64[C, rows], in row order; neither array is changed.

    ordered are the same readings sorted, and n[C] how many of them are finite, as `sort_in_place` leaves them.
    """
    ordered, exponent = brought_near(ordered, n)
    readings = _brought_along(readings, exponent)
    passed = pass_over(readings, ordered, n)
    spread = _spread(passed)
    sample = sample_ranks(ordered, n)
    lattice = find_lattice(ordered, n, sample)
    step_in_sd = np.divide(lattice.step, spread, out=np.zeros(n.size), where=(lattice.step > 0) & (spread > 0))
    dependence = serial_dependence(passed.resolutions, n, readings, step_in_sd)
    ar = _same_tau(dependence)
    clipping = find_clipping(ordered, n, lattice, (1.0 + ar**2) / (1.0 - ar**2))
    repeats = find_repeats(ordered, n, sample, lattice, spread)
    same, clipping = apart_from_rails(passed.same, readings, ordered, n, lattice.step, clipping)
    stuck = find_stuck(same, n, step_in_sd, dependence.rho[:, 1], repeats.count / np.maximum(n, 1))
    repeated = _neither_clipped_nor_stuck(repeats, ordered, n, lattice.step, clipping, stuck)
    trend = find_trend(passed.sums, passed.counts, np.ldexp(spread, -passed.exponent) ** 2)
    gaps = find_gaps(passed.absent, n, readings.shape[1])
    n_effective = np.where(dependence.found, n / dependence.tau_4, n)
    unsettled = (n_effective < FEWEST_EFFECTIVE) | (dependence.slow >= LASTING)
    wandered = unsettled & dependence.found & (dependence.tau_4 >= SLOW)
    return Conditions(
        n=n,
        step=_back(lattice.step, exponent),
        step_in_sd=step_in_sd,
        rounded=step_in_sd * np.sqrt(n) >= ROUNDED_FROM,
        clipped_low=clipping.low,
        clipped_high=clipping.high,
        perhaps_low=np.where(clipping.perhaps_low, clipping.at_low, 0),
        perhaps_high=np.where(clipping.perhaps_high, clipping.at_high, 0),
        below=np.zeros_like(n),
        above=np.zeros_like(n),
        longest_run=stuck.longest,
        stuck=stuck.readings,
        repeated_value=np.where(repeated > 0, _back(repeats.value, exponent), np.nan),
        repeated=repeated,
        serial=dependence.found,
        rho_1=dependence.rho[:, 1],
        tau_3=dependence.tau_3,
        tau_4=dependence.tau_4,
        ar=ar,
        n_effective=n_effective,
        rise=trend.rise,
        slow=dependence.slow,
        drifting=(wandered | trend.sure) & (n >= FEWEST_EFFECTIVE),
        missing=readings.shape[1] - n,
        longest_gap=gaps.longest,
        gaps=gaps.longest > gaps.explained,
    )


def _brought_along(readings: FloatArray, exponent: IntArray) -> FloatArray:
    """Readings scaled by 2^-exponent, the same array where none is."""
    extreme = np.flatnonzero(exponent)
    if extreme.size == 0:
        return readings
    near = readings.copy()
    near[extreme] = np.ldexp(near[extreme], -exponent[extreme, None])
    return near


def _back(values: FloatArray, exponent: IntArray) -> FloatArray:
    """Values in the unit of the readings again, at most the largest number there is."""
    largest = np.finfo(np.float64).max
    with np.errstate(over="ignore", under="ignore"):
        return np.clip(np.ldexp(values, exponent), -largest, largest)


def _greatest(ordered: FloatArray, n: IntArray) -> FloatArray:
    return ordered[np.arange(n.size), np.maximum(n - 1, 0)]


def _spread(passed: RowPass) -> FloatArray:
    """Standard deviation of the readings, [C]; 0 without any."""
    squares, pairs = passed.resolutions[0].products[:, 0], passed.resolutions[0].pairs[:, 0]
    return np.ldexp(np.sqrt(squares / np.maximum(pairs, 1.0)), passed.exponent)


def _same_tau(dependence: Serial) -> FloatArray:
    """The coefficient of the AR(1) with the same tau_4, [C]; 0 where no dependence was found."""
    size = ((dependence.tau_4 - 1.0) / (dependence.tau_4 + 1.0)) ** 0.25
    return np.where(dependence.found, np.copysign(size, np.nan_to_num(dependence.rho[:, 1])), 0.0)


def _neither_clipped_nor_stuck(
    repeats: Repeats, ordered: FloatArray, n: IntArray, step: FloatArray, clipping: Clipping, stuck: Stuck
) -> IntArray:
    """Readings of the repeated value beyond the expected that are neither at a rail nor in stuck stretches."""
    at_low = (clipping.low > 0) & (repeats.value <= ordered[:, 0] + step / 2.0)
    at_high = (clipping.high > 0) & (repeats.value >= _greatest(ordered, n) - step / 2.0)
    rest = repeats.beyond - stuck.readings
    return np.where(at_low | at_high | (2 * rest <= repeats.beyond), 0, rest)
