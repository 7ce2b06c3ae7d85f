"""The null table: p and critical value are one table read both ways, smooth in n and true between its nodes."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from screener.stats.families import FAMILIES, family_named
from screener.stats.null.grid import node_from_samples
from screener.stats.null.packing import packed, plain_families, shipped_nulls, tasks, unpacked
from screener.stats.null.simulate import simulated_log_gap, sorted_uniforms
from screener.stats.null.table import interpolation

ROW = np.array([0])


@given(
    st.sampled_from([family.null_name for family in FAMILIES if not family.shape_count]),
    st.integers(3, 2_000_000),
    st.floats(1e-9, 0.999),
    st.floats(0.0, 1.0),
)
def test_p_is_below_alpha_exactly_where_r_is_below_critical(family: str, n: int, alpha: float, r: float) -> None:
    rows = shipped_nulls().plain.rows(family, np.array([n]))
    critical = rows.critical(alpha)[0]
    tried = np.array([r, critical, np.nextafter(critical, 0.0), np.nextafter(critical, 1.0)])
    p = rows.p_against(tried, np.zeros(4, dtype=np.int64), alpha)
    assert np.array_equal(p < alpha, tried < critical)
    assert np.all((p > 0.0) & (p < 1.0))


@pytest.mark.parametrize("n", [3, 10, 57, 1000, 30_000, 1_000_000])
def test_p_rises_with_r_and_reads_back_the_critical_value(n: int) -> None:
    for family in plain_families():
        rows = shipped_nulls().plain.rows(family.name, np.array([n]))
        r = 1.0 - np.logspace(0, -9, 2001)
        p = rows.p(r, np.zeros(r.size, dtype=np.int64))
        assert np.all(np.diff(p) >= -1e-15)
        for alpha in (1e-7, 1e-4, 0.01, 0.05, 0.3):
            assert rows.p(rows.critical(alpha), ROW)[0] == pytest.approx(alpha, rel=1e-6)


@pytest.mark.parametrize("n", [24, 65, 300, 860, 6400])
def test_between_its_nodes_the_table_agrees_with_a_simulation_at_that_n(n: int) -> None:
    samples = max(4000, 20_000_000 // n // 10)
    gaps = simulated_log_gap(plain_families(), n, "filliben", samples, np.random.default_rng(11))
    for family, gap in zip(plain_families(), gaps, strict=True):
        for alpha in (0.01, 0.05, 0.5):
            share = np.mean(-np.expm1(gap) < shipped_nulls().plain.critical(family.name, n, alpha))
            assert share == pytest.approx(alpha, abs=4.5 * np.sqrt(alpha * (1 - alpha) / samples))


def test_the_samples_of_every_node_hold_the_stated_monte_carlo_error() -> None:
    table = shipped_nulls().plain
    assert np.all(100.0 * np.sqrt(0.05 * 0.95 / table.samples) <= 0.1)
    assert table.sizes[0] == 3
    assert table.sizes[-1] == 100_000


def test_parts_of_a_build_make_a_table_that_is_read_back() -> None:
    wanted = tasks("hazen", 1, 1e-9, largest=4)
    parts = {key: task.make() for key, task in wanted.items() if int(key.split("/")[1]) < 15}
    nulls = unpacked(packed(parts, "hazen"))
    assert nulls.rule == "hazen"
    assert nulls.plain.sizes.tolist() == [3, 4, 5, 6]
    assert set(nulls.shaped) == {family.name for family in FAMILIES if family.shape_count}
    exact = parts["plain/5"]["log_gap"]
    assert nulls.plain.log_gap[:, 2] == pytest.approx(exact.astype(np.float64), rel=1e-6)


def test_a_node_is_monotone_and_its_fitted_tail_joins_it() -> None:
    gaps = simulated_log_gap([family_named("normal")], 20, "filliben", 50_000, np.random.default_rng(1))
    node = node_from_samples(gaps)
    assert np.all(np.diff(node.log_gap) <= 0.0)
    assert node.floor == pytest.approx(5e-4)
    assert node.tail_scale[0] > 0.0


def test_interpolation_repeats_the_nodes_and_any_cubic() -> None:
    sizes = shipped_nulls().plain.sizes
    assert interpolation(sizes, sizes) == pytest.approx(np.eye(sizes.size), abs=1e-12)
    at = np.array([23, 111, 8888, 77_777])
    at_nodes, wanted = (np.log(n) ** 3 - 2.0 * np.log(n) for n in (sizes, at))
    assert interpolation(sizes, at) @ at_nodes == pytest.approx(wanted, rel=1e-12)


def test_sorted_uniforms_are_sorted_and_uniform() -> None:
    u = sorted_uniforms(np.random.default_rng(2), 20_000, 9)
    assert np.all(np.diff(u, axis=1) > 0)
    # The k-th of 9 has the Beta(k, 10 - k) distribution, with mean k / 10.
    assert u.mean(axis=0) == pytest.approx(np.arange(1, 10) / 10, abs=0.005)
