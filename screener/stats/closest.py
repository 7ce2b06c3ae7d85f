"""The closest families of a channel: those that its own test does not reject."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from screener.stats.families import Family
from screener.stats.families.family import FloatArray


def closest_order(p: FloatArray, families: Sequence[Family], alpha: float) -> NDArray[np.int64]:
    """Places of the families of p, float64[..., F], closest first: fewer shapes, then larger p; int64[..., F].

    Families that are rejected at alpha, that could not be fitted or that only diagnose come last, in no useful order;
    `acceptable` tells them.
    """
    shapes = np.array([family.shape_count for family in families], dtype=np.float64)
    badness = np.where(acceptable(p, families, alpha), shapes - np.where(np.isnan(p), 0.0, p), np.inf)
    return np.argsort(badness, axis=-1, kind="stable")


def acceptable(p: FloatArray, families: Sequence[Family], alpha: float) -> NDArray[np.bool_]:
    """Whether each family, of p float64[..., F], may be named as the distribution of the channel."""
    model = np.array([not family.diagnostic for family in families])
    return np.asarray((p >= alpha) & model, dtype=np.bool_)


def closest(p: FloatArray, families: Sequence[Family], alpha: float) -> NDArray[np.int64]:
    """The closest family of each channel, p float64[C, F]: int64[C], -1 where every family is rejected."""
    first = closest_order(p, families, alpha)[:, 0]
    found = acceptable(p, families, alpha)[np.arange(p.shape[0]), first]
    return np.where(found, first, -1)


def comparison(p: FloatArray, families: Sequence[Family], alpha: float, n: int) -> str:
    """What one channel's p, float64[F], say of the families that come closest, in a sentence; empty if none does."""
    order = [families[i] for i in closest_order(p, families, alpha) if acceptable(p, families, alpha)[i]]
    if not order:
        return "no family passes its own test"
    fewest = order[0].shape_count
    like = [family.name for family in order if family.shape_count == fewest]
    if len(like) == 1:
        return f"closest: {like[0]}"
    shown = ", ".join(like[:-1][:4]) + (", ..." if len(like) > 5 else "")
    return f"{shown} and {like[-1]} cannot be told apart at n = {n:,}; {like[0]} is closest"
