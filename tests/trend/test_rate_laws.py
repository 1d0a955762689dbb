# SPDX-License-Identifier: Apache-2.0
"""Rate laws on one window: likelihoods from the definition, scaling, weights, fit, recovery, and degenerate records."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import optimize

from chronos_acc.record import Record
from chronos_acc.trend.curves import CURVES, hyperbolic, log_linear
from chronos_acc.trend.rate_laws import CHI2_95, LawsResult, fit_laws, growth_interval, rescaled_intervals, robust_critical
from tests.simulate import coverage, size

LAWS = [c.name for c in CURVES]


def fit(
    dates: np.ndarray | list[float], *, present: float, start: float | None = None, replicates: int = 0, unit: float = 0.0
) -> LawsResult:
    return fit_laws(Record.from_dates(dates, present=present, start=start, unit=unit).window, seed=1, replicates=replicates)


@pytest.fixture(scope="module")
def dates() -> np.ndarray:
    return np.sort(1500 + 525 * np.random.default_rng(7).beta(2.2, 1.0, 45))


def test_log_likelihoods_from_the_definition_in_events_per_year(dates: np.ndarray) -> None:
    result = fit(dates, present=2025, start=1500)
    t, n, span = dates - 1500, 45, 525.0
    assert result.row("steady").log_likelihood == pytest.approx(n * np.log(n / span) - n, rel=1e-12)

    def log_linear_minus(p: np.ndarray) -> float:
        return -float((p[0] + p[1] * t).sum() - np.exp(p[0]) * np.expm1(p[1] * span) / p[1])

    def power_law_minus(p: np.ndarray) -> float:
        a, b = np.exp(p)
        return -float((np.log(a * b) + (b - 1) * np.log(t)).sum() - a * span**b)

    def hyperbolic_minus(p: np.ndarray) -> float:
        a, ahead = np.exp(p)
        return -float((np.log(a) - np.log(span + ahead - t)).sum() - a * np.log((span + ahead) / ahead))

    for law, minus, first in (
        ("log_linear", log_linear_minus, [-4.0, 0.004]),
        ("power_law", power_law_minus, [-8.0, 0.6]),
        ("hyperbolic", hyperbolic_minus, [3.0, 5.0]),
    ):
        found = optimize.minimize(
            minus, first, method="Nelder-Mead", options={"xatol": 1e-11, "fatol": 1e-11, "maxiter": 20_000, "maxfev": 20_000}
        )
        row = result.row(law)
        assert row.log_likelihood == pytest.approx(-found.fun, abs=1e-7)
        (estimate,) = row.parameters.values()
        assert estimate == pytest.approx(
            {"log_linear": found.x[1], "power_law": np.exp(found.x[1]), "hyperbolic": 2025 + np.exp(found.x[1])}[law], rel=1e-5
        )
        # profile over the scale as well, by brute force, at both ends
        for end in (row.low, row.high):
            (value,) = end.values()
            if value is None:
                continue
            fixed = value if law == "log_linear" else np.log(value) if law == "power_law" else np.log(value - 2025)
            inner = optimize.minimize_scalar(
                lambda q, m=minus, f=fixed: m(np.array([q, f])), bracket=(found.x[0] - 0.1, found.x[0] + 0.1), tol=1e-12
            )
            assert 2 * (inner.fun - found.fun) == pytest.approx(CHI2_95, abs=2e-4)
        assert row.aicc == pytest.approx(-2 * row.log_likelihood + 4 + 12 / 42) and row.bic == pytest.approx(
            -2 * row.log_likelihood + 2 * np.log(45)
        )
        assert row.lr == pytest.approx(2 * (row.log_likelihood - result.row("steady").log_likelihood))


def test_unit_of_time_origin_and_order_make_no_difference(dates: np.ndarray) -> None:
    base = fit(dates, present=2025, start=1500, replicates=19)
    for scale, shift in ((365.25, 0.0), (1e-6, 0.0), (1.0, -2025.0)):
        other = fit(
            np.random.default_rng(1).permutation(dates) * scale + shift,
            present=2025 * scale + shift,
            start=1500 * scale + shift,
            replicates=19,
        )
        for a, b in zip(base.rows, other.rows, strict=True):
            assert b.log_likelihood == pytest.approx(a.log_likelihood - 45 * np.log(scale), rel=1e-7)
            assert (b.fit_p_shape, b.fit_p_clustering) == (a.fit_p_shape, a.fit_p_clustering)
            assert (a.weight is None and b.weight is None) or b.weight == pytest.approx(a.weight, rel=1e-5)
            for name, value in a.parameters.items():
                factor = {
                    "growth": (1 / scale, 0),
                    "rate": (1 / scale, 0),
                    "exponent": (1, 0),
                    "t_star": (scale, shift),
                    "year": (scale, shift),
                }.get(name, (1 / scale, 0))
                for x, y in ((value, b.parameters[name]), (a.low[name], b.low[name]), (a.high_robust[name], b.high_robust[name])):
                    assert (x is None and y is None) or y == pytest.approx(x * factor[0] + factor[1], rel=1e-6)


def test_a_window_of_ten_billion_years_with_all_events_in_the_last_million() -> None:
    ages = np.concatenate([[1e10], 1e6 * np.sort(np.random.default_rng(2).random(100))[::-1]])
    result = fit(2025 - ages, present=2025, replicates=49)
    k = 1e10 / ages[1:].mean()
    growth = result.row("log_linear")
    assert growth.parameters["growth"] == pytest.approx(1 / ages[1:].mean(), rel=1e-9) and k > 1e4
    assert growth.log_likelihood == pytest.approx(100 * np.log(100 / ages[1:].mean()) - 200, rel=1e-9)
    assert 0 < growth.low["growth"] < growth.parameters["growth"] < growth.high["growth"] < 1e-4
    found = optimize.minimize_scalar(
        lambda tau: np.log(np.exp(tau) + ages[1:]).sum() + 100 * np.log(np.log1p(1e10 / np.exp(tau))),
        bounds=(0, 20),
        method="bounded",
        options={"xatol": 1e-10},
    )
    assert result.row("hyperbolic").parameters["t_star"] - 2025 == pytest.approx(np.exp(found.x), rel=1e-5)
    power = result.row("power_law")
    assert power.parameters["exponent"] == pytest.approx(-100 / np.log1p(-ages[1:] / 1e10).sum(), rel=1e-6)
    step = result.row("step")
    assert -1e6 < step.parameters["year"] < -7e5 and step.parameters["after"] == pytest.approx(1e-4, rel=0.1)


def test_a_record_of_fifty_days() -> None:
    days = np.sort(50 * np.random.default_rng(3).random(30) ** 0.5) / 365.25
    result = fit(2024 + days, present=2024 + 50 / 365.25, start=2024.0)
    long = fit(days * 1e9, present=50 / 365.25 * 1e9, start=0.0)
    for law in LAWS:
        assert result.row(law).log_likelihood == pytest.approx(long.row(law).log_likelihood + 30 * np.log(1e9), rel=1e-6)


def test_power_law_opened_by_the_first_milestone_is_another_law(dates: np.ndarray) -> None:
    given, opened = fit(dates, present=2025, start=1500, replicates=19), fit(np.append(1500.0, dates), present=2025, replicates=19)
    a, b = given.row("power_law"), opened.row("power_law")
    assert b.log_likelihood == pytest.approx(a.log_likelihood) and b.parameters == a.parameters
    assert b.low == {"exponent": None} == b.high_robust and b.weight is None
    assert any("power_law" in note for note in opened.notes) and not any("power_law" in note for note in given.notes)
    for result, laws in ((given, 4), (opened, 3)):
        weights = [r.weight for r in result.rows if r.weight is not None]
        assert len(weights) == laws and sum(weights) == pytest.approx(1)
        best = min((r for r in result.rows if r.weight is not None), key=lambda r: r.aicc)
        assert best.weight == max(weights)


def test_growth_interval_is_the_row_of_the_law(dates: np.ndarray) -> None:
    window = Record.from_dates(dates, present=2025, start=1500).window
    row = fit_laws(window, seed=1, replicates=0).row("log_linear")
    assert growth_interval(window) == pytest.approx(
        (row.parameters["growth"], row.low["growth"], row.high["growth"], row.low_robust["growth"], row.high_robust["growth"])
    )
    assert row.doubling_time == pytest.approx(np.log(2) / row.parameters["growth"])
    assert row.rate_now / row.rate_at_start == pytest.approx(np.exp(525 * row.parameters["growth"]))
    assert row.same_curve_as is not None and f"{row.doubling_time:.4g}" in row.same_curve_as


def test_the_robust_interval_follows_the_spacing() -> None:
    even, bunched = np.arange(40) + 0.5, np.repeat(np.arange(8) * 5 + 2.5, 5) + np.tile(np.arange(5) * 0.01, 8)
    for dates, wider in ((even, False), (bunched, True)):
        low, high, low_robust, high_robust = growth_interval(Record.from_dates(dates, present=40, start=0).window)[1:]
        assert ((high_robust - low_robust) > (high - low)) is wider
    assert robust_critical(1.0, 10**9, 10**6) == pytest.approx(CHI2_95, rel=1e-4)


def test_rescaled_intervals_take_in_the_ends_where_milestones_stand() -> None:
    share = np.array([0.25, 0.5])
    assert rescaled_intervals(share, 1 - share, False, False).tolist() == [0.5]
    assert rescaled_intervals(share, 1 - share, True, True).tolist() == [0.5, 0.5, 1.0]


def test_a_wrong_law_is_seen_by_shape_and_dependence_by_clustering() -> None:
    rng = np.random.default_rng(11)
    u = np.sort(rng.random(80))
    grown = log_linear.quantile(np.array([5.0]), u, 1 - u)[0]
    result = fit(grown, present=1, start=0, replicates=99)
    assert result.row("steady").fit_p_shape == pytest.approx(0.01) and result.row("log_linear").fit_p_shape > 0.05
    bunched = np.sort((rng.random(20)[:, None] + 1e-4 * rng.random((20, 4))).ravel() % 1)
    result = fit(bunched, present=1, start=0, replicates=99)
    assert result.row("steady").fit_p_clustering == pytest.approx(0.01)
    assert result.dispersion["steady"] > 2


@pytest.mark.parametrize("law", LAWS)
def test_recovery_of_each_law(law: str) -> None:
    """400 events simulated under each law give its parameters back within four standard errors, and fit."""
    curve = next(c for c in CURVES if c.name == law)
    theta = np.array(size.THETA[law])
    u = np.sort(np.random.default_rng(LAWS.index(law)).random(400))
    _, v = curve.quantile(theta, u, 1 - u)
    row = fit(1000 - 1000 * v, present=1000, start=0, replicates=99).row(law)
    truth = {
        "steady": {"rate": 0.4},
        "log_linear": {"growth": 0.00277},
        "power_law": {"exponent": 2.0},
        "hyperbolic": {"t_star": 1000 + 1000 * np.exp(-2.5)},
        "step": {"year": 500.0, "before": 0.24, "after": 0.56},
    }[law]
    for name, value in truth.items():
        if row.low[name] is not None:
            low, high, middle = row.low[name], row.high[name], row.parameters[name]
            assert middle - 2 * (middle - low) < value < middle + 2 * (high - middle)
        else:
            assert row.parameters[name] == pytest.approx(value, rel=0.25)
    assert row.fit_p_shape > 0.02 and row.fit_p_clustering > 0.02


def test_weights_find_the_law_that_made_the_record() -> None:
    found = []
    for seed in range(20):
        u = np.sort(np.random.default_rng(seed).random(100))
        _, v = log_linear.quantile(np.array([4 * np.log(2)]), u, 1 - u)
        rows = fit(1 - v, present=1, start=0).rows
        found.append(max((r for r in rows if r.weight is not None), key=lambda r: r.weight).law)
    assert found.count("log_linear") >= 12 and "steady" not in found


@pytest.mark.parametrize("n", [0, 1, 2, 3, 4])
@pytest.mark.parametrize("start", [None, 0.0])
def test_small_records_have_an_answer(n: int, start: float | None) -> None:
    dates = [20.0, 45.0, 61.0, 88.0, 99.0][:n]
    result = fit(dates, present=100, start=start, replicates=19)
    counted = n if start is not None else max(n - 1, 0)
    assert [r.law for r in result.rows] == LAWS and all(r.n == counted for r in result.rows)
    for row in result.rows:
        if counted == 0 or row.law == "step":
            assert row.log_likelihood is None and set(row.parameters.values()) == {None}
        else:
            assert row.log_likelihood is not None and row.bic is not None
            assert (row.aicc is None) == (counted <= row.k + 1)
    if counted <= 3:
        assert all(r.weight is None for r in result.rows)
    assert (growth_interval(Record.from_dates(dates, present=100, start=start).window)[0] is None) == (counted == 0)


@pytest.mark.parametrize("at", [1e-9, 30.0, 99.999999])
def test_all_events_in_one_instant(at: float) -> None:
    result = fit([at] * 25, present=100, start=0, replicates=19)
    assert result.row("step").log_likelihood is None
    for law in ("steady", "log_linear", "power_law", "hyperbolic"):
        assert np.isfinite(result.row(law).log_likelihood)
    assert result.dispersion["steady"] is None or result.dispersion["steady"] >= 0
    growth = result.row("log_linear")
    assert growth.low["growth"] < growth.parameters["growth"] < growth.high["growth"]
    assert fit([at] * 25, present=at).row("steady").log_likelihood is None  # a window of no length


def test_events_at_both_ends_are_not_counted() -> None:
    window = Record.from_dates([0, 0, 50, 60, 70, 100, 100], present=100).window
    result = fit_laws(window, seed=1, replicates=19)
    assert result.n == 3 and result.row("steady").parameters["rate"] == 0.03
    assert all(np.isfinite(r.log_likelihood) for r in result.rows if r.law != "step")


def test_singular_date_far_or_near_is_told_from_a_forecast() -> None:
    slowing = fit(100 * np.linspace(0.01, 0.9, 30) ** 2, present=100, start=0)
    assert slowing.row("hyperbolic").parameters["t_star"] is None and slowing.row("hyperbolic").lr_p == 1.0
    assert slowing.row("hyperbolic").log_likelihood == slowing.row("steady").log_likelihood
    assert any("infinitely far" in note for note in slowing.notes)
    speeding = fit(100 - np.geomspace(0.01, 99, 30), present=100, start=0)
    assert 100 < speeding.row("hyperbolic").low["t_star"] < speeding.row("hyperbolic").high["t_star"] < 110
    assert any("not a forecast" in note for note in speeding.notes) and "log_uniform" in speeding.row("hyperbolic").same_curve_as


def test_frame_has_a_row_a_parameter(dates: np.ndarray) -> None:
    frame = fit(dates, present=2025, start=1500).to_frame()
    assert list(frame["law"]) == ["steady", "log_linear", "power_law", "hyperbolic", "step", "step", "step"]
    assert frame["low"].dtype == float and frame["low"].isna().sum() >= 3
    assert fit([], present=1).to_frame()["estimate"].isna().all()


@pytest.mark.parametrize(("n", "doublings"), [(10, 0), (30, 4), (100, 2)])
def test_coverage_of_growth(n: int, doublings: float) -> None:
    assert 0.93 <= coverage.growth(doublings, n, 8000, np.random.default_rng(n)) <= 0.97


@pytest.mark.parametrize(("n", "b"), [(10, 2.0), (100, 0.5)])
def test_coverage_of_the_power_law_exponent(n: int, b: float) -> None:
    assert 0.93 <= coverage.exponent(b, n, 8000, np.random.default_rng(n)) <= 0.97


@pytest.mark.parametrize(("n", "sigma"), [(10, 0.1), (30, 0.02), (100, 0.5)])
def test_coverage_of_t_star(n: int, sigma: float) -> None:
    assert 0.93 <= coverage.t_star(sigma, n, 1500, np.random.default_rng(n + 1))[0] <= 0.98


@pytest.mark.parametrize("spacing", ["clustered: gamma 1/2 (CV² 2)", "regular: gamma 2 (CV² 1/2)"])
def test_coverage_of_the_robust_growth_interval(spacing: str) -> None:
    poisson, robust, _ = coverage.robust_growth(spacing, 2, 30, 1500, np.random.default_rng(6))
    assert 0.925 <= robust <= 0.965
    assert abs(poisson - 0.95) > abs(robust - 0.95)


def test_boundary_and_step_ratios_keep_their_level() -> None:
    share, point, step_point, step_share = size.ratio_sizes(50, 4000, np.random.default_rng(8))
    assert 0.04 <= share <= 0.065 and point == pytest.approx(2.7, abs=0.3)
    assert 8 < step_point < 11 and 0.035 <= step_share <= 0.065


def test_fit_keeps_its_level_under_the_law_itself() -> None:
    found = size.fit_sizes(25, 150, np.random.default_rng(17), replicates=99)
    for name, pair in found.items():
        assert pair is not None and max(pair) <= 0.1, name
    total = np.mean([p for pair in found.values() if pair is not None for p in pair])
    assert 0.025 <= total <= 0.075


def test_profile_of_many_records_is_that_of_one() -> None:
    v = -np.sort(-np.random.default_rng(1).beta(0.5, 2, (5, 20)), axis=1)
    many = hyperbolic.profile(hyperbolic.estimate(1 - v, v)[:, 0], v, CHI2_95)
    for i in range(5):
        one = hyperbolic.profile(hyperbolic.estimate(1 - v[i], v[i])[0], v[i], CHI2_95)
        assert (many[0][i], many[1][i]) == pytest.approx((float(one[0]), float(one[1])), rel=1e-8)
