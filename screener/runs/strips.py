"""The strip of every channel of a block: its departure against the family that it is held against."""

from __future__ import annotations

from collections import defaultdict
from typing import TYPE_CHECKING

import numpy as np

from screener.records import BlockScores
from screener.stats.families import Axis, family_named
from screener.stats.points import kept_ranks
from screener.stats.positions import plotting_positions
from screener.stats.strip import strips

if TYPE_CHECKING:
    from screener.records import FloatArray


def strips_of(scores: BlockScores, rule: str) -> list[str]:
    """The strips of a block's channels; empty where the channel has no fit."""
    told = [""] * scores.n.size
    for (family, n), rows in _alike(scores).items():
        places = np.array(rows)
        points = np.stack([scores.points[row] for row in rows])
        location, scale = scores.location[places, family], scores.scale[places, family]
        standard = _standard(scores.families[family], n, rule, scores.shapes[places, family])
        expected = location[:, None] + scale[:, None] * standard
        on_log = family_named(scores.families[family]).axis is Axis.LOG
        for row, strip in zip(rows, strips(np.log(points) if on_log else points, expected, scale), strict=True):
            told[row] = strip
    return told


def _alike(scores: BlockScores) -> dict[tuple[int, int], list[int]]:
    """The rows of fitted channels, by family held against and n."""
    alike: dict[tuple[int, int], list[int]] = defaultdict(list)
    for row, (family, n) in enumerate(zip(scores.held.tolist(), scores.n.tolist(), strict=True)):
        fitted = np.isfinite(scores.location[row, family]) and scores.scale[row, family] > 0
        if fitted and scores.points[row].size == kept_ranks(n).size:
            alike[family, n].append(row)
    return alike


def _standard(name: str, n: int, rule: str, shapes: FloatArray) -> FloatArray:
    """Standard quantiles at the kept ranks: [m], or [C, m] for a family with shapes."""
    u = plotting_positions(n, rule)[kept_ranks(n)]
    family = family_named(name)
    return family.quantile(u, *(shapes[:, k : k + 1] for k in range(family.shape_count)))
