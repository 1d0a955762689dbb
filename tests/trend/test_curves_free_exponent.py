# SPDX-License-Identifier: Apache-2.0
"""The hyperbolic law with its exponent free, against a search over both parameters on the raw likelihood."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import optimize

from chronos_acc.record import Record
from chronos_acc.trend.free_exponent import FreeHyperbolic, fit_free_hyperbolic
from chronos_acc.trend.rate_laws import CHI2_95, fit_laws


def fit(ages: np.ndarray, span: float = 100.0) -> FreeHyperbolic:
    return fit_free_hyperbolic(Record.from_dates(2000 - ages, present=2000, start=2000 - span).window)


def minus(parameters: np.ndarray, ages: np.ndarray, span: float) -> float:
    ahead, p = np.exp(parameters[0]), parameters[1]
    total = ((ahead + span) ** (1 - p) - ahead ** (1 - p)) / (1 - p)
    n = len(ages)
    return float(p * np.log(ahead + ages).sum() + n * np.log(total) - n * np.log(n) + n)


@pytest.fixture(scope="module")
def ages() -> np.ndarray:
    u = (np.arange(300) + 0.5) / 300
    return np.sort((2.0**-1 - u * (2.0**-1 - 102.0**-1)) ** -1 - 2.0)  # density (2 + age)^(-2)


def test_against_a_search_over_both_parameters(ages: np.ndarray) -> None:
    found = optimize.minimize(
        minus, [0.0, 1.5], args=(ages, 100.0), method="Nelder-Mead", options={"xatol": 1e-10, "fatol": 1e-10, "maxiter": 5000}
    )
    row = fit(ages)
    assert row.log_likelihood == pytest.approx(-found.fun, abs=1e-7)
    assert row.p == pytest.approx(found.x[1], rel=1e-4) and row.t_star - 2000 == pytest.approx(np.exp(found.x[0]), rel=1e-4)
    assert row.p == pytest.approx(2.0, abs=0.1) and row.p_low < row.p < row.p_high and not row.touches_present
    for p in (row.p_low, row.p_high):
        inner = optimize.minimize_scalar(lambda t, q=p: minus(np.array([t, q]), ages, 100.0), bounds=(-5, 6), method="bounded")
        assert 2 * (inner.fun - found.fun) == pytest.approx(CHI2_95, abs=1e-4)
    for star in (row.t_star_low, row.t_star_high):
        inner = optimize.minimize_scalar(
            lambda q, t=np.log(star - 2000): minus(np.array([t, q]), ages, 100.0), bounds=(0.05, 12), method="bounded"
        )
        assert 2 * (inner.fun - found.fun) == pytest.approx(CHI2_95, abs=1e-3)


def test_it_is_at_least_as_good_as_the_laws_it_holds(ages: np.ndarray) -> None:
    laws = fit_laws(Record.from_dates(2000 - ages, present=2000, start=1900).window, seed=1, replicates=0)
    row = fit(ages)
    assert row.log_likelihood >= max(laws.row("hyperbolic").log_likelihood, laws.row("log_linear").log_likelihood) - 1e-9
    assert row.lr == pytest.approx(2 * (row.log_likelihood - laws.row("hyperbolic").log_likelihood), abs=1e-7)


def test_exponential_growth_puts_the_singular_date_at_infinity() -> None:
    u = (np.arange(200) + 0.5) / 200
    row = fit(-30 * np.log1p(-u * -np.expm1(-100 / 30)))
    assert row.t_star_high is None and row.t_star_low is not None


def test_a_short_list_reaches_the_present_and_says_so() -> None:
    rng = np.random.default_rng(4)
    assert sum(fit(100 * rng.random(12)).touches_present for _ in range(20)) >= 10


def test_too_few() -> None:
    row = fit(np.array([3.0, 4.0]))
    assert row.t_star is None and row.log_likelihood is None and row.notes
