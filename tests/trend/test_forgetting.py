# SPDX-License-Identifier: Apache-2.0
"""The tipping point: identities with the rate laws, totals, adequacy and coverage."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import integrate

from chronos_acc.record import Record
from chronos_acc.trend.forgetting import Tipping, tipping
from chronos_acc.trend.rate_laws import fit_laws, growth_interval


def _forgotten(seed: int, n: int = 100, half_life: float = 150.0, span: float = 1000.0) -> Record:
    """A steady rate of which a share 2^(-age/h) is listed: n listed, start given."""
    rng = np.random.default_rng(seed)
    k = np.log(2) * span / half_life
    return Record.from_dates(2000 + span * np.log1p(rng.random(n) * np.expm1(-k)) / k, present=2000, start=2000 - span)


def _tipping(record: Record, replicates: int = 99) -> Tipping:
    return tipping(record.window, seed=1, replicates=replicates)


def test_half_life_is_the_doubling_time_and_scale_the_distance_to_the_singular_date() -> None:
    record = _forgotten(1)
    laws = fit_laws(record.window, seed=1, replicates=0)
    tip = tipping(record.window, laws=laws)
    assert tip.form("exponential").estimate == pytest.approx(laws.row("log_linear").doubling_time)
    assert tip.form("power").estimate == pytest.approx(laws.row("hyperbolic").parameters["t_star"] - 2000)
    estimate, low, high, low_robust, high_robust = growth_interval(record.window)
    assert tip.form("exponential").high == pytest.approx(np.log(2) / min(low, low_robust))
    assert tip.form("exponential").low == pytest.approx(np.log(2) / max(high, high_robust))
    assert tip.form("exponential").critical == tip.form("exponential").high


@pytest.mark.parametrize("form", ["exponential", "power"])
def test_totals_are_integrals_of_the_listed_share(form: str) -> None:
    record = _forgotten(2)
    f = _tipping(record, 0).form(form)
    area = integrate.quad(lambda a: float(f.listed_share(a)), 0, 1000, limit=200)[0]
    assert f.total == pytest.approx(100 * 1000 / area, rel=1e-8)
    assert f.unlisted == pytest.approx(f.total - 100)
    assert f.total_low is not None and f.total_high is not None and f.total is not None
    assert f.total_low < f.total < f.total_high
    assert sum(b.unlisted for b in f.bins) == pytest.approx(f.unlisted)
    assert sum(b.listed for b in f.bins) == 100
    assert f.bins[0].age_from == 0 and f.bins[-1].age_to == 1000
    for b in f.bins:
        mass = integrate.quad(lambda a: 1 - float(f.listed_share(a)), b.age_from, b.age_to)[0]
        assert b.unlisted == pytest.approx(f.total / 1000 * mass, rel=1e-6)
        assert b.unlisted_high is not None and b.unlisted_low <= b.unlisted <= b.unlisted_high
    assert [s.at for s in f.shares] == ["oldest", "tenth oldest", "median"]
    for s in f.shares:
        assert s.low <= s.share <= s.high
    assert f.shares[0].age == pytest.approx(2000 - record.best.min())


def test_total_finds_the_truth_where_summing_over_the_listed_does_not() -> None:
    """1,000 steady events in 2,000 years, half-life 100: the total is right on average; summing 1/r over the listed is far too low."""
    totals, sums = [], []
    rng = np.random.default_rng(3)
    for _ in range(25):
        age = rng.uniform(0, 2000, 1000)
        age = age[rng.random(1000) < 2 ** (-age / 100)]
        f = _tipping(Record.from_dates(2000 - age, present=2000, start=0), 0).form("exponential")
        totals.append(f.total)
        sums.append(float((1 / f.listed_share(age)).sum()))
    assert np.mean(totals) == pytest.approx(1000, rel=0.15)
    assert np.median(sums) < 800


def test_adequate_where_true_and_not_where_another_shape() -> None:
    right = [_tipping(_forgotten(s)).form("exponential").suffices for s in range(12)]
    assert sum(bool(x) for x in right) >= 10
    rng = np.random.default_rng(5)
    step = np.concatenate([rng.uniform(1000, 1900, 20), rng.uniform(1900, 1960, 120), rng.uniform(1960, 2000, 5)])
    wrong = _tipping(Record.from_dates(step, present=2000, start=1000))
    assert wrong.adequate is None and not any(f.suffices for f in wrong.forms)


def test_no_forgetting_needed_where_the_rate_does_not_grow() -> None:
    slowing = Record.from_dates(np.geomspace(1, 900, 40), present=1000, start=0)
    tip = _tipping(slowing)
    for f in tip.forms:
        assert not f.needed and f.estimate is None and f.bins == () and f.suffices is None
        assert f.listed_share(500.0) == 1.0
    assert tip.nulls() == () and tip.adequate is None
    regular = _tipping(Record.from_dates(np.arange(1.0, 30), present=30, start=0))
    assert not regular.form("exponential").needed


def test_unbounded_above_where_growth_is_not_significant() -> None:
    f = _tipping(_forgotten(4, n=12, half_life=2000)).form("exponential")
    if f.needed:
        assert f.high is None and f.critical is None and f.unlisted_low == 0
        assert all(s.high == 1 for s in f.shares)


def test_window_of_ten_billion_years_with_all_events_in_the_last_million() -> None:
    record = Record.from_dates(2000 - np.random.default_rng(1).uniform(1, 1e6, 60), present=2000, start=2000 - 1e10)
    f = _tipping(record).form("exponential")
    assert f.total is not None and np.isfinite(f.total) and f.total > 1e5
    assert f.shares[-1].share > 0
    frame = _tipping(record, 0).bins_frame()
    assert np.isfinite(frame["unlisted"]).all()


def test_half_life_covers_at_small_size() -> None:
    """Unbounded ends count as ends."""
    hits = 0
    for s in range(40):
        window = _forgotten(1000 + s, n=30, half_life=300).window
        e = tipping(window, laws=fit_laws(window, seed=1, replicates=0)).form("exponential")
        hits += e.estimate is not None and e.low is not None and e.low <= 300 and (e.high is None or 300 <= e.high)
    assert 0.9 <= hits / 40 <= 1.0


def test_frames_have_their_columns_without_rows() -> None:
    tip = _tipping(Record.from_dates(np.geomspace(1, 900, 40), present=1000, start=0), 0)
    assert list(tip.to_frame()["form"]) == ["exponential", "power"]
    assert "unlisted" in tip.bins_frame().columns and len(tip.bins_frame()) == 0
    assert "share" in tip.shares_frame().columns
