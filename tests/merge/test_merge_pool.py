# SPDX-License-Identifier: Apache-2.0
"""Pooling: published values, the mixture against the record's own quantiles, and degenerate input."""

from __future__ import annotations

import numpy as np
import pytest

from chronos_acc.errors import WrongUse
from chronos_acc.merge import RULES, Entries, combine, list_groups, pool
from chronos_acc.merge.pool import central
from chronos_acc.mixture import NORMAL, UNIFORM, summary_of_parts

# Nine results with their variances: Kacker 2004 (Metrologia 41:132).
NINE = np.array([61.0, 61.4, 62.21, 62.3, 62.34, 62.6, 62.7, 62.84, 65.9])
NINE_VARIANCES = np.array([0.2025, 1.21, 0.09, 0.2025, 0.3844, 0.5625, 0.0676, 0.0225, 1.8225])
# Thirteen trials: diseased and not in the treated group, diseased and not in the control group. Colditz et al. 1994 (JAMA 271:698-702).
TRIALS = np.array(
    [
        (4, 119, 11, 128), (6, 300, 29, 274), (3, 228, 11, 209), (62, 13536, 248, 12619), (33, 5036, 47, 5761), (180, 1361, 372, 1079), (8,
        2537, 10, 619), (505, 87886, 499, 87892), (29, 7470, 45, 7232), (17, 1699, 65, 1600), (186, 50448, 141, 27197), (5, 2493, 3, 2338),
        (27, 16886, 29, 17825),
    ],
    dtype=float,
)  # fmt: skip


def test_nine_results_inverse_variance() -> None:
    # Kacker 2004, numbers as computed by the metafor package and quoted in the tests of statsmodels
    found = combine(NINE, NINE_VARIANCES)
    assert found.mean == pytest.approx(62.5833970939982, rel=1e-12)
    assert found.std_error == pytest.approx(0.107845705498231, rel=1e-12)
    assert found.q == pytest.approx(24.801897741835, rel=1e-10)
    assert found.q_p == pytest.approx(0.00167935146, rel=1e-8)
    assert found.i2 == pytest.approx(0.67744403741711, rel=1e-10)
    assert found.h2 == pytest.approx(3.10023721772938, rel=1e-10)
    assert found.birge == pytest.approx(1.7607491, abs=1e-7)  # recomputed, no published figure


def test_nine_results_dersimonian_laird() -> None:
    found = combine(NINE, NINE_VARIANCES, "random_effects")
    assert found.tau2 == pytest.approx(0.288049246973751, rel=1e-9)
    assert found.mean == pytest.approx(62.3901386044504, rel=1e-11)
    assert found.std_error == pytest.approx(0.245749668040304, rel=1e-9)
    assert (found.low, found.high) == (pytest.approx(61.9084781, abs=1e-7), pytest.approx(62.8717991, abs=1e-7))


def test_nine_results_paule_mandel() -> None:
    found = combine(NINE, NINE_VARIANCES, "paule_mandel")
    assert found.tau2 == pytest.approx(0.705395309224248, rel=1e-9)
    assert found.mean == pytest.approx(62.4076199113286, rel=1e-11)
    assert found.std_error == pytest.approx(0.338030602684471, rel=1e-9)
    assert np.sqrt(found.tau2) == pytest.approx(0.8399, abs=5e-5)  # Kacker 2004, table


def test_thirteen_trials() -> None:
    # Colditz et al. 1994, log relative risks; figures as tested in the metafor package
    a, b, c, d = TRIALS.T
    y = np.log(a / (a + b)) - np.log(c / (c + d))
    v = 1 / a - 1 / (a + b) + 1 / c - 1 / (c + d)
    fixed, random = combine(y, v), combine(y, v, "random_effects")
    assert fixed.q == pytest.approx(152.2330, abs=5e-5) and fixed.mean == pytest.approx(-0.4303, abs=5e-5)
    assert random.mean == pytest.approx(-0.7141, abs=5e-5)
    assert (random.low, random.high) == (pytest.approx(-1.0644, abs=5e-5), pytest.approx(-0.3638, abs=5e-5))
    assert random.tau2 == pytest.approx(0.3088, abs=5e-5) and fixed.i2 == pytest.approx(0.9212, abs=5e-5)


def test_one_result_and_equal_results() -> None:
    one = combine([5.0], [4.0], "paule_mandel")
    assert (one.mean, one.std_error, one.tau2) == (5.0, 2.0, 0.0) and np.isnan([one.q, one.i2, one.birge]).all()
    equal = combine([5.0, 5.0], [4.0, 4.0], "random_effects")
    assert equal.q == 0 and equal.i2 == 0 and equal.tau2 == 0


@pytest.mark.parametrize("values, variances", [([], []), ([1.0], [0.0]), ([1.0, 2.0], [1.0]), ([np.nan], [1.0])])
def test_combine_refuses_what_is_no_result(values: list[float], variances: list[float]) -> None:
    with pytest.raises(WrongUse, match="one at least"):
        combine(values, variances)


def entries_of(bounds: list[tuple[float, float, float]], source: list[int], normal: list[bool] | None = None, title: list[str] | None =
None) -> Entries:
    k = len(bounds)
    low, mode, high = np.array(bounds, dtype=float).reshape(-1, 3).T
    names = tuple(f"list {i}" for i in range(max(source, default=0) + 1))
    return Entries(
        np.arange(1, k + 1, dtype=np.int64), np.array(source, dtype=np.int64), names, tuple(title or ["kiln"] * k), low, mode, high,
        np.array(normal or [False] * k, dtype=bool), (None,) * k, 2025.0,
    )  # fmt: skip


def random_entries(seed: int, k: int = 60) -> tuple[Entries, np.ndarray]:
    rng = np.random.default_rng(seed)
    mode = rng.normal(0, 50, k)
    low, high = mode - rng.exponential(20, k), mode + rng.exponential(20, k)
    e = entries_of(list(zip(low, mode, high, strict=True)), list(rng.integers(0, 4, k)), list(rng.random(k) < 0.5))
    return e, np.sort(rng.integers(1, 25, k))


def test_a_single_entry_keeps_its_own_dating() -> None:
    found = pool(entries_of([(10.0, 12.0, 20.0)], [0]), np.array([1]))
    assert (found.earliest[0], found.best[0], found.latest[0], found.unit[0], found.sd[0]) == (10, 12, 20, 10, 0)
    assert found.support[0] == found.entries[0] == 1 and np.isnan(found.q[0]) and not found.disjoint[0]


def test_mixture_summary_is_that_of_the_record() -> None:
    e, milestone = random_entries(1)
    found = pool(e, milestone)
    for j in range(len(found)):
        p = found.owner == j
        best, earliest, latest, unit, sd = summary_of_parts(found.weight[p], found.kind[p], found.low[p], found.mode[p], found.high[p])
        assert np.allclose([found.best[j], found.earliest[j], found.latest[j], found.unit[j], found.sd[j]], [best, earliest, latest, unit,
        sd], rtol=0, atol=1e-8)
        assert found.weight[p].sum() == pytest.approx(1)


def test_mixture_weights_inverse_to_width_unless_disjoint() -> None:
    found = pool(entries_of([(0, 5, 10), (4, 6, 8)], [0, 1]), np.array([1, 1]))
    assert found.weight.tolist() == pytest.approx([4 / 14, 10 / 14]) and not found.disjoint[0]
    apart = pool(entries_of([(0, 5, 10), (20, 21, 22)], [0, 1]), np.array([1, 1]))
    assert apart.weight.tolist() == [0.5, 0.5] and apart.disjoint[0]
    assert apart.earliest[0] < 10 and apart.latest[0] > 20  # two humps stay


@pytest.mark.parametrize("bounds, flag", [([(0, 1, 2), (2, 3, 4)], True), ([(1, 1, 1), (1, 2, 3)], False), ([(1, 1, 1), (1, 1, 1)], False)])
def test_datings_that_touch(bounds: list[tuple[float, float, float]], flag: bool) -> None:
    assert pool(entries_of(bounds, [0, 1]), np.array([1, 1])).disjoint[0] == flag


@pytest.mark.parametrize("rule", ["inverse_variance", "random_effects", "paule_mandel"])
def test_other_rules_agree_with_combine_one_milestone_at_a_time(rule: str) -> None:
    e, milestone = random_entries(2)
    found = pool(e, milestone, rule)
    for j, m in enumerate(found.id):
        group = milestone == m
        width = e.latest[group] - e.earliest[group]
        if group.sum() < 2:
            assert found.best[j] == e.best[group][0]
            continue
        one = combine(e.best[group], np.where(e.normal[group], (width / (2 * 1.959963984540054)) ** 2, width**2 / 12), rule)
        assert (found.best[j], found.earliest[j], found.latest[j]) == (pytest.approx(one.mean), pytest.approx(one.low),
        pytest.approx(one.high))
        assert found.sd[j] == pytest.approx(one.std_error) and found.q[j] == pytest.approx(one.q)
        assert set(found.kind[found.owner == j]) == {NORMAL}


def test_preferred_list_dates_and_names_its_milestones() -> None:
    e = entries_of([(0, 5, 10), (4, 6, 8), (90, 95, 100)], [0, 1, 1], title=["kiln", "the kiln", "loom"])
    found = pool(e, np.array([1, 1, 3]), "preferred", prefer="list 0")
    assert found.best.tolist() == [5, 95] and found.earliest.tolist() == [0, 90] and found.title == ("kiln", "loom")
    assert found.support.tolist() == [2, 1]
    assert pool(e, np.array([1, 1, 3]), prefer="list 1").title == ("the kiln", "loom")


def test_support_counts_lists_with_a_common_ancestor_once() -> None:
    e = entries_of([(0, 1, 2)] * 3, [0, 1, 2])
    assert pool(e, np.array([1, 1, 1])).support[0] == 3
    assert pool(e, np.array([1, 1, 1]), derives={"list 1": "list 0"}).support[0] == 2
    assert pool(e, np.array([1, 1, 1]), derives={"list 1": "an atlas", "list 2": "an atlas"}).support[0] == 2
    assert list_groups(("a", "b", "c"), {"b": "a", "a": "b"}).tolist() == [0, 0, 2]  # a circle is one family


def test_order_of_rows_does_not_matter() -> None:
    e, milestone = random_entries(3)
    order = np.random.default_rng(4).permutation(len(e))
    moved = Entries(
        e.id[order], e.source[order], e.sources, tuple(e.title[i] for i in order), e.earliest[order], e.best[order], e.latest[order],
        e.normal[order], e.category, e.present,
    )  # fmt: skip
    one, two = pool(e, milestone), pool(moved, milestone[order])
    assert np.array_equal(one.best, two.best) and np.array_equal(one.weight, two.weight) and np.array_equal(one.member, order[two.member])


def test_a_change_of_unit_changes_nothing_else() -> None:
    e, milestone = random_entries(5)
    scaled = Entries(e.id, e.source, e.sources, e.title, e.earliest * 1e6, e.best * 1e6, e.latest * 1e6, e.normal, e.category, e.present)
    for rule in ("mixture", "random_effects", "paule_mandel"):
        one, two = pool(e, milestone, rule), pool(scaled, milestone, rule)
        assert np.allclose(one.best * 1e6, two.best, rtol=1e-6, atol=1e-3) and np.allclose(one.q, two.q, equal_nan=True)


@pytest.mark.parametrize("rule", RULES)
def test_no_entries_no_milestones(rule: str) -> None:
    found = pool(entries_of([], []), np.zeros(0, dtype=np.int64), rule, prefer="list 0")
    assert len(found) == 0 and len(found.to_frame()) == 0


def test_datings_of_no_width() -> None:
    for rule in RULES:
        found = pool(entries_of([(5, 5, 5), (5, 5, 5), (-1e10, -1e10, -1e10)], [0, 1, 0]), np.array([1, 1, 3]), rule, prefer="list 0")
        assert np.isfinite(found.best).all() and found.best.tolist() == [5, -1e10]
    assert uniform_kind(pool(entries_of([(5, 5, 5)], [0]), np.array([1])).kind)


def uniform_kind(kind: np.ndarray) -> bool:
    return bool((kind == UNIFORM).all())


def test_wrong_rule_or_list_is_refused() -> None:
    e = entries_of([(0, 1, 2)], [0])
    with pytest.raises(WrongUse, match="mixture, inverse_variance"):
        pool(e, np.array([1]), "median")
    with pytest.raises(WrongUse, match="list 0"):
        pool(e, np.array([1]), prefer="list 9")
    with pytest.raises(WrongUse, match="--prefer"):
        pool(e, np.array([1]), "preferred")


def test_the_most_central_title_names_the_milestone() -> None:
    assert central(["Kiln", "Invention of the kiln", "Invention of the kilns", "Invntion of the kiln"]) == "Invention of the kiln"
    assert central(["Kiln", "Oven"]) == "Kiln"


def test_frame_has_one_row_a_milestone() -> None:
    e, milestone = random_entries(6)
    frame = pool(e, milestone).to_frame()
    assert len(frame) == len(set(milestone)) and list(frame.columns[:3]) == ["milestone", "title", "earliest"]
