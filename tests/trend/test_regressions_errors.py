# SPDX-License-Identifier: Apache-2.0
"""Errors in both directions: published lines and the closed form of attenuation."""

from __future__ import annotations

import numpy as np
import pytest

from chronos_acc.errors import WrongUse
from chronos_acc.trend.errors_in_variables import deming, extrapolate, simex, york

# Pearson 1901's ten points with the weights of York 1966
X = np.array([0, 0.9, 1.8, 2.6, 3.3, 4.4, 5.2, 6.1, 6.5, 7.4])
Y = np.array([5.9, 5.4, 4.4, 4.6, 3.5, 3.7, 2.8, 2.8, 2.4, 1.5])
WEIGHT_X = np.array([1000, 1000, 500, 800, 200, 80, 60, 20, 1.8, 1])
WEIGHT_Y = np.array([1, 1.8, 4, 8, 20, 20, 70, 70, 100, 500])


def test_deming_with_equal_errors() -> None:
    # Pearson 1901, as quoted elsewhere
    fit = deming(X, Y)
    assert (fit.slope, fit.intercept) == pytest.approx((-0.5455612, 5.7840438), abs=5e-8)
    swapped = deming(Y, X)
    assert swapped.slope == pytest.approx(1 / fit.slope)


def test_york() -> None:
    # York 1966, York et al. 2004, Cantrell 2008
    fit = york(X, Y, WEIGHT_X, WEIGHT_Y)
    assert fit.intercept == pytest.approx(5.479910224, abs=1e-8)
    assert fit.slope == pytest.approx(-0.480533407, abs=1e-9)
    assert fit.intercept_error == pytest.approx(0.294970735, abs=1e-8)
    assert fit.slope_error == pytest.approx(0.0579850090, abs=1e-9)
    assert fit.reduced_chi_square == pytest.approx(1.483294149, abs=1e-8)


def test_attenuation_in_closed_form() -> None:
    # Cook & Stefanski 1994: reliability 0.8, true slope 1
    levels = np.array([0, 0.5, 1, 1.5, 2])
    attenuated = 0.8 / (0.8 + 0.2 * (1 + levels))
    assert attenuated[0] == pytest.approx(0.8)
    assert extrapolate(levels, attenuated) == pytest.approx(0.9706294, abs=5e-8)
    assert extrapolate(levels, attenuated, "rational") == pytest.approx(1.0, abs=1e-10)
    with pytest.raises(WrongUse, match="quadratic or rational"):
        extrapolate(levels, attenuated, "cubic")


def test_simex_recovers_a_slope() -> None:
    rng = np.random.default_rng(1)
    true = rng.normal(size=2000)
    seen, y = true + 0.5 * rng.normal(size=2000), true + 0.1 * rng.normal(size=2000)
    back = simex(lambda x: float(np.polyfit(x, y, 1)[0]), seen, np.full(2000, 0.5), seed=1, rounds=20, form="rational")
    assert float(np.polyfit(seen, y, 1)[0]) == pytest.approx(0.8, abs=0.03)
    assert back == pytest.approx(1.0, abs=0.04)
