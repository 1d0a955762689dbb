# SPDX-License-Identifier: Apache-2.0
"""The five tests on one window: exact laws, ties, adjustment, properties, degenerate records, and error rates."""

from __future__ import annotations

from itertools import permutations
from math import factorial

import numpy as np
import pytest

from chronos_acc.record import Record
from chronos_acc.trend import kernels
from chronos_acc.trend.exact_laws import reversal_tails
from chronos_acc.trend.multiplicity import monte_carlo_p, null_p, step_down_min_p
from chronos_acc.trend.positions import positions
from chronos_acc.trend.trend_tests import RENEWAL, STEADY, TestsResult, laplace_p, run_tests
from tests.simulate import size


def run(
    dates: np.ndarray | list[float], *, present: float, start: float | None = None, unit: float = 0.0, **more: object
) -> TestsResult:
    return run_tests(Record.from_dates(dates, present=present, start=start, unit=unit).window, seed=3, **more)  # type: ignore[arg-type]


def same(a: TestsResult, b: TestsResult, rel: float = 1e-9) -> None:
    for x, y in zip(a.rows, b.rows, strict=True):
        assert (x.test, x.direction) == (y.test, y.direction)
        for name in ("statistic", "z", "p_value", "p_exact", "p_adjusted", "p_holm"):
            left, right = getattr(x, name), getattr(y, name)
            assert (left is None and right is None) or left == pytest.approx(right, rel=rel)


def test_order_of_rows_unit_of_time_and_origin_make_no_difference() -> None:
    rng = np.random.default_rng(1)
    dates = 1000 + 500 * rng.random(25)
    base = run(dates, present=1520, start=990)
    same(base, run(rng.permutation(dates), present=1520, start=990))
    same(base, run(dates * 365.25, present=1520 * 365.25, start=990 * 365.25))
    same(base, run(dates - 1520, present=0, start=-530))


def test_looking_backwards_turns_directions_and_keeps_p() -> None:
    rng = np.random.default_rng(2)
    dates = 100 * rng.beta(2, 1, 30)
    forth, back = run(dates, present=100, start=0), run(100 - dates, present=100, start=0)
    for name in ("laplace", "lewis_robinson"):
        assert forth.row(name).direction == "speeding" and back.row(name).direction == "slowing"
        assert forth.row(name).statistic == pytest.approx(-back.row(name).statistic)
    assert forth.row("anderson_darling").statistic == pytest.approx(back.row("anderson_darling").statistic)


def test_signs_and_directions_of_a_record_that_speeds_up() -> None:
    result = run(100 * np.linspace(0.02, 0.98, 40) ** 0.4, present=100, start=0)
    assert [r.direction for r in result.rows] == ["speeding", "speeding", "none", "speeding", "speeding"]
    signs = [r.z for r in result.rows]
    assert signs[0] > 0 and signs[1] < 0 and signs[2] is None and signs[3] < 0 and signs[4] > 0
    assert all(r.p_exact < 0.01 for r in result.rows)
    assert [r.null for r in result.rows] == ["steady"] * 3 + ["renewal"] * 2
    assert all(r.sensitive_to for r in result.rows)
    frame = result.to_frame()
    assert list(frame["test"]) == [*STEADY, *RENEWAL] and frame["z"].isna().sum() == 1


def test_the_exact_p_of_laplace_against_the_law_of_a_sum_of_uniforms() -> None:
    n, u = 6, 1.4
    mean = 0.5 + u / np.sqrt(12 * n)
    total = mean * n  # Irwin-Hall law
    below = sum((-1) ** k * (total - k) ** n / (factorial(k) * factorial(n - k)) for k in range(int(total) + 1))
    assert laplace_p(np.array(u), n, seed=5, replicates=19_999) == pytest.approx(2 * (1 - below), abs=0.006)


def test_the_exact_p_of_the_military_handbook_is_chi_square() -> None:
    row = run([3, 8, 20, 44, 60, 81], present=100, start=0, replicates=9999).row("mil_hdbk_189")
    assert row.p_exact == pytest.approx(row.p_value, abs=0.012)


def test_lewis_robinson_against_all_permutations() -> None:
    dates = np.array([10.0, 12.0, 19.0, 30.0, 62.0, 64.5])
    row = run(dates, present=100, start=0, replicates=9999).row("lewis_robinson")
    gaps = np.diff(dates)
    laws = []
    for order in permutations(gaps):
        times = np.concatenate([[10.0], 10.0 + np.cumsum(order)])
        laws.append(np.sqrt(12 * 6) * (times.mean() / 100 - 0.5) / gaps.std(ddof=1) * gaps.mean())
    laws = np.array(laws)
    assert row.statistic == pytest.approx(laws[0])
    exact = 2 * min((laws >= laws[0] - 1e-12).mean(), (laws <= laws[0] + 1e-12).mean())
    assert row.p_exact == pytest.approx(exact, abs=0.015)


def test_the_residual_first_interval_and_the_open_last_one_are_never_permuted() -> None:
    # equal closed intervals: nothing to permute, whatever the residual and open ones are
    result = run([60, 70, 80, 90], present=200, start=0)
    assert result.row("lewis_robinson").statistic is None and result.intervals == 3
    assert any("unequal" in note for note in result.notes)
    opened = run([0, 60, 70, 80, 90], present=200)
    assert opened.intervals == 4 and opened.n == 4 and opened.row("lewis_robinson").statistic is not None
    assert run([60, 70, 80, 90], present=200, start=0, renewal_at_start=True).intervals == 4
    same(run([0, 60, 70, 80, 90], present=200), run([60, 70, 80, 90], present=200, start=0, renewal_at_start=True))


def test_an_event_at_the_present_closes_the_window_and_is_not_counted() -> None:
    result = run([5, 20, 50, 80, 100], present=100, start=0)
    assert (result.n, result.intervals) == (4, 4)
    assert result.row("laplace").statistic == pytest.approx(kernels.laplace(np.array([0.05, 0.2, 0.5, 0.8])))


def test_milestones_in_the_instant_of_the_opener_join_it() -> None:
    result = run([0, 0, 0, 20, 50, 80], present=100)
    assert (result.n, result.intervals) == (3, 3)


def test_reversals_without_ties_use_the_mahonian_law_and_with_ties_a_permutation() -> None:
    gaps = np.array([9.0, 8.5, 7.0, 5.0, 6.0, 3.0, 2.0, 1.0, 0.5])
    row = run(np.concatenate([[0], np.cumsum(gaps)]), present=50).row("reverse_arrangements")
    assert row.statistic == 1 and row.p_exact == pytest.approx(2 * reversal_tails(1, 9)[1])
    tied = np.array([3.0, 3.0, 2.0, 2.0, 1.0])
    tenths = 2000 + np.cumsum([0.3, 0.1, 0.1, 0.2, 0.1])  # equal but for rounding
    assert run(tenths, present=2002, start=2000).row("reverse_arrangements").statistic == 3.5
    row = run(np.concatenate([[0], np.cumsum(tied)]), present=20, replicates=19_999).row("reverse_arrangements")
    law = np.array([kernels.reversals(np.array(order)) for order in permutations(tied)])
    assert row.statistic == 1.0
    assert row.p_exact == pytest.approx(2 * (law <= 1.0).mean(), abs=0.01)


def test_long_records_agree_with_short_ones_in_law() -> None:
    rng = np.random.default_rng(4)
    times = np.sort(rng.random(700) ** 0.93)
    row = run(times, present=1, start=0).row("reverse_arrangements")
    assert row.p_exact == pytest.approx(row.p_value, rel=1e-9)
    tied = np.floor(np.sort(rng.random(300)) * 400)
    row = run(tied, present=400, start=-1, unit=1.0).row("reverse_arrangements")
    assert row.p_exact == pytest.approx(row.p_value, abs=0.06)


def test_below_five_intervals_reversals_cannot_reject_and_say_so() -> None:
    result = run([0, 40, 60, 70, 75], present=76)
    assert result.row("reverse_arrangements").p_exact == pytest.approx(2 / 24)
    assert any("below five" in note for note in result.notes)


@pytest.mark.parametrize("dates", [[], [50.0], [30.0, 60.0], [50.0, 50.0, 50.0], [20.0, 50.0, 50.0, 50.0]])
def test_small_and_degenerate_records_have_an_answer(dates: list[float]) -> None:
    for start in (None, 0.0):
        result = run(dates, present=100, start=start)
        assert [r.test for r in result.rows] == [*STEADY, *RENEWAL]
        for row in result.rows:
            for value in (row.p_value, row.p_exact, row.p_adjusted, row.p_holm):
                assert value is None or 0 < value <= 1
        if result.n == 0:
            assert result.notes and all(r.statistic is None for r in result.rows)
    assert run([7.0, 7.0, 7.0], present=7.0).n == 0  # a window of no length


def test_a_vast_window_with_all_events_at_its_young_end() -> None:
    rng = np.random.default_rng(6)
    dates = 2025 - np.concatenate([[1e10], 1e6 * rng.random(60)])
    result = run(dates, present=2025)
    ages = (2025 - np.sort(dates)[1:]) / 1e10
    assert result.row("laplace").statistic == pytest.approx(np.sqrt(12 * 60) * (0.5 - ages.mean()), rel=1e-12)
    assert result.row("mil_hdbk_189").statistic == pytest.approx(-2 * np.log1p(-ages).sum(), rel=1e-6)
    assert result.row("laplace").p_exact <= 0.001 and result.row("anderson_darling").p_value > 0


def test_equal_dates_stand_at_mid_ranks_within_their_dating() -> None:
    window = Record.from_dates([0, 10.5, 10.5, 10.5, 10.5, 30.5, 99.5], present=100, unit=1.0).window
    at = positions(window)
    assert 100 * at.x == pytest.approx([10.125, 10.375, 10.625, 10.875, 30.5, 99.5])
    assert at.x + at.v == pytest.approx(np.ones(6))
    assert at.intervals.tolist() == [10.5, 0, 0, 0, 20, 69]
    # a wide dating is narrowed to stay inside, and the mean never moves
    wide = positions(Record.from_dates([3.0, 3.0, 50.0], present=100, start=0, unit=40.0).window)
    assert 100 * wide.x == pytest.approx([1.5, 4.5, 50.0])
    assert positions(Record.from_dates([3.0, 3.0], present=100, start=0).window).x.tolist() == [0.03, 0.03]


def test_a_steady_list_dated_to_the_year_is_not_called_speeding() -> None:
    found = size.dated_to_the_year(300, np.random.default_rng(9))
    assert found["strict"] > 0.97 and found["half"] < 0.05


def test_step_down_by_hand_and_its_order() -> None:
    null = np.array([[0.2, 0.9], [0.5, 0.04], [0.8, 0.3], [0.03, 0.6]])
    # the smaller, .05: minima .2 .04 .3 .03, two at or below; then .4 against the other column alone: .2 and .03
    assert step_down_min_p(np.array([0.4, 0.05]), null) == pytest.approx([0.6, 0.6])
    assert step_down_min_p(np.array([0.01, 0.02]), null) == pytest.approx([0.2, 0.2])
    draws = np.random.default_rng(1).normal(size=199)
    pooled = null_p(draws, 0.3)
    rest = np.append(np.delete(draws, 17), 0.3)
    assert pooled[17] == pytest.approx(monte_carlo_p(draws[17], rest))


def test_adjusted_values_never_undercut_the_exact_ones_and_the_renewal_family_waits() -> None:
    rng = np.random.default_rng(12)
    for _ in range(20):
        result = run(rng.random(15), present=1, start=0, replicates=199)
        gate = min(result.row(t).p_adjusted for t in STEADY)
        for row in result.rows:
            assert row.p_adjusted >= row.p_exact - 1e-12 and row.p_holm >= row.p_exact - 1e-12
            assert row.p_adjusted <= row.p_holm + 0.03
            if row.test in RENEWAL:
                assert row.p_adjusted >= gate


@pytest.mark.parametrize("n", [10, 30, 100])
def test_error_rates_of_exact_tests_on_steady_records(n: int) -> None:
    for name, share in size.steady_sizes(n, 20_000, np.random.default_rng(100 + n)).items():
        assert 0.04 <= share <= 0.06, (name, share)


@pytest.mark.parametrize("spacing", ["clustered: gamma 1/2 (CV² 2)", "regular: gamma 4 (CV² 1/4)"])
def test_error_rate_of_lewis_robinson_on_uneven_steady_records(spacing: str) -> None:
    by_permutation, _ = size.lewis_robinson_size(spacing, 15, 1500, np.random.default_rng(31), replicates=199)
    assert 0.035 <= by_permutation <= 0.065


def test_same_seed_same_numbers() -> None:
    dates = np.random.default_rng(3).random(20)
    assert run(dates, present=1, start=0) == run(dates, present=1, start=0)
