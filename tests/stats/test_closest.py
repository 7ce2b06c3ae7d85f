"""Closest families: fewer shapes first, then larger p, never one that its own test rejects."""

import numpy as np
import pytest

from screener.stats.closest import closest, closest_order, comparison
from screener.stats.families import FAMILIES, family_named
from screener.stats.null.packing import shipped_nulls
from screener.stats.scoring import score

NAMES = [family.name for family in FAMILIES]


def p_of(**given: float) -> np.ndarray:
    p = np.full(len(FAMILIES), 0.001)
    for name, value in given.items():
        p[NAMES.index(name.replace("_", " "))] = value
    return p


def test_fewer_shapes_come_first_then_larger_p() -> None:
    p = p_of(gamma=0.9, normal=0.06, logistic=0.3, beta=0.99)
    order = [NAMES[i] for i in closest_order(p, FAMILIES, 0.05)[:4]]
    assert order == ["logistic", "normal", "gamma", "beta"]


def test_a_rejected_or_diagnostic_family_is_never_closest() -> None:
    p = np.stack([p_of(Tukey_lambda=0.9), p_of(gamma=0.04), p_of(gamma=0.05), np.full(len(FAMILIES), np.nan)])
    assert closest(p, FAMILIES, 0.05).tolist() == [-1, -1, NAMES.index("gamma"), -1]


def test_families_that_cannot_be_told_apart_are_said() -> None:
    assert comparison(p_of(normal=0.3), FAMILIES, 0.05, 60) == "closest: normal"
    assert comparison(p_of(gamma=0.6, Student_t=0.2), FAMILIES, 0.05, 60) == (
        "gamma and Student t cannot be told apart at n = 60; gamma is closest"
    )
    assert comparison(p_of(), FAMILIES, 0.05, 60) == "no family passes its own test"


@pytest.mark.parametrize(("name", "shapes"), [("normal", ()), ("exponential", ()), ("uniform", ()), ("gamma", (2.0,))])
def test_the_own_family_of_a_large_sample_is_among_the_accepted(name: str, shapes: tuple[float, ...]) -> None:
    family = family_named(name)
    readings = 50.0 + family.quantile(np.random.default_rng(7).random((40, 2000)), *shapes)
    scoring = score(readings, FAMILIES, shipped_nulls(), 0.01)
    accepted = np.mean(scoring.p[:, NAMES.index(name)] >= 0.01)
    assert accepted >= 0.9
    named = closest(scoring.p, FAMILIES, 0.01)
    chosen = scoring.p[np.arange(40), named][named >= 0]
    assert np.all(chosen >= 0.01)
