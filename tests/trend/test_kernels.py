# SPDX-License-Identifier: Apache-2.0
"""The vectorised statistics against slow second implementations."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import optimize, stats

from chronos_acc.trend import kernels


def slow_reversals(gaps: np.ndarray, ties: float) -> float:
    return sum((gaps[j] > gaps[i]) + ties * (gaps[j] == gaps[i]) for i in range(len(gaps)) for j in range(i + 1, len(gaps)))


@given(st.lists(st.integers(0, 6), min_size=2, max_size=30), st.sampled_from([0.0, 0.5, 1.0]))
@settings(max_examples=60, deadline=None)
def test_reversals_against_the_double_loop(gaps: list[int], ties: float) -> None:
    row = np.array(gaps, dtype=float)
    assert kernels.reversals(row, ties) == slow_reversals(row, ties)


def test_reversals_of_a_long_row_and_kendalls_s() -> None:
    rng = np.random.default_rng(1)
    row = rng.integers(0, 900, 2600).astype(float)
    blocked, direct = float(kernels.reversals(row)), float(kernels.reversals(row[None, :])[0])
    assert blocked == direct
    short = rng.random(40)
    tau = stats.kendalltau(np.arange(40), short).statistic  # S = 2R - r(r - 1)/2
    assert 2 * kernels.reversals(short) - 780 == pytest.approx(tau * 780)


def test_anderson_darling_against_the_textbook_sum() -> None:
    rng = np.random.default_rng(2)
    u = np.sort(rng.random(17))
    n = len(u)
    slow = -n - sum((2 * i + 1) * (np.log(u[i]) + np.log(1 - u[n - 1 - i])) for i in range(n)) / n
    assert kernels.anderson_darling(u) == pytest.approx(slow, rel=1e-13)
    assert kernels.anderson_darling(u, 1 - u) == pytest.approx(slow, rel=1e-13)


def test_anderson_darling_keeps_digits_at_the_young_end() -> None:
    ages = np.array([3e-17, 1e-17])
    assert np.isfinite(kernels.anderson_darling(1 - ages, ages))


def test_laplace_and_military_handbook() -> None:
    rng = np.random.default_rng(3)
    u = rng.random((5, 12))
    assert kernels.laplace(u) == pytest.approx((u.sum(axis=1) - 6) / np.sqrt(12 / 12))
    assert kernels.mil_hdbk_189(u) == pytest.approx([2 * sum(np.log(1 / x) for x in row) for row in u])
    assert kernels.kolmogorov_smirnov(np.sort(u, axis=1)) == pytest.approx([stats.kstest(row, "uniform").statistic for row in u])


@pytest.mark.parametrize("mean", [1e-12, 1e-6, 0.01, 0.19, 0.21, 0.4, 0.4999999, 0.5, 0.5000001, 0.77, 0.999])
def test_growth_of_mean_age_solves_its_equation(mean: float) -> None:
    k = float(kernels.growth_of_mean_age(np.array(mean)))
    back = 0.5 - k / 12 if abs(k) < 1e-4 else 1 / k - 1 / np.expm1(k) if k < 700 else 1 / k
    assert back == pytest.approx(mean, rel=1e-9)


def test_growth_of_mean_age_against_a_bracketed_root() -> None:
    for mean in (0.05, 0.3, 0.45, 0.6, 0.9):
        root = optimize.brentq(
            lambda k, m=mean: 1 / k - 1 / np.expm1(k) - m, *((1e-6, 500) if mean < 0.5 else (-500, -1e-6)), xtol=1e-13
        )
        assert kernels.growth_of_mean_age(np.array(mean)) == pytest.approx(root, rel=1e-10)


def test_log_log_against_least_squares_with_and_without_a_mask() -> None:
    rng = np.random.default_rng(4)
    ages, gaps = rng.lognormal(4, 2, (3, 20)), rng.lognormal(1, 1, (3, 20))
    gaps[1, 4] = 0.0
    slope, intercept, r2 = kernels.log_log(ages, gaps)
    for i in range(3):
        keep = gaps[i] > 0
        fit = stats.linregress(np.log10(ages[i][keep]), np.log10(gaps[i][keep]))
        assert (slope[i], intercept[i], r2[i]) == pytest.approx((fit.slope, fit.intercept, fit.rvalue**2), rel=1e-10)
