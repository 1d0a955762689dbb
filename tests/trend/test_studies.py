# SPDX-License-Identifier: Apache-2.0
"""Lists as studies: pooling against published values, label exchange, and the common window."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy import stats

from chronos_acc.errors import WrongUse
from chronos_acc.record import Record
from chronos_acc.trend.meta import FUNNEL_FROM, paule_mandel, pooled
from chronos_acc.trend.regressions import regress
from chronos_acc.trend.studies import _equal, exchanged, lists_as_studies

# Kacker 2004, Metrologia 41:132
VALUES = np.array([61.0, 61.4, 62.21, 62.3, 62.34, 62.6, 62.7, 62.84, 65.9])
VARIANCES = np.array([0.2025, 1.21, 0.09, 0.2025, 0.3844, 0.5625, 0.0676, 0.0225, 1.8225])


def _record(seed: int, growth: tuple[float, ...] = (0.0, 0.0, 0.0), size: int = 120) -> Record:
    """Each list names a steady event of the window with a chance that tilts by its own growth."""
    rng = np.random.default_rng(seed)
    x = np.sort(rng.random(size))
    chance = np.column_stack([0.55 * np.exp(g * (x - 1)) for g in growth])
    named = rng.random(chance.shape) < chance
    seen = named.any(axis=1)
    return Record.from_dates(1000 + 1000 * x[seen], present=2000, start=1000, mentions=named[seen])


def test_paule_mandel_and_heterogeneity() -> None:
    result = pooled(VALUES, np.sqrt(VARIANCES))
    assert paule_mandel(VALUES, VARIANCES) == pytest.approx(0.705395309224248, rel=1e-9)
    assert result.mean == pytest.approx(62.4076199113286, rel=1e-11)
    assert result.q == pytest.approx(24.801897741835, rel=1e-10)
    assert result.q_p == pytest.approx(0.00167935146, rel=1e-7)
    assert result.i2 == pytest.approx(0.67744403741711, rel=1e-10)
    assert result.prediction_low is not None and result.prediction_low < result.low
    assert result.funnel_p is None


def test_hartung_knapp_by_hand() -> None:
    result = pooled(VALUES, np.sqrt(VARIANCES))
    w = 1 / (VARIANCES + result.tau2)
    mean = (w * VALUES).sum() / w.sum()
    error = np.sqrt((w * (VALUES - mean) ** 2).sum() / 8 / w.sum())
    assert (result.low, result.high) == pytest.approx(stats.t.interval(0.95, 8, mean, error), rel=1e-10)
    alike = pooled(np.array([1.0, 1.1]), np.array([0.5, 0.5]))
    assert alike.tau2 == 0 and alike.i2 == 0 and alike.prediction_low is None
    with pytest.raises(WrongUse):
        pooled(np.array([1.0]), np.array([1.0]))


def test_funnel_from_ten_studies() -> None:
    rng = np.random.default_rng(1)
    errors = rng.uniform(0.1, 1, FUNNEL_FROM + 5)
    biased = pooled(3 * errors + 0.05 * rng.normal(size=len(errors)), errors)
    assert biased.funnel_p is not None and biased.funnel_p < 0.001
    fit = stats.linregress(1 / errors, (3 * errors) / errors + rng.normal(size=len(errors)))
    assert np.isfinite(fit.slope)


def test_exchange_keeps_both_margins() -> None:
    named = _record(1).mentions
    mixed = exchanged(named, np.random.default_rng(1), 50)
    assert (mixed.sum(axis=1) == named.sum(axis=0)).all()
    assert (mixed.sum(axis=2) == named.sum(axis=1)).all()
    assert (mixed != named).any(axis=(1, 2)).all()


def test_rows_are_those_of_each_list_alone() -> None:
    record = _record(2)
    result = lists_as_studies(record, seed=1, replicates=99)
    assert [r.list for r in result.rows] == list(record.lists)
    assert result.start is not None and result.present is not None and result.start >= 1000
    for row in result.rows:
        window = record.only(sources=[row.list], start=result.start, present=result.present).window
        line = regress(window, predictors=("log10_age",), estimators=("ols_hc3",)).row()
        assert row.n == window.n and line is not None and row.slope == line.slope
        assert row.growth_low is not None and row.growth is not None and row.growth_high is not None
        assert row.growth_low < row.growth < row.growth_high
    assert [p.statistic for p in result.pooled] == ["growth", "slope", "age_exponent"]
    assert result.to_frame().shape[0] == 3 and result.pooled_frame().shape[0] == 3


def test_the_common_window_ends_with_the_earliest_compile_year() -> None:
    record = replace(_record(3), compiled=np.array([1900.0, 1950.0, np.nan]))
    result = lists_as_studies(record, seed=1, replicates=19)
    assert result.present == 1901.0
    firsts = [record.best[record.mentions[:, j]].min() for j in range(3)]
    assert result.start == max(firsts)


def test_equal_lists_are_rejected_at_the_level_and_unequal_ones_found() -> None:
    def p(record: Record, seed: int) -> dict[str, float]:
        return _equal(record.window, record.mentions, seed, 99)

    equal = [p(_record(100 + s), s) for s in range(40)]
    for statistic in ("growth", "slope", "age_exponent"):
        assert sum(e[statistic] <= 0.05 for e in equal) <= 6, statistic  # 40 at 5 %: 2 expected
    unequal = [p(_record(s, (0.0, 3.0, 0.0), size=300), s) for s in range(5)]
    assert all(e["growth"] <= 0.05 for e in unequal)


def test_one_list_or_small_ones_say_so() -> None:
    alone = Record.from_dates(np.arange(20.0), present=21)
    assert lists_as_studies(alone, seed=1) == lists_as_studies(alone, seed=2)
    assert lists_as_studies(alone, seed=1).rows == ()
    small = _record(4, size=12)
    result = lists_as_studies(small, seed=1)
    assert result.pooled == () and result.notes
    family = replace(_record(5), group=np.zeros(3, dtype=np.int64))
    assert lists_as_studies(family, seed=1).rows == ()
