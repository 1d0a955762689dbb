# SPDX-License-Identifier: Apache-2.0
"""Many lines at once: agreement with one line at a time, with linear programming, with statsmodels and scipy; ties; turning round."""

from __future__ import annotations

import warnings

import numpy as np
import pytest
import statsmodels.api as sm
from scipy import stats
from scipy.optimize import linprog

from chronos_acc.trend.line_batches import Floats, exponential_slopes, median_lines, ols_slopes, theil_sen_slopes
from chronos_acc.trend.line_estimators import exponential_line, median_line, theil_sen_line


def _lines(r: int, kind: str, size: int = 12) -> tuple[Floats, Floats]:
    rng = np.random.default_rng([r, len(kind)])
    order = np.broadcast_to(np.arange(r, 0, -1, dtype=float), (size, r))
    if kind == "scattered":
        x = np.sort(rng.normal(5, 3, (size, r)))[:, ::-1]
        return x, x + 2 * rng.standard_t(2, (size, r))
    return order, np.log10(rng.integers(1, 8, (size, r)).astype(float)) + (order if kind == "rising" else 0.0)


def _least_cost(x: Floats, y: Floats) -> float:
    """Second implementation: the linear programme of least absolute deviations."""
    n = len(x)
    design = np.column_stack([np.ones(n), x, np.eye(n), -np.eye(n)])
    cost = np.concatenate([[0.0, 0.0], np.ones(2 * n)])
    return float(linprog(cost, A_eq=design, b_eq=y, bounds=[(None, None)] * 2 + [(0, None)] * (2 * n), method="highs").fun)


@pytest.mark.parametrize("kind", ["scattered", "rising", "tied"])
@pytest.mark.parametrize("r", [3, 4, 7, 30, 61])
def test_each_row_is_the_line_of_its_record(r: int, kind: str) -> None:
    x, y = _lines(r, kind)
    slope, r_squared = ols_slopes(x, y)
    theil = theil_sen_slopes(x, y)
    middle, intercept, share = median_lines(x, y)
    waiting = exponential_slopes(x, y)
    for i in range(len(x)):
        plain = stats.linregress(x[i], y[i])
        assert slope[i] == pytest.approx(plain.slope, rel=1e-9, abs=1e-12)
        assert r_squared[i] == pytest.approx(plain.rvalue**2, rel=1e-9, abs=1e-12)
        assert theil[i] == theil_sen_line(x[i], y[i])[0]
        assert (intercept[i], middle[i]) == pytest.approx(median_line(x[i], y[i]), abs=1e-12)
        cost = np.abs(y[i] - intercept[i] - middle[i] * x[i]).sum()
        assert cost == pytest.approx(_least_cost(x[i], y[i]), rel=1e-9, abs=1e-9)
        assert share[i] == pytest.approx(1 - cost / np.abs(y[i] - np.median(y[i])).sum(), abs=1e-12)
        assert waiting[i] == pytest.approx(exponential_line(x[i], y[i])[0][1], abs=1e-12)


def test_a_unique_median_line_is_that_of_linear_programming() -> None:
    x, y = _lines(40, "scattered")
    slope, intercept, _ = median_lines(x, y)
    for i in range(4):
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            other = sm.QuantReg(y[i], sm.add_constant(x[i])).fit(q=0.5, p_tol=1e-10, max_iter=5000)
        assert (intercept[i], slope[i]) == pytest.approx(tuple(other.params), abs=1e-4)


def test_among_several_best_lines_the_middle_one_which_turns_with_the_order() -> None:
    x = np.array([[1.0, 2.0, 3.0, 4.0]])
    y = np.array([[0.0, 1.0, 0.0, 1.0]])
    (slope,), (intercept,), _ = median_lines(x, y)
    grid = np.linspace(-2, 2, 4001)
    costs = np.array([np.abs(y[0] - b * x[0] - np.median(y[0] - b * x[0])).sum() for b in grid])
    best = grid[costs <= costs.min() + 1e-9]
    assert slope == pytest.approx((best[0] + best[-1]) / 2, abs=1e-3)
    for kind in ("scattered", "rising", "tied"):
        x, y = _lines(20, kind)
        assert median_lines(-x, y)[0] == pytest.approx(-median_lines(x, y)[0], abs=1e-10)


def test_lines_that_do_not_exist_or_fit_exactly() -> None:
    same = np.ones((2, 5))
    y = np.arange(10.0).reshape(2, 5)
    for slopes in (median_lines(same, y)[0], exponential_slopes(same, y), theil_sen_slopes(same, y)):
        assert np.isnan(slopes).all()
    x = np.broadcast_to(np.arange(5.0), (2, 5))
    slope, intercept, share = median_lines(x, 3 - 2 * x)
    assert slope == pytest.approx(-2) and intercept == pytest.approx(3) and share == pytest.approx(1)
    assert exponential_slopes(x, 3 - 2 * x) == pytest.approx(-2)
    some = np.array([[1.0, 1.0, 2.0, 3.0]])  # a pair at one x has no slope
    assert theil_sen_slopes(some, np.array([[0.0, 5.0, 1.0, 2.0]]))[0] == pytest.approx(stats.theilslopes([0, 5, 1, 2], [1, 1, 2, 3])[0])
