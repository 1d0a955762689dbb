# SPDX-License-Identifier: Apache-2.0
"""The grid's kernels against plain loops, and the variance shares against closed forms."""

from itertools import combinations, product

import numpy as np
import pytest
from scipy.stats import norm

from chronos_acc.bias.grid.kernels import Frame, Spec, growth_and_z, mid_rank_z, slopes
from chronos_acc.bias.grid.variance import shares
from chronos_acc.bias.growth import growth
from chronos_acc.record import Record


def loop(times, start, present, floor, spec):
    """One row, the slow and obvious way."""
    t = list(times)
    p = t[-1] if present is None else present
    s = t[0] if start is None else start
    if spec.counted and present is not None:
        t = [*t, p]
    x, y = [], []
    for a, b in zip(t[:-1], t[1:], strict=True):
        gap = b - a
        if spec.joined and gap < floor:
            continue
        y.append(np.log10(max(gap, floor)))
        x.append(
            {"log10_age": np.log10(max(p - a, floor)), "log10_time": -np.log10(b - s) if b > s else 300.0, "order": None}[spec.predictor]
        )
    if spec.predictor == "order":
        x = list(range(len(y), 0, -1))
    if spec.estimator == "ols":
        return np.polyfit(x, y, 1)[0]
    if spec.estimator == "theil_sen":
        pairs = list(combinations(range(len(x)), 2))
    else:
        h = (len(x) + 1) // 2
        pairs = [(i, i + h) for i in range(len(x) - h)]
    found = [(y[j] - y[i]) / (x[j] - x[i]) for i, j in pairs if x[j] != x[i]]
    return np.median(found)


SPECS = [
    Spec(counted, joined, predictor, estimator)
    for counted, joined, predictor, estimator in product(
        (False, True), (False, True), ("log10_age", "order", "log10_time"), ("ols", "theil_pairs", "theil_sen")
    )
]


@pytest.mark.parametrize("start", [None, 900.0])
@pytest.mark.parametrize("present", [None, 2000.0])
def test_slopes_against_a_loop(start, present):
    times = np.sort(1000.0 + 990.0 * np.random.default_rng(3).random((6, 24)), axis=1)
    found, kept = slopes(times, Frame(start, present, int(start is None), int(present is None), 0.001), SPECS)
    for spec, values in zip(SPECS, found, strict=True):
        assert values == pytest.approx([loop(row, start, present, 0.001, spec) for row in times], rel=1e-9), spec
    assert (kept[False, True] == 23).all()


@pytest.mark.parametrize("spec", [s for s in SPECS if s.estimator != "theil_pairs" and s.predictor != "log10_time"])
def test_short_intervals_against_a_loop(spec):
    """Ties: joined or floored. (Theil's halves are paired by place, so joined intervals are left out of pairs.)"""
    times = np.sort(np.round(1500.0 + 480.0 * np.random.default_rng(4).random((5, 40)), -1), axis=1)
    found, kept = slopes(times, Frame(None, 2000.0, 1, 0, 5.0), [spec])
    assert found[0] == pytest.approx([loop(row, None, 2000.0, 5.0, spec) for row in times], rel=1e-9)
    if spec.joined:
        assert kept[spec.counted, True].max() < 39


def test_rates_are_those_of_the_window():
    rng = np.random.default_rng(5)
    dates = np.sort(1000.0 + 1000.0 * rng.random(30))
    for start in (None, 900.0):
        window = Record.from_dates(dates, present=2000.0, start=start).window
        value, z, n = growth_and_z(dates[None], Frame(start, 2000.0, window.opening, 0, 0.1))
        exact = growth(window)
        assert n == exact.n and value[0] == pytest.approx(exact.estimate, rel=1e-9)
        assert 2 * norm.sf(abs(z[0])) == pytest.approx(exact.p_value, rel=1e-6)
    closed = Record.from_dates(dates, present=dates[-1]).window
    value, _, n = growth_and_z(dates[None], Frame(None, None, 1, 0, 0.1))
    assert n == closed.n and value[0] == pytest.approx(growth(closed).estimate, rel=1e-9)


@pytest.mark.parametrize("n", [5, 40])
def test_z_of_many_rows_is_that_of_each(n):
    rows = np.sort(np.random.default_rng(n).random((400, n)) ** 1.3, axis=1)
    frame = Frame(0.0, 1.0, 0, 0, 1e-9)
    each = np.concatenate([growth_and_z(row[None], frame)[1] for row in rows])
    assert growth_and_z(rows, frame)[1] == pytest.approx(each, abs=2e-3)


def test_mid_rank_z():
    null = np.arange(1.0, 10.0)
    assert mid_rank_z(np.array([5.0]), null)[0] == pytest.approx(0.0, abs=1e-12)
    assert mid_rank_z(np.array([100.0, -1.0]), null) == pytest.approx([norm.ppf(0.95), norm.ppf(0.05)])
    assert np.isnan(mid_rank_z(np.array([np.nan]), null)[0]) and np.isnan(mid_rank_z(np.array([1.0]), np.array([np.nan]))[0])


def test_variance_over_a_full_factorial():
    """z = 3a + b + 2ab with a, b of -1 and 1: variances 9, 1, 4."""
    cells = np.array(list(product((0, 1), (0, 1), (0, 1))))
    a, b = 2.0 * cells[:, 0] - 1, 2.0 * cells[:, 1] - 1
    found = {s.choice: s for s in shares({"a": cells[:, 0], "b": cells[:, 1], "c": cells[:, 2]}, 3 * a + b + 2 * a * b)}
    assert found["a"].first_order == pytest.approx(9 / 14) and found["a"].total == pytest.approx(13 / 14)
    assert found["b"].first_order == pytest.approx(1 / 14) and found["b"].total == pytest.approx(5 / 14)
    assert found["c"].total == pytest.approx(0.0, abs=1e-12) and found["a"].method == "full factorial"


def test_variance_with_missing_cells_against_statsmodels():
    import pandas as pd
    import statsmodels.formula.api as smf
    from statsmodels.stats.anova import anova_lm

    rng = np.random.default_rng(6)
    cells = np.array(list(product(range(3), range(2), range(4))))[rng.random(24) < 0.8]
    z = cells @ np.array([1.0, -0.5, 0.3]) + rng.normal(size=len(cells))
    found = {s.choice: s for s in shares({k: cells[:, i] for i, k in enumerate("abc")}, z)}
    table = anova_lm(smf.ols("z ~ C(a) + C(b) + C(c)", pd.DataFrame(cells, columns=list("abc")).assign(z=z)).fit(), typ=2)
    for k in "abc":
        assert found[k].first_order == pytest.approx(table.loc[f"C({k})", "sum_sq"] / ((z - z.mean()) ** 2).sum(), rel=1e-9)
        assert found[k].total is None and found[k].method.startswith("Type II")


def test_nothing_varies():
    assert shares({"a": np.array([0, 1])}, np.array([1.0, 1.0])) == ()
    assert shares({"a": np.array([0, 0])}, np.array([1.0, 2.0])) == ()
