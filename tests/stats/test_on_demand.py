"""Nulls simulated on demand: the same whatever came before, shared, kept, and settled early."""

from pathlib import Path
from threading import Thread

import numpy as np
import pytest

from screener.errors import Cancelled
from screener.screening.kept_samples import KeptSamples
from screener.stats.families import FAMILIES, family_named
from screener.stats.null.condition import Condition, log_gaps
from screener.stats.null.on_demand import SimulatedNulls, batch_ends, judged, most_samples, near
from screener.stats.null.packing import shipped_nulls
from screener.stats.scoring import score

CLIPPED = Condition("normal", (), "filliben", 200, 0, 20, 0.0, 1.0)


def test_samples_do_not_depend_on_how_many_were_asked_for_before() -> None:
    whole = SimulatedNulls().prefix(CLIPPED, 1000)
    grown = SimulatedNulls()
    for end in (250, 500, 1000):
        assert np.array_equal(grown.prefix(CLIPPED, end), whole[:end])


def test_batches_double_until_enough_fall_below_the_critical_value() -> None:
    assert list(batch_ends(2000)) == [250, 500, 1000, 2000]
    assert most_samples(0.05) == 2000
    assert 0.01 * most_samples(0.01) >= 50 * 0.999


def test_without_conditions_samples_have_the_tabled_null() -> None:
    plain = Condition("normal", (), "filliben", 150, 0, 0, 0.0, 1.0)
    r = -np.expm1(log_gaps(plain, 6000, np.random.default_rng(1)))
    critical = shipped_nulls().plain.critical("normal", 150, 0.05)
    assert np.mean(r < critical) == pytest.approx(0.05, abs=3 * np.sqrt(0.05 * 0.95 / 6000))


def test_a_channel_well_inside_its_null_is_settled_by_few_samples() -> None:
    asked: list[int] = []

    class Counting(SimulatedNulls):
        def prefix(self, condition: Condition, count: int) -> np.ndarray:
            asked.append(count)
            return super().prefix(condition, count)

    nulls = Counting()
    middle = float(np.median(nulls.prefix(CLIPPED, 250)))
    asked.clear()
    rows, row = judged(nulls, CLIPPED, np.array([middle]), 0.05)
    assert max(asked) == 250
    assert 0.4 < rows.p(-np.expm1([middle]), row)[0] < 0.6
    judged(nulls, CLIPPED, np.array([middle + 3.0]), 0.05)
    assert max(asked) == 2000


def test_kept_samples_come_back_and_damaged_ones_are_made_again(tmp_path: Path) -> None:
    first = SimulatedNulls(KeptSamples(tmp_path)).prefix(CLIPPED, 500)
    (file,) = tmp_path.iterdir()
    file.write_bytes(file.read_bytes()[:100])
    assert np.array_equal(SimulatedNulls(KeptSamples(tmp_path)).prefix(CLIPPED, 500), first)
    other = KeptSamples(tmp_path)
    kept = other.load(repr(CLIPPED))
    assert kept is not None
    assert np.array_equal(kept, first)
    assert other.load("another condition") is None


def test_threads_that_need_the_same_condition_get_the_same_samples() -> None:
    nulls, found = SimulatedNulls(), []
    threads = [Thread(target=lambda: found.append(nulls.prefix(CLIPPED, 1000))) for _ in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert len(found) == 4
    assert all(np.array_equal(each, found[0]) for each in found)


def test_simulating_can_be_given_up() -> None:
    with pytest.raises(Cancelled):
        SimulatedNulls(cancelled=lambda: True).prefix(CLIPPED, 250)


def test_conditions_in_which_few_samples_can_be_judged_are_simulated_all_the_same() -> None:
    # At 1.9 standard deviations a step, most samples of 50 have only three distinct readings.
    readings = np.rint((np.random.default_rng(4).standard_normal((400, 50)) + 0.3) / 1.9) * 1.9
    scoring = score(40.0 + readings, [family_named("normal")], shipped_nulls(), 0.05)
    judged_channels = np.array([not reason for reason in scoring.reasons])
    assert 20 < judged_channels.sum() < 200
    assert np.mean(scoring.p[judged_channels, 0] < 0.05) < 0.06 + 3 * np.sqrt(0.05 / judged_channels.sum())


def test_like_conditions_are_simulated_as_one() -> None:
    alike = [near(Condition("normal", (), "filliben", n, 0, high, 0.0, 1.0)) for n, high in ((4000, 400), (4050, 409))]
    assert alike[0] == alike[1]
    assert near(Condition("normal", (), "filliben", 4000, 0, 40, 0.0, 1.0)) != alike[0]


@pytest.mark.parametrize(
    ("name", "make"),
    [
        ("exponential", lambda rng: rng.exponential(size=(300, 400))),
        ("uniform", lambda rng: rng.random((300, 400))),
        ("lognormal", lambda rng: np.exp(0.5 * rng.standard_normal((300, 400)))),
        ("gamma", lambda rng: rng.gamma(3.0, size=(300, 400))),
    ],
)
def test_channels_of_other_families_are_flagged_at_the_rate_when_rounded(name: str, make: object) -> None:
    readings = make(np.random.default_rng(3))  # type: ignore[operator]
    step = 0.2 * readings.std()
    readings = step * np.floor(readings / step) + step / 2.0
    place = [family.name for family in FAMILIES].index(name)
    held = np.full(300, place)
    scoring = score(readings, FAMILIES, shipped_nulls(), 0.05, held=held)
    judged_channels = np.array([not reason for reason in scoring.reasons])
    flagged = scoring.p[judged_channels, place] < 0.05
    # Three standard errors of 300 channels above 6 %; the textbook value flags more.
    assert flagged.mean() < 0.06 + 0.04
    textbook = scoring.fits.r[:, place] < scoring.plain_critical_r[:, place]
    assert textbook.mean() >= flagged.mean()
