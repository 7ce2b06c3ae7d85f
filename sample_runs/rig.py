"""The channels of an invented hydraulic pump endurance rig: what each measures and how its readings are made."""

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from fractions import Fraction
from typing import TypedDict, Unpack

from laws import (
    Law,
    beta,
    double_exponential,
    gamma,
    half_normal,
    largest,
    logistic,
    lognormal,
    mirrored_gamma,
    normal,
    rayleigh,
    smallest,
    student,
    two_clusters,
    two_spreads,
    uniform,
    weibull,
)

SPREADS = (1.0, 0.8, 1.3, 0.9, 1.15, 0.7)
"""Channels of one kind do not scatter alike: their standard deviations take these multiples in turn."""
OFFSETS = (0.0, 0.31, -0.22, 0.12, -0.37, 0.24, -0.09)
"""Nor do they stand at one level: their means are moved by these multiples of three standard deviations."""


@dataclass(frozen=True)
class Recipe:
    """How the readings of one channel are made. Lengths named "in sd" are in standard deviations of the law."""

    name: str
    unit: str
    level: float
    """Mean before clipping, drift and disturbances."""
    sd: float
    """Standard deviation of the law; not used by laws that start at zero, whose level decides it."""
    step: Fraction
    """The converter's step: every reading is a whole multiple of it."""
    law: Law = field(default_factory=normal)
    ar: tuple[float, ...] = ()
    """Autoregressive coefficients of the normal scores behind the readings; empty when independent."""
    outlying: int = 0
    """Single readings moved away from the level, to either side."""
    moved: float = 6.0
    """How far they are moved at least, in sd; at most half as far again."""
    clip_low: float | None = None
    clip_high: float | None = None
    """Rails of the converter, in sd from the level."""
    stuck: float = 0.0
    """Share of the record, in one stretch, through which one reading is repeated."""
    trend: float = 0.0
    """Straight rise from the first to the last reading, in sd."""
    walk: float = 0.0
    """Random walk: the standard deviation of its end, in sd."""
    missing: float = 0.0
    """Share of readings that are absent, each for itself."""
    gap: float = 0.0
    """Share of the record absent in one stretch."""


class Change(TypedDict, total=False):
    """What sets a channel apart from the others of its kind."""

    level: float
    sd: float
    law: Law
    ar: tuple[float, ...]
    outlying: int
    moved: float
    clip_low: float
    clip_high: float
    stuck: float
    trend: float
    walk: float
    missing: float
    gap: float


def numbered(count: int) -> tuple[str, ...]:
    """The labels 01, 02, ..."""
    return tuple(f"{number:02d}" for number in range(1, count + 1))


def but(**change: Unpack[Change]) -> Change:
    """A change, written as keywords."""
    return change


def kind(
    stem: str,
    unit: str,
    labels: tuple[str, ...],
    readings: tuple[float, float, str],
    *laws: Law,
    ar: tuple[tuple[float, ...], ...] = ((),),
    others: Mapping[str, Change] | None = None,
) -> list[Recipe]:
    """Recipes of the channels of one kind; readings are level, sd and step; laws and ar are taken in turn."""
    level, sd, step = readings
    recipes = []
    for place, label in enumerate(labels):
        own_sd = float(f"{sd * SPREADS[place % len(SPREADS)]:.3g}")
        own_level = float(f"{level + 3.0 * sd * OFFSETS[place % len(OFFSETS)]:.5g}")
        recipe = Recipe(f"{stem}_{label} [{unit}]", unit, own_level, own_sd, Fraction(step))
        recipe = replace(recipe, ar=ar[place % len(ar)], law=laws[place % len(laws)] if laws else normal())
        recipes.append(replace(recipe, **(others or {}).get(label, {})))
    return recipes


AXES = ("pump_x", "pump_y", "pump_z", "motor_x", "motor_y", "motor_z", "frame_x", "frame_y", "frame_z")
PHASES = ("L1", "L2", "L3")
BEARINGS = ("DE_1", "DE_2", "DE_3", "DE_4", "NDE_1", "NDE_2", "NDE_3", "NDE_4")
WINDINGS = ("U1", "U2", "V1", "V2", "W1", "W2")
OIL_POINTS = ("suction", "outlet", "case", "cooler_in", "cooler_out", "return", "pilot", "booster", "filter", "sump")
CALM, SOME, SLOW = ((), (0.2,)), ((0.3,), (0.6,), ()), ((0.9,), (0.8,), (0.7,))


def pressures() -> list[Recipe]:
    """Pressures of the pump and its circuits."""
    return [
        *kind("outlet_pressure", "bar", numbered(12), (210.0, 0.9, "0.1"), ar=SOME, others={
            "05": but(outlying=9, moved=6.0), "09": but(law=student(4)), "11": but(walk=6.0), "12": but(missing=0.03),
        }),
        *kind("inlet_pressure", "bar", numbered(8), (2.4, 0.03, "0.01"), ar=((), (0.4,)), others={
            "04": but(law=smallest()), "07": but(law=mirrored_gamma(6)), "08": but(missing=0.01),
        }),
        *kind("case_pressure", "bar", numbered(6), (1.8, 0.05, "10/4096"), ar=((0.5,), ()), others={
            "03": but(law=two_clusters(0.35, 3.5)),
        }),
        *kind("pilot_pressure", "bar", numbered(6), (32.0, 0.35, "100/4096"), ar=CALM, others={
            "02": but(law=uniform()), "05": but(law=logistic()), "06": but(gap=0.06),
        }),
        *kind("pressure_ripple", "bar", numbered(10), (4.2, 0.45, "0.02"),
              rayleigh(), lognormal(0.35), gamma(6), weibull(2.4), normal(), ar=CALM),
        *kind("piston_peak_pressure", "bar", numbered(7), (228.0, 3.1, "0.1"), largest()),
        *kind("filter_dp", "bar", numbered(5), (0.85, 0.012, "0.005"), ar=SLOW, others={
            "02": but(trend=14.0), "04": but(walk=8.0, trend=5.0),
        }),
        *kind("accumulator_pressure", "bar", numbered(4), (140.0, 0.9, "0.4"), ar=SOME, others={
            "03": but(law=uniform()),
        }),
    ]  # fmt: skip


def flows() -> list[Recipe]:
    """Flows, leakage and what the oil carries."""
    return [
        *kind("outlet_flow", "l/min", numbered(6), (118.0, 0.42, "0.05"), ar=((0.7,), (0.5,), ()), others={
            "03": but(outlying=5, moved=9.0),
        }),
        *kind("case_drain_flow", "l/min", numbered(6), (1.9, 0.06, "0.01"), ar=CALM, others={
            "02": but(law=lognormal(0.12)), "05": but(law=weibull(8)), "06": but(missing=0.02),
        }),
        *kind("seal_leakage", "ml/h", numbered(6), (12.0, 1.1, "0.1"),
              gamma(1), gamma(2), weibull(1.6), gamma(25), lognormal(0.6), normal(), ar=CALM),
        *kind("cooling_flow", "l/min", numbered(4), (36.0, 0.5, "0.1"), ar=SOME, others={
            "02": but(law=two_clusters(0.15, 4.5)), "04": but(stuck=0.75),
        }),
        *kind("particles", "1/ml", ("4um", "6um", "14um"), (640.0, 60.0, "1"), lognormal(0.3), lognormal(0.5), others={
            "6um": but(level=155.0), "14um": but(level=21.0),
        }),
        *kind("oil", "mm2/s", ("viscosity", "viscosity_return"), (42.5, 0.3, "0.05"), ar=SLOW),
        *kind("water_saturation", "%", numbered(2), (31.0, 0.4, "0.1"), ar=SLOW, others={"02": but(walk=7.0)}),
    ]  # fmt: skip


def temperatures() -> list[Recipe]:
    """Temperatures of oil, bearings, windings and cooling water."""
    return [
        *kind("tank_temp", "degC", numbered(4), (52.0, 0.35, "0.1"), ar=SLOW, others={"02": but(trend=12.0)}),
        *kind("bearing_temp", "degC", BEARINGS, (64.0, 0.5, "0.1"), ar=SLOW, others={
            "DE_3": but(stuck=0.2), "NDE_2": but(walk=9.0), "NDE_4": but(law=two_clusters(0.5, 3.0), ar=(0.6,)),
        }),
        *kind("winding_temp", "degC", WINDINGS, (71.0, 0.6, "0.2"), ar=SLOW, others={
            "V2": but(missing=0.08), "W1": but(law=beta(3, 3, "light tails")),
        }),
        *kind("oil_temp", "degC", OIL_POINTS, (48.0, 0.4, "0.1"), ar=((0.6,), (0.9,), (0.3,)), others={
            "cooler_in": but(law=beta(1.5, 1.5, "light tails")), "cooler_out": but(law=uniform(), ar=()),
            "sump": but(gap=0.04),
        }),
        *kind("cooling_temp", "degC", numbered(4), (24.0, 0.3, "0.1"), ar=SOME, others={"03": but(law=student(8))}),
    ]  # fmt: skip


def motion() -> list[Recipe]:
    """Vibration, sound, runout, torque, speed and valve positions."""
    return [
        *kind("vib_rms", "mm/s", AXES, (2.1, 0.12, "0.01"), ar=CALM, others={
            "pump_y": but(law=lognormal(0.15)), "motor_x": but(law=gamma(40)), "frame_z": but(law=lognormal(0.25)),
            "frame_x": but(law=logistic()),
        }),
        *kind("vib_amplitude", "um", AXES[:6], (14.0, 4.0, "0.1"), rayleigh(), ar=CALM),
        *kind("vib_peak", "m/s2", AXES[:6], (38.0, 4.0, "0.2"), largest(), gamma(12), normal(), ar=CALM),
        *kind("sound_level", "dB", numbered(6), (84.5, 0.5, "0.1"), ar=CALM, others={
            "03": but(law=two_clusters(0.2, 4.0)), "06": but(law=student(12)),
        }),
        *kind("acoustic_emission", "mV", numbered(4), (85.0, 6.0, "0.5"), lognormal(0.4), weibull(2), gamma(100)),
        *kind("runout_radial", "um", numbered(6), (8.0, 2.0, "0.1"), half_normal()),
        *kind("runout_axial", "um", numbered(2), (5.0, 2.0, "0.1"), half_normal(), weibull(1.3)),
        *kind("shaft_gap", "um", numbered(8), (250.0, 1.5, "0.25"), ar=((1.2, -0.5), (0.3, 0.4), ()), others={
            "05": but(outlying=14, moved=5.0), "08": but(missing=0.015),
        }),
        *kind("shaft_torque", "N m", numbered(4), (262.0, 1.6, "0.2"), ar=SOME, others={"03": but(law=student(5))}),
        *kind("shaft_speed", "rpm", numbered(3), (1485.0, 1.1, "0.5"), ar=SOME),
        *kind("swash_angle", "deg", numbered(2), (14.2, 0.06, "0.01"), ar=((0.4,),), others={
            "02": but(law=two_clusters(0.3, 3.0)),
        }),
        *kind("spool_position", "mm", numbered(8), (0.0, 0.12, "0.005"), ar=CALM, others={
            "02": but(law=two_clusters(0.5, 5.0)), "04": but(clip_high=1.3), "05": but(clip_low=-1.6, clip_high=1.6),
            "06": but(law=uniform()), "08": but(law=beta(2, 2, "light tails")),
        }),
    ]  # fmt: skip


def electrics() -> list[Recipe]:
    """The drive motor, and the rig's own voltages and current loops."""
    return [
        *kind("motor_current", "A", PHASES, (78.0, 0.55, "0.1"), ar=SOME),
        *kind("motor_voltage", "V", PHASES, (398.0, 0.9, "0.1"), ar=((0.8,), (0.6,)), others={"L2": but(outlying=6)}),
        *kind("motor_power", "kW", numbered(2), (41.2, 0.3, "0.05"), ar=((0.6,),)),
        *kind("power_factor", "1", numbered(2), (0.87, 0.006, "0.001"), beta(8, 2, "left skew"), normal()),
        *kind("mains_frequency", "Hz", ("grid",), (50.0, 0.012, "0.005"), ar=((0.9,),)),
        *kind("reference_voltage", "mV", numbered(8), (500.0, 0.25, "0.0305"), ar=CALM, others={
            "03": but(law=two_spreads(0.05, 4.0)), "07": but(clip_high=0.9), "08": but(missing=0.01),
        }),
        *kind("current_loop", "mA", numbered(8), (12.0, 0.05, "0.002"), ar=((), (), (0.4,)), others={
            "04": but(law=double_exponential()), "06": but(stuck=0.1), "08": but(law=student(20)),
        }),
    ]  # fmt: skip


def loads() -> list[Recipe]:
    """Strains and forces of the frame."""
    return [
        *kind("strain", "um/m", numbered(24), (420.0, 6.0, "0.1"), ar=((), (), (0.3,)), others={
            "04": but(outlying=3, moved=12.0), "09": but(outlying=20, moved=4.5), "11": but(law=student(3)),
            "13": but(clip_low=-1.9), "16": but(stuck=0.3), "18": but(missing=0.05),
            "21": but(law=two_spreads(0.02, 3.0)), "23": but(stuck=0.85),
        }),
        *kind("tie_rod_force", "kN", numbered(6), (86.0, 0.4, "0.01"), ar=CALM, others={
            "05": but(law=mirrored_gamma(16)),
        }),
    ]  # fmt: skip


def rig() -> tuple[Recipe, ...]:
    """Every channel of the rig, in the order of its columns."""
    return (*pressures(), *flows(), *temperatures(), *motion(), *electrics(), *loads())
