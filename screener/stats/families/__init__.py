"""The registry of distribution families, in the order that users see."""

from screener.errors import PlanError
from screener.stats.families import (
    cauchy,
    double_exponential,
    exponential,
    half_normal,
    largest_extreme_value,
    log_logistic,
    logistic,
    lognormal,
    maxwell_boltzmann,
    normal,
    rayleigh,
    smallest_extreme_value,
    uniform,
    weibull,
)
from screener.stats.families.family import Axis, Family, Support

__all__ = ["FAMILIES", "Axis", "Family", "Support", "family_named"]

FAMILIES: tuple[Family, ...] = (
    normal.FAMILY,
    logistic.FAMILY,
    double_exponential.FAMILY,
    cauchy.FAMILY,
    uniform.FAMILY,
    exponential.FAMILY,
    rayleigh.FAMILY,
    maxwell_boltzmann.FAMILY,
    half_normal.FAMILY,
    largest_extreme_value.FAMILY,
    smallest_extreme_value.FAMILY,
    lognormal.FAMILY,
    weibull.FAMILY,
    log_logistic.FAMILY,
)


def family_named(name: str) -> Family:
    """The family of that name, capitals ignored.

    Raises: PlanError when there is none.
    """
    for family in FAMILIES:
        if family.name.lower() == name.strip().lower():
            return family
    known = ", ".join(family.name for family in FAMILIES)
    raise PlanError(f"There is no family named {name!r}. Known: {known}.")
