"""The registry of distribution families, in the order that users see."""

from screener.errors import PlanError
from screener.stats.families import (
    beta,
    cauchy,
    double_exponential,
    exponential,
    f,
    gamma,
    generalized_extreme_value,
    half_normal,
    largest_extreme_value,
    log_logistic,
    logistic,
    lognormal,
    maxwell_boltzmann,
    normal,
    rayleigh,
    smallest_extreme_value,
    student_t,
    tukey_lambda,
    uniform,
    weibull,
)
from screener.stats.families.family import Axis, Family, ShapeGrid, Support

__all__ = ["FAMILIES", "Axis", "Family", "ShapeGrid", "Support", "family_named"]

FAMILIES: tuple[Family, ...] = (
    normal.FAMILY,
    logistic.FAMILY,
    double_exponential.FAMILY,
    cauchy.FAMILY,
    student_t.FAMILY,
    uniform.FAMILY,
    beta.FAMILY,
    exponential.FAMILY,
    gamma.FAMILY,
    lognormal.FAMILY,
    weibull.FAMILY,
    log_logistic.FAMILY,
    rayleigh.FAMILY,
    maxwell_boltzmann.FAMILY,
    half_normal.FAMILY,
    f.FAMILY,
    largest_extreme_value.FAMILY,
    smallest_extreme_value.FAMILY,
    generalized_extreme_value.FAMILY,
    tukey_lambda.FAMILY,
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
