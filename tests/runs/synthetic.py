"""Scores made up from seeded random numbers, the same for a channel in whatever block it stands."""

from dataclasses import replace
from pathlib import Path

import numpy as np

from screener.records import BlockScores, Channel, Plan, SetAside, Span, TableFacts
from screener.runs import RunFile

FAMILIES = ("normal", "Weibull", "Cauchy")
PLAN = Plan(alpha=0.01, channels=("sensor_*",), skip=("*_raw", "t?"), missing=("OVER",), seed=7)


def facts(channels: int, path: Path = Path("rig.csv")) -> TableFacts:
    """Facts of a made-up table."""
    return TableFacts(
        path=path,
        format="csv",
        rows=120,
        channels=tuple(Channel(k, f"sensor_{k}", "bar" if k % 2 else "") for k in range(channels)),
        set_aside=(SetAside("lot", "text"), SetAside("ok", "constant")),
        fingerprint="5f3c",
        remarks=("Decimal comma.", "3 lines before the header."),
    )


def block(first: int, stop: int) -> BlockScores:
    """Scores of the channels first to stop - 1, all scored."""
    channels = [np.random.default_rng([11, position]) for position in range(first, stop)]
    tables = np.array([rng.uniform(size=(6, len(FAMILIES))) for rng in channels])
    return BlockScores(
        span=Span(first, stop),
        families=FAMILIES,
        n=np.array([100 + position % 20 for position in range(first, stop)]),
        missing=np.array([20 - position % 20 for position in range(first, stop)]),
        reasons=("",) * (stop - first),
        r=tables[:, 0],
        critical_r=tables[:, 1],
        plain_critical_r=tables[:, 2],
        p=tables[:, 3],
        extrapolated=tables[:, 3] < 0.1,
        location=tables[:, 4] * 1e9,
        scale=tables[:, 5] * 1e-9,
        notes=tuple(("", "", "flat") for _ in channels),
        shapes=np.full((stop - first, len(FAMILIES), 2), np.nan),
        held=np.full(stop - first, FAMILIES.index("normal")),
        closest=np.where(tables[:, 3].max(axis=1) > 0.5, tables[:, 3].argmax(axis=1), -1),
        points=tuple(np.sort(rng.normal(size=40)) for rng in channels),
    )


def unfitted(scores: BlockScores, row: int, *, note: str = "", reason: str = "") -> BlockScores:
    """The same scores, but for one channel that no family was fitted to."""

    def blank(
        values: np.ndarray[tuple[int, ...], np.dtype[np.float64]],
    ) -> np.ndarray[tuple[int, ...], np.dtype[np.float64]]:
        blanked = values.copy()
        blanked[row] = np.nan
        return blanked

    notes, reasons = list(scores.notes), list(scores.reasons)
    notes[row], reasons[row] = (note,) * len(scores.families), reason
    return replace(
        scores,
        r=blank(scores.r),
        critical_r=blank(scores.critical_r),
        plain_critical_r=blank(scores.plain_critical_r),
        p=blank(scores.p),
        location=blank(scores.location),
        scale=blank(scores.scale),
        notes=tuple(notes),
        reasons=tuple(reasons),
    )


def new_run(path: Path, channels: int = 8, plan: Plan = PLAN) -> RunFile:
    """A run file in which nothing is scored yet."""
    return RunFile.create(path, facts(channels), plan, version="0.1.0", null_version="null-1")


def stored_run(path: Path, *blocks: BlockScores, channels: int = 8, plan: Plan = PLAN) -> RunFile:
    """A run file that holds these blocks, held against the family of the plan, still open."""
    run = new_run(path, channels, plan)
    for scores in blocks:
        run.store(replace(scores, held=np.full(scores.n.size, FAMILIES.index(plan.family))))
    return run


def files_in(folder: Path) -> list[str]:
    """The names of all files in a folder, hidden ones too."""
    return sorted(entry.name for entry in folder.iterdir())
