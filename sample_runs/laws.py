"""The distributions that the readings of the sample runs are drawn from.

A law is a standard quantile function with its mean and standard deviation. A channel's readings, before rounding, are
location + scale * quantile(u), where u is uniform and follows itself in time as much as the channel does.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import betaincinv, gammaincinv, ndtr, ndtri, stdtrit

FloatArray = NDArray[np.float64]
EULER = float(np.euler_gamma)


@dataclass(frozen=True)
class Law:
    """One standard distribution, and the word for how it departs from the normal."""

    name: str
    shape: str
    departure: str
    quantile: Callable[[FloatArray], FloatArray]
    mean: float
    sd: float
    from_zero: bool = False
    """The readings start at zero, so that only the scale is free."""


def normal() -> Law:
    """The normal distribution, the one law without a departure."""
    return Law("normal", "", "", ndtri, 0.0, 1.0)


def student(nu: float) -> Law:
    """Student t with nu > 2 degrees of freedom."""
    return Law(
        "Student t",
        f"nu={nu:g}",
        "heavy tails",
        lambda u: np.asarray(stdtrit(nu, u), np.float64),
        0.0,
        math.sqrt(nu / (nu - 2.0)),
    )


def logistic() -> Law:
    """The logistic distribution: tails a little heavier than normal."""
    return Law("logistic", "", "heavy tails", lambda u: np.log(u) - np.log1p(-u), 0.0, math.pi / math.sqrt(3.0))


def double_exponential() -> Law:
    """The double exponential distribution: a sharp peak."""

    def quantile(u: FloatArray) -> FloatArray:
        return np.where(u < 0.5, np.log(2.0 * u), -np.log(2.0 * (1.0 - u)))

    return Law("double exponential", "", "heavy tails", quantile, 0.0, math.sqrt(2.0))


def mixture(shape: str, departure: str, share: float, shift: float, spread: float) -> Law:
    """The mixture of a standard normal and a share of normal readings moved by shift and widened by spread."""
    grid = np.linspace(-6.0 - 4.0 * spread, 6.0 + 4.0 * spread + shift, 20_001)
    below = (1.0 - share) * ndtr(grid) + share * ndtr((grid - shift) / spread)
    mean = share * shift
    variance = (1.0 - share) + share * (spread**2 + shift**2) - mean**2
    return Law("normal mixture", shape, departure, lambda u: np.interp(u, below, grid), mean, math.sqrt(variance))


def two_clusters(share: float, apart: float) -> Law:
    """Two normal clusters of equal spread, apart by so many of their standard deviations."""
    return mixture(f"second cluster {share:g}, apart={apart:g}", "two clusters", share, apart, 1.0)


def two_spreads(share: float, spread: float) -> Law:
    """Normal readings of which a share is spread so many times wider."""
    return mixture(f"wide share {share:g}, spread={spread:g}", "heavy tails", share, 0.0, spread)


def uniform() -> Law:
    """The uniform distribution on 0 to 1."""
    return Law("uniform", "", "light tails", lambda u: u, 0.5, math.sqrt(1.0 / 12.0))


def beta(a: float, b: float, departure: str) -> Law:
    """The beta distribution on 0 to 1."""
    sd = math.sqrt(a * b / (a + b + 1.0)) / (a + b)
    return Law(
        "beta",
        f"alpha={a:g}, beta={b:g}",
        departure,
        lambda u: np.asarray(betaincinv(a, b, u), np.float64),
        a / (a + b),
        sd,
    )


def gamma(k: float) -> Law:
    """The gamma distribution of shape k from zero; k = 1 is the exponential distribution."""
    name, shape = ("exponential", "") if k == 1.0 else ("gamma", f"k={k:g}")
    return Law(
        name, shape, "right skew", lambda u: np.asarray(gammaincinv(k, u), np.float64), k, math.sqrt(k), from_zero=True
    )


def mirrored_gamma(k: float) -> Law:
    """The gamma distribution of shape k turned round: its long tail lies low."""
    return Law(
        "mirrored gamma",
        f"k={k:g}",
        "left skew",
        lambda u: -np.asarray(gammaincinv(k, 1.0 - u), np.float64),
        -k,
        math.sqrt(k),
    )


def lognormal(sigma: float) -> Law:
    """The lognormal distribution from zero; sigma is the standard deviation of ln x."""
    mean = math.exp(0.5 * sigma**2)
    sd = mean * math.sqrt(math.expm1(sigma**2))
    shape = f"sigma={sigma:g}"
    return Law("lognormal", shape, "right skew", lambda u: np.exp(sigma * ndtri(u)), mean, sd, from_zero=True)


def weibull(c: float) -> Law:
    """The Weibull distribution of shape c from zero: skewed left when c is well above 3.6."""
    mean = math.gamma(1.0 + 1.0 / c)
    sd = math.sqrt(math.gamma(1.0 + 2.0 / c) - mean**2)
    departure = "right skew" if c < 3.6 else "left skew"
    return Law("Weibull", f"c={c:g}", departure, lambda u: (-np.log1p(-u)) ** (1.0 / c), mean, sd, from_zero=True)


def rayleigh() -> Law:
    """The Rayleigh distribution from zero: the length of a two-dimensional normal error."""
    mean, sd = math.sqrt(0.5 * math.pi), math.sqrt(2.0 - 0.5 * math.pi)
    return Law("Rayleigh", "", "right skew", lambda u: np.sqrt(-2.0 * np.log1p(-u)), mean, sd, from_zero=True)


def half_normal() -> Law:
    """The half-normal distribution from zero: the size of a normal error."""
    mean, sd = math.sqrt(2.0 / math.pi), math.sqrt(1.0 - 2.0 / math.pi)
    return Law("half-normal", "", "right skew", lambda u: ndtri(0.5 * (1.0 + u)), mean, sd, from_zero=True)


def largest() -> Law:
    """The largest extreme value (Gumbel) distribution."""
    sd = math.pi / math.sqrt(6.0)
    return Law("largest extreme value", "", "right skew", lambda u: -np.log(-np.log(u)), EULER, sd)


def smallest() -> Law:
    """The smallest extreme value distribution."""
    sd = math.pi / math.sqrt(6.0)
    return Law("smallest extreme value", "", "left skew", lambda u: np.log(-np.log1p(-u)), -EULER, sd)
