# SPDX-License-Identifier: Apache-2.0
"""The family of rate laws: each law's density, share, inverse, fit and interval against slow second implementations on the raw
likelihood.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from scipy import integrate, optimize

import chronos_acc.trend.curves as family
from chronos_acc.trend.curves import CURVES, Place, hyperbolic, log_linear, power_law, steady, step
from chronos_acc.trend.curves.curve import log_ratio_interval

THETAS = {
    "steady": [()],
    "log_linear": [(-30.0,), (-2.0,), (1e-14,), (0.003,), (1.0,), (25.0,)],
    "power_law": [(0.3,), (1.0,), (4.0,)],
    "hyperbolic": [(-7.0,), (-1.0,), (3.0,), (np.inf,)],
    "step": [(0.4, 0.7), (0.9, 0.2)],
}
CASES = [(c, np.array(t)) for c in CURVES for t in THETAS[c.name]]
NAMES = [f"{c.name}{tuple(t.tolist())}" for c, t in CASES]


def test_the_tuple_is_the_folder() -> None:
    files = {p.stem for p in Path(family.__file__).parent.glob("*.py")} - {"__init__", "curve"}
    assert [c.name for c in CURVES] == ["steady", "log_linear", "power_law", "hyperbolic", "step"]
    assert files == {c.name for c in CURVES}


@pytest.mark.parametrize(("curve", "theta"), CASES, ids=NAMES)
def test_share_is_the_integral_of_the_density_and_quantile_its_inverse(curve: family.Curve, theta: np.ndarray) -> None:
    x = np.array([0.03, 0.2, 0.5, 0.77, 0.98])
    share, rest = curve.cumulative(theta, x, 1 - x)
    assert share + rest == pytest.approx(np.ones(5), abs=1e-12)
    back, age = curve.quantile(theta, share, rest)
    assert back == pytest.approx(x, abs=1e-9) and age == pytest.approx(1 - x, abs=1e-9)
    if curve is step.CURVE:
        return

    def density(at: float) -> float:
        return float(np.exp(curve.log_density(theta, np.array([at]), np.array([1 - at])))[0])

    for at, s in zip(x, share, strict=True):
        assert integrate.quad(density, 0, at, epsabs=1e-11, limit=200)[0] == pytest.approx(s, abs=1e-8)


@pytest.mark.parametrize("curve", CURVES, ids=lambda c: c.name)
def test_one_record_and_many_at_once_agree(curve: family.Curve) -> None:
    rng = np.random.default_rng(5)
    v = -np.sort(-rng.beta(0.7, 1.6, (6, 40)), axis=1)
    many = curve.estimate(1 - v, v)
    for i in range(6):
        one = curve.estimate(1 - v[i], v[i])
        assert many[i] == pytest.approx(one, rel=1e-9, abs=1e-9)


def raw_log_density(name: str, p: float, t: np.ndarray) -> float:
    """Log-likelihood on (0, 1) straight from the definition."""
    if name == "log_linear":
        return float((p * t).sum() - len(t) * np.log(np.expm1(p) / p))
    if name == "power_law":
        return float(len(t) * np.log(p) + (p - 1) * np.log(t).sum())
    beyond = np.exp(p)  # t_star - 1
    return float(-np.log(beyond + (1 - t)).sum() - len(t) * np.log(np.log((1 + beyond) / beyond)))


@pytest.mark.parametrize(("name", "low", "high"), [("log_linear", 1e-3, 60.0), ("power_law", 0.01, 30.0), ("hyperbolic", -40.0, 6.0)])
@pytest.mark.parametrize("seed", [1, 2, 3])
def test_estimate_and_profile_interval_against_numerical_search(name: str, low: float, high: float, seed: int) -> None:
    rng = np.random.default_rng(seed)
    t = np.sort(1 - rng.beta(0.4, 3.0, 25))
    curve = next(c for c in CURVES if c.name == name)
    found = optimize.minimize_scalar(
        lambda p: -raw_log_density(name, p, t), bounds=(max(low, -9.0), high), method="bounded", options={"xatol": 1e-10}
    )
    theta = curve.estimate(t, 1 - t)
    assert theta[0] == pytest.approx(found.x, rel=1e-5, abs=1e-5)
    assert curve.log_density(theta, t, 1 - t).sum() == pytest.approx(-found.fun, abs=1e-8)
    place = Place(start=0.0, span=1.0, present=1.0, n=25)
    (ends,) = curve.interval(theta, t, 1 - t, place, 3.841458820694124).values()

    def fall(p: float) -> float:
        return 2 * (-found.fun - raw_log_density(name, p, t)) - 3.841458820694124

    expected = (optimize.brentq(fall, low, found.x, xtol=1e-13), optimize.brentq(fall, found.x, high, xtol=1e-13))
    if name == "hyperbolic":
        expected = (1 + np.exp(expected[0]), 1 + np.exp(expected[1]))
    assert ends == pytest.approx(expected, rel=1e-6)


def test_hyperbolic_finds_the_higher_of_two_humps() -> None:
    # most events old, a burst in the last millionth: rising at infinity for the steady law, yet far higher near the present
    v = -np.sort(-np.concatenate([np.linspace(0.6, 0.99, 70), np.geomspace(1e-7, 1e-5, 30)]))
    tau = float(hyperbolic.estimate(1 - v, v)[0])
    grid = np.linspace(-25, 10, 3000)
    best = max(raw_log_density("hyperbolic", g, 1 - v) for g in grid if g > -16)
    assert np.isfinite(tau)
    assert 100 * hyperbolic.mean_log_density(np.array(tau), v) >= best - 1e-6


def test_hyperbolic_at_infinity_is_the_steady_law() -> None:
    x = np.linspace(0.02, 0.6, 30)
    theta = hyperbolic.CURVE.estimate(x, 1 - x)
    assert theta[0] == np.inf
    assert hyperbolic.CURVE.log_density(theta, x, 1 - x).sum() == 0
    place = Place(0.0, 1.0, 1.0, 30)
    assert hyperbolic.CURVE.natural(theta, place) == {"t_star": None}
    low, high = hyperbolic.CURVE.interval(theta, x, 1 - x, place, 3.84)["t_star"]
    assert low is not None and low > 1 and high is None
    assert hyperbolic.CURVE.same_curve({"t_star": None}, place) is not None


def test_step_against_every_split() -> None:
    rng = np.random.default_rng(8)
    for n in (12, 30, 101):
        t = np.sort(np.concatenate([rng.uniform(0, 0.7, n // 3), rng.uniform(0.7, 1, n - n // 3)]))
        best = (-np.inf, 0.0, 0)
        for event in range(n):
            for before in (event, event + 1):  # the step just before the event, and just after it
                if min(before, n - before) < step.fewest(n):
                    continue
                value = before * np.log(before / t[event]) + (n - before) * np.log((n - before) / (1 - t[event])) - n * np.log(n)
                best = max(best, (value, t[event], before))
        theta = step.CURVE.estimate(t, 1 - t)
        assert theta == pytest.approx([best[1], best[2] / n])
        assert step.likelihood_gain(theta, n) == pytest.approx(best[0])
        assert step.CURVE.log_density(theta, t, 1 - t).sum() == pytest.approx(best[0])


def test_step_needs_five_and_a_tenth_on_each_side() -> None:
    assert [step.fewest(n) for n in (10, 50, 51, 60, 191)] == [5, 5, 6, 6, 20]
    assert np.isnan(step.CURVE.estimate(np.linspace(0.1, 0.9, 9), np.linspace(0.9, 0.1, 9))).all()
    together = np.full(20, 0.5)
    assert np.isnan(step.CURVE.estimate(together, together)).all()  # no date parts them


@pytest.mark.parametrize("n", [1, 10, 10_000])
def test_scale_interval_solves_the_poisson_likelihood(n: int) -> None:
    for r in log_ratio_interval(n, 3.841458820694124):
        assert 2 * n * (r - 1 - np.log(r)) == pytest.approx(3.841458820694124, rel=1e-6)


def test_same_curve_as_holds_numerically() -> None:
    """A steady rate thinned by what is remembered is the law: 2^(-a/h) and 1/(1 + a/s), on ages a of a window of 300 years."""
    ages = np.linspace(0, 300, 7)
    x = 1 - ages / 300
    k = 300 * np.log(2) / 40
    law = np.exp(log_linear.CURVE.log_density(np.array([k]), x, 1 - x))
    assert law / law[0] == pytest.approx(2.0 ** (-ages / 40), rel=1e-12)
    law = np.exp(hyperbolic.CURVE.log_density(np.array([np.log(40 / 300)]), x, 1 - x))
    assert law / law[0] == pytest.approx(1 / (1 + ages / 40), rel=1e-12)
    assert (
        steady.CURVE.same_curve({"rate": 1.0}, Place(0, 1, 1, 1)) is None
        and power_law.CURVE.same_curve({"exponent": 2.0}, Place(0, 1, 1, 1)) is None
    )
    assert log_linear.CURVE.same_curve({"growth": -1.0}, Place(0, 1, 1, 1)) is None
