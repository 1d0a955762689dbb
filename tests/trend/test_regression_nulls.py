# SPDX-License-Identifier: Apache-2.0
"""No slope and no R² stands alone: every regression beside log_uniform, and beside the other nulls aside."""

from __future__ import annotations

from time import process_time

import numpy as np
import pytest

from chronos_acc.record import Record
from chronos_acc.trend.analysis import Trend, analyse
from chronos_acc.trend.null_table import null_times_in_chunks
from chronos_acc.trend.nulls import LOG_UNIFORM, SHUFFLED, STEADY, recall_decay
from chronos_acc.trend.regression_nulls import regression_nulls, statistic_name
from chronos_acc.trend.regressions import ESTIMATORS, PAIRS_LIMIT, PREDICTORS, regress


def _list(seed: int, n: int, unit: float = 0.0) -> Record:
    rng = np.random.default_rng(seed)
    dates = 2000 + 1000 * np.log1p(rng.random(n) * np.expm1(-3)) / 3
    return Record.from_dates(np.floor(dates) + 0.5 if unit else dates, present=2000, unit=unit)


@pytest.fixture(scope="module")
def hundred() -> tuple[Trend, float]:
    record = _list(1, 110, unit=1.0)  # with ties: null records differ in their number of intervals
    before = process_time()
    trend = analyse(record)
    return trend, process_time() - before


def test_every_row_has_its_null_and_says_how_many_records(hundred: tuple[Trend, float]) -> None:
    trend, _ = hundred
    rows = trend.to_dict()["regressions"]
    assert {(r["predictor"], r["estimator"]) for r in rows} >= {(p, e) for p in PREDICTORS for e in ESTIMATORS if e != "ols_hac"}
    contract = ["response", "predictor", "estimator", "slope", "std_error", "low", "high", "r_squared", "n"]
    for r in rows:
        assert list(r)[:9] == contract
        assert r["null"] == "log_uniform" and r["null_low"] < r["null_median"] < r["null_high"]
        assert r["null_records"] >= 199
        assert 0 < r["p_value"] <= 1
        if r["r_squared"] is not None:
            assert 0 <= r["r_squared_null_low"] < r["r_squared_null_high"] <= 1
            assert 0 < r["r_squared_p_value"] <= 1
    frame = trend.tables()["regressions"]
    assert list(frame.columns[:9]) == contract and frame["null_median"].notna().all()
    assert any("fewer null records" in n and "199 for theil_sen" in n for n in trend.notes)


def test_whole_of_trend_on_a_hundred_stays_quick(hundred: tuple[Trend, float]) -> None:
    assert hundred[1] < 6  # seconds of processor, half of it on the machine it was written on


def test_aside_stand_all_nulls_and_the_observed_are_the_regressions(hundred: tuple[Trend, float]) -> None:
    trend, _ = hundred
    table = trend.regression_nulls
    assert {r.null for r in table.rows} == {"steady", "shuffled", "recall_decay", "log_uniform"}
    for row in trend.regressions.rows:
        if row.estimator == "ols_hac" or (row.predictor, row.estimator) == ("log10_age", "ols_hc3"):
            continue
        for null in ("steady", "shuffled", "recall_decay", "log_uniform"):
            found = table.row(null, statistic_name("slope", row.predictor, row.estimator))
            assert found is not None and found.observed == pytest.approx(row.slope, abs=1e-6), (row.predictor, row.estimator)
            assert found.low is not None and found.tail == "upper"
        if row.r_squared is not None:
            square = table.row("log_uniform", statistic_name("r_squared", row.predictor, row.estimator))
            assert square is not None and square.observed == pytest.approx(row.r_squared, abs=1e-9)


def test_bands_are_those_of_null_records_regressed_one_by_one() -> None:
    record = _list(2, 30, unit=1.0)
    table = regression_nulls(record, (STEADY,), seed=5, replicates=99)
    times = np.concatenate(list(null_times_in_chunks(record, STEADY, seed=5, replicates=99)))
    rows = [regress(Record.from_dates(t, present=2000, unit=1.0).window) for t in times]
    for predictor in PREDICTORS:
        for estimator in ("ols_hc3", "median", "theil_sen", "glm"):
            if (predictor, estimator) == ("log10_age", "ols_hc3"):
                continue
            slopes = [r.row(predictor, estimator).slope for r in rows]  # type: ignore[union-attr]
            found = table.row("steady", statistic_name("slope", predictor, estimator))
            assert found is not None and found.records == 99
            low, median, high = np.quantile(np.array(slopes, dtype=float), [0.025, 0.5, 0.975])
            assert (found.low, found.median, found.high) == pytest.approx((low, median, high), abs=1e-6)
            assert found.p_value == (1 + sum(s >= found.observed - 1e-9 for s in slopes)) / 100


def test_null_of_the_draws_is_the_null_record_drawn_like_the_list() -> None:
    record = _list(6, 40, unit=1.0)
    drawn = regress(record.window, record=record, draws=200).row(estimator="draws")
    assert drawn is not None
    table = regression_nulls(record, (STEADY,), seed=2, replicates=99, drawn=drawn)
    found = table.row("steady", "slope on log10_age, draws")
    slopes = []
    for times in np.concatenate(list(null_times_in_chunks(record, STEADY, seed=2, replicates=99))):
        one = Record.from_dates(times, present=2000, unit=1.0)
        slopes.append(regress(one.window, record=one, draws=9).row(estimator="draws").slope)  # type: ignore[union-attr]
    assert found is not None and found.observed == drawn.slope
    assert found.median == pytest.approx(float(np.median(np.array(slopes, dtype=float))), abs=0.05)
    assert found.high == pytest.approx(float(np.quantile(np.array(slopes, dtype=float), 0.975)), abs=0.15)


def test_fitted_forgetting_judges_regressions_on_age_only() -> None:
    record = _list(3, 40)
    rows = regression_nulls(record, (recall_decay(half_life=230.0, fitted=True),), seed=1, replicates=199).rows
    for r in rows:
        assert r.low is not None and (r.p_value is not None) == ("log10_age" in r.statistic)


def test_long_records_keep_log_uniform_and_say_what_was_left_out() -> None:
    record = _list(4, 260)
    table = regression_nulls(record, (SHUFFLED, LOG_UNIFORM), seed=1, replicates=199)
    assert table.row("shuffled", "slope on order, theil_sen") is None and table.row("shuffled", "slope on order") is not None
    assert table.row("log_uniform", "slope on order, theil_sen") is not None
    assert any("log_uniform only" in n and n.endswith("theil_sen") for n in table.notes)
    longer = _list(5, PAIRS_LIMIT + 2)
    found = regress(longer.window)
    assert found.row("log10_age", "theil_sen") is None and found.row("log10_age", "median") is not None
    assert any("theil_sen is left out" in n for n in found.notes)


def test_small_records_have_no_band() -> None:
    assert regression_nulls(Record.from_dates([1900.0, 1950, 1980], present=2000), (STEADY,), seed=1).rows == ()
    rows = analyse(Record.from_dates([1900.0, 1950, 1980, 1990, 1995], present=2000), replicates=99, bootstrap=19).to_dict()["regressions"]
    assert rows and all(r["null_median"] is not None for r in rows if r["slope"] is not None)
