# SPDX-License-Identifier: Apache-2.0
"""Lines through points that are uncertain in both directions: Deming, York, and extrapolation over added error (SIMEX).

Offered beside the regressions, never together with draws of the dates, which would count the same errors twice.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ..errors import WrongUse

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True)
class BothWays:
    """A line y = intercept + slope x; standard errors NaN where the method gives none; chi_square over n - 2, or NaN."""

    slope: float
    intercept: float
    slope_error: float
    intercept_error: float
    reduced_chi_square: float


def deming(x: Floats, y: Floats, ratio: float = 1.0) -> BothWays:
    """Orthogonal regression where the error variance of y is ``ratio`` times that of x (Deming 1943; Pearson 1901 for 1)."""
    dx, dy = x - x.mean(), y - y.mean()
    sxx, syy, sxy = float(dx @ dx), float(dy @ dy), float(dx @ dy)
    if sxy == 0:
        raise WrongUse("the points show no association; an errors-in-variables line does not exist")
    gap = syy - ratio * sxx
    slope = (gap + float(np.sqrt(gap * gap + 4 * ratio * sxy * sxy))) / (2 * sxy)
    return BothWays(slope, float(y.mean() - slope * x.mean()), float("nan"), float("nan"), float("nan"))


def york(x: Floats, y: Floats, weight_x: Floats, weight_y: Floats, correlation: Floats | float = 0.0) -> BothWays:
    """Weighted line with errors in both coordinates, weights 1/variance (York 1966; the unified equations of York et al. 2004)."""
    r = np.broadcast_to(np.asarray(correlation, dtype=float), x.shape)
    alpha = np.sqrt(weight_x * weight_y)
    slope = float(np.polyfit(x, y, 1)[0])
    for _ in range(200):
        w = weight_x * weight_y / (weight_x + slope**2 * weight_y - 2 * slope * r * alpha)
        mean_x, mean_y = float(np.average(x, weights=w)), float(np.average(y, weights=w))
        u, v = x - mean_x, y - mean_y
        beta = w * (u / weight_y + slope * v / weight_x - (slope * u + v) * r / alpha)
        new = float((w * beta) @ v) / float((w * beta) @ u)
        done = abs(new - slope) <= 1e-15 * abs(new)
        slope = new
        if done:
            break
    intercept = mean_y - slope * mean_x
    adjusted = mean_x + beta
    mean_adjusted = float(np.average(adjusted, weights=w))
    slope_error = float(1.0 / np.sqrt(w @ (adjusted - mean_adjusted) ** 2))
    intercept_error = float(np.sqrt(1.0 / w.sum() + mean_adjusted**2 * slope_error**2))
    chi = float(w @ (y - slope * x - intercept) ** 2)
    return BothWays(slope, intercept, slope_error, intercept_error, chi / (len(x) - 2) if len(x) > 2 else float("nan"))


def extrapolate(levels: Floats, estimates: Floats, form: str = "quadratic") -> float:
    """The estimate at error -1 (no error) from estimates at added error ``levels`` (0 the data as they are; Cook & Stefanski 1994)."""
    if form == "quadratic":
        return float(np.polyval(np.polyfit(levels, estimates, 2), -1.0))
    if form != "rational":
        raise WrongUse(f"extrapolation {form!r} is not known; quadratic or rational")
    # a + b/(c + level): linear in (p, q, r) after multiplying out: estimate * level = p + q level - c estimate
    design = np.column_stack([np.ones_like(levels), levels, -estimates])
    p, q, c = np.linalg.lstsq(design, estimates * levels, rcond=None)[0]
    return float((p - q) / (c - 1.0))


def simex(
    estimate: Callable[[Floats], float],
    x: Floats,
    sd: Floats,
    *,
    seed: int,
    levels: tuple[float, ...] = (0.5, 1.0, 1.5, 2.0),
    rounds: int = 200,
    form: str = "quadratic",
) -> float:
    """``estimate`` of x freed from the errors of sd ``sd`` (n,): more error is added on purpose and the trend run back to none."""
    rng = np.random.default_rng([seed, 77])
    noise = rng.standard_normal((rounds, len(x)))
    means = [float(np.mean([estimate(x + np.sqrt(level) * sd * row) for row in noise])) for level in levels]
    return extrapolate(np.array((0.0, *levels)), np.array([estimate(x), *means]), form)
