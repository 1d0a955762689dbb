# SPDX-License-Identifier: Apache-2.0
"""The wait for the next milestone: each law's law of waiting, the track record, and records too small for either."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import integrate, stats

from chronos_acc.record import Record
from chronos_acc.trend.curves import CURVES
from chronos_acc.trend.next_event import CAUTION, NextEvent, _wait, next_event
from chronos_acc.trend.positions import positions
from chronos_acc.trend.rate_laws import fit_curve


def ask(dates: np.ndarray | list[float], present: float, start: float | None = 0.0) -> NextEvent:
    return next_event(Record.from_dates(dates, present=present, start=start).window, seed=1)


@pytest.fixture(scope="module")
def speeding() -> NextEvent:
    return ask(100 - 100 * np.random.default_rng(2).beta(0.7, 2, 50), 100.0)


def test_quantile_expected_number_and_density_agree() -> None:
    events = positions(Record.from_dates(100 - 100 * np.random.default_rng(2).beta(0.7, 2, 50), present=100, start=0).window)
    for curve in CURVES:
        fit = fit_curve(curve, events)
        assert fit is not None
        wait = _wait(fit)
        for p in (0.025, 0.25, 0.5, 0.975):
            at = wait.quantile(p)
            assert at is not None and -np.expm1(-wait.expected(at)) == pytest.approx(p, rel=1e-9)
            # the rate cumulated numerically, and the density a proper one
            assert integrate.quad(lambda w, f=wait: np.exp(f.log_rate(w)), 0, at)[0] == pytest.approx(wait.expected(at), rel=1e-7)
        assert np.exp(wait.log_rate(0.0)) == pytest.approx(wait.rate)


def test_a_law_so_steep_that_its_rate_underflows_still_answers() -> None:
    for dates in (np.append(np.linspace(1, 1.001, 20), [90, 95.0]), np.append([2.0, 3], np.linspace(98.999, 99, 20))):
        result = ask(dates, 100)
        assert all(0 <= f.pit <= 1 for f in result.forecasts) and any(f.log_density is None for f in result.forecasts)
        assert all(r.chance_never <= 1 for r in result.rows)


def test_the_steady_law_waits_exponentially(speeding: NextEvent) -> None:
    row = speeding.rows[0]
    assert row.law == "steady" and row.rate_now == pytest.approx(0.5)
    assert [row.low_95, row.low_50, row.median, row.high_50, row.high_95] == pytest.approx(
        stats.expon(scale=2).ppf([0.025, 0.25, 0.5, 0.75, 0.975])
    )
    assert [r.law for r in speeding.rows] == ["steady", "log_linear", "power_law", "hyperbolic", "step"]
    for other in speeding.rows:
        assert other.low_95 < other.low_50 < other.median < other.high_50 < other.high_95 and other.chance_never == 0


def test_the_hyperbolic_law_never_waits_past_its_singular_date(speeding: NextEvent) -> None:
    from chronos_acc.trend.rate_laws import fit_laws

    dates = 100 - 100 * np.random.default_rng(2).beta(0.7, 2, 50)
    star = fit_laws(Record.from_dates(dates, present=100, start=0).window, seed=1, replicates=0).row("hyperbolic").parameters["t_star"]
    assert next(r for r in speeding.rows if r.law == "hyperbolic").high_95 < star - 100


def test_a_slowing_record_may_wait_for_ever() -> None:
    row = next(r for r in ask(100 * np.linspace(0.01, 0.9, 12) ** 4, 100).rows if r.law == "log_linear")
    assert row.high_95 is None and 0 < row.chance_never < 1


def test_track_record_of_steady_records_is_right() -> None:
    """Steady records: the steady law's past forecasts cover at about their nominal share, and its transform is uniform."""
    rows = []
    for seed in range(8):
        result = ask(np.random.default_rng(seed).random(50) * 1000, 1000)
        rows.append(next(r for r in result.track_record if r.law == "steady"))
    made = sum(r.forecasts for r in rows)
    assert sum(r.coverage_50 * r.forecasts for r in rows) / made == pytest.approx(0.5, abs=0.06)
    assert sum(r.coverage_95 * r.forecasts for r in rows) / made == pytest.approx(0.95, abs=0.03)
    assert np.mean([r.pit_mean for r in rows]) == pytest.approx(0.5, abs=0.04)
    assert sum(r.pit_p < 0.05 for r in rows) <= 2
    assert all(r.gain_over_steady == 0 for r in rows)


def test_the_right_law_scores_better_than_the_steady_one() -> None:
    u = np.linspace(0.01, 0.99, 90)
    dates = 1000 * np.log1p(u * np.expm1(4.0)) / 4.0
    track = {r.law: r for r in ask(dates, 1000).track_record}
    assert track["log_linear"].gain_over_steady > 0.2 and track["steady"].pit_mean < 0.45
    assert track["log_linear"].log_score > track["steady"].log_score


def test_forecasts_see_only_the_past() -> None:
    dates = [3.0, 9, 14, 20, 31, 33, 47, 58, 61, 75, 90]
    whole, early = ask(dates, 100), ask(dates[:9], 62)
    seen = {(f.year, f.law): f for f in whole.forecasts}
    assert len(early.forecasts) > 0
    for f in early.forecasts:
        assert seen[(f.year, f.law)] == f
    first = next(f for f in whole.forecasts if f.law == "steady")
    # five counted events before the sixth milestone, which closes the window: 5 in 33 years
    assert first.year == 33 and first.wait == 14 and first.pit == pytest.approx(1 - np.exp(-14 * 5 / 33))
    assert first.log_density == pytest.approx(np.log(5 / 33) - 14 * 5 / 33)


def test_milestones_of_one_date_are_one_occasion_and_the_opener_has_no_power_law() -> None:
    result = ask([0.0, 5, 5, 9, 12, 20, 20, 26, 40], 50, start=None)
    years = [f.year for f in result.forecasts if f.law == "steady"]
    assert years == [26] and all(f.wait > 0 for f in result.forecasts)
    assert "power_law" not in {r.law for r in result.rows} and any("power_law" in note for note in result.notes)


@pytest.mark.parametrize("dates", [[], [4.0], [4.0, 4.0, 4.0], [1.0, 2.0, 3.0]])
def test_small_records_have_no_track_record_and_say_so(dates: list[float]) -> None:
    result = ask(dates, 10, start=None)
    assert result.forecasts == () and CAUTION in result.notes and any("No track record" in note for note in result.notes)
    assert all(r.coverage_50 is None for r in result.track_record)
    assert set(result.tables()) == {"next", "track_record", "forecasts"} and "median" in result.to_frame().columns
