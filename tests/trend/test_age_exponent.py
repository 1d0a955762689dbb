# SPDX-License-Identifier: Apache-2.0
"""The age exponent: its likelihood by brute force, recovery, coverage, eras, and degenerate records."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import integrate, optimize

from chronos_acc.record import Record
from chronos_acc.trend.age_exponent import age_exponent, exponents
from tests.simulate import coverage


def raw(s: float, ages: np.ndarray) -> float:
    """Log-likelihood of the inner ages with density a^(-s) between the outer ones, normalised numerically."""
    a = np.sort(ages)
    norm = integrate.quad(lambda t: np.exp((1 - s) * t), np.log(a[0]), np.log(a[-1]), epsabs=1e-13, epsrel=1e-13)[0]
    return float((-s * np.log(a[1:-1])).sum() - (len(a) - 2) * np.log(norm))


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_estimate_and_interval_against_numerical_search(seed: int) -> None:
    rng = np.random.default_rng(seed)
    ages = 10 ** rng.uniform(1, 5, 20) ** (0.8 + 0.2 * seed)
    found = optimize.minimize_scalar(lambda s: -raw(s, ages), bounds=(-3, 5), method="bounded", options={"xatol": 1e-9})
    row = age_exponent(Record.from_dates(2025 - ages, present=2025).window)[0]
    assert row.estimate == pytest.approx(found.x, abs=1e-5)
    fall = lambda s: 2 * (-found.fun - raw(s, ages)) - 3.841458820694124
    assert row.low == pytest.approx(optimize.brentq(fall, -6, found.x), abs=1e-6)
    assert row.high == pytest.approx(optimize.brentq(fall, found.x, 9), abs=1e-6)
    assert row.n == 20 and (row.youngest, row.oldest) == pytest.approx((ages.min(), ages.max()))


def test_unit_order_and_present_make_no_difference() -> None:
    rng = np.random.default_rng(4)
    ages = 10 ** rng.uniform(0, 6, 30)
    base = age_exponent(Record.from_dates(-ages, present=0).window)
    again = age_exponent(Record.from_dates(-365.25 * rng.permutation(ages), present=0).window)
    for a, b in zip(base, again, strict=True):
        assert (a.estimate, a.low, a.high) == pytest.approx((b.estimate, b.low, b.high), rel=1e-9)


@pytest.mark.parametrize(("s", "n"), [(0.0, 10), (1.0, 10), (1.5, 30), (0.5, 100)])
def test_coverage(s: float, n: int) -> None:
    assert 0.93 <= coverage.age_exponent(s, n, 5000, np.random.default_rng(int(10 * s) + n)) <= 0.97


def test_thirds_and_named_eras() -> None:
    ages = np.concatenate([np.geomspace(1e6, 1e9, 20), np.linspace(1, 300, 40)])
    window = Record.from_dates(2000 - ages, present=2000).window
    rows = age_exponent(window)
    assert [r.era for r in rows] == ["whole record", "oldest third", "middle third", "youngest third"]
    assert rows[1].estimate == pytest.approx(1, abs=0.15) and rows[3].estimate == pytest.approx(0, abs=0.45)
    assert rows[1].youngest == rows[2].oldest and rows[2].youngest == rows[3].oldest and sum(r.n for r in rows[1:]) == 62
    old, empty = age_exponent(window, eras=[("deep time", -1e10, -1e6), ("to come", 2100, 2200)])[1:]
    assert old.n == 19 and old.estimate == pytest.approx(1, abs=0.2)
    assert (empty.n, empty.estimate, empty.oldest) == (0, None, None)
    assert len(age_exponent(window, eras=())) == 1


@pytest.mark.parametrize("dates", [[], [10.0], [10.0, 20.0], [10.0, 10.0, 10.0, 10.0], [10.0, 10.0, 10.0, 50.0], [10.0, 50.0, 50.0]])
def test_degenerate_records(dates: list[float]) -> None:
    (row,) = age_exponent(Record.from_dates(dates, present=100).window)
    assert (row.estimate, row.low, row.high) == (None, None, None) and row.n == len(dates)


def test_an_age_of_zero_is_floored_at_half_the_unit_or_left_out() -> None:
    dates = [0.0, 40, 70, 90, 99, 100]
    assert age_exponent(Record.from_dates(dates, present=100).window)[0].n == 5
    row = age_exponent(Record.from_dates(dates, present=100, unit=1.0).window)[0]
    assert row.n == 6 and row.youngest == 0.5


def test_many_records_at_once() -> None:
    rng = np.random.default_rng(5)
    ages = 10 ** rng.uniform(0, 4, (4, 12))
    many = exponents(ages)
    for i in range(4):
        assert [m[i] for m in many] == pytest.approx([float(e) for e in exponents(ages[i])])
