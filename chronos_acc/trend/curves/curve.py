# SPDX-License-Identifier: Apache-2.0
"""What a rate law is: a density on the unit window with its fit, its cumulated share, its inverse and its profile interval.

Each law is used alike for one record and for many at once: arrays end in the events of one record. Laws work in scaled time (x =
position, v = 1 - x = age, fractions of the window), so no length of window and no unit of time makes a difference; only ``natural``
and ``interval`` turn scaled parameters into years. The scale of the rate is profiled out: its maximum likelihood always puts the n
counted events in the window.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
Value = float | None
Interval = tuple[Value, Value]


@dataclass(frozen=True)
class Place:
    """The window in years and its number of counted events, which give scaled parameters their units."""

    start: float
    span: float
    present: float
    n: int


@dataclass(frozen=True)
class Curve:
    """One rate law. theta (..., q) scaled parameters, x and v (..., n) positions ascending and ages descending.

    estimate(x, v) -> theta, the maximum likelihood, NaN where it does not exist; log_density(theta, x, v) -> (..., n) of the
    density on the unit window; cumulative(theta, x, v) -> share of the events before each position, and the rest; quantile(theta,
    u, c) -> (x, v) at cumulated shares u = 1 - c; natural(theta, place) -> parameters in years; interval(theta, x, v, place,
    critical) -> the profile interval of each parameter, where ``critical`` is how far twice the log-likelihood may fall (None:
    unbounded or not computed); same_curve(parameters, place) -> the way of forgetting that draws the very same curve, in words, or
    None. k counts the parameters, the scale among them.
    """

    name: str
    parameters: tuple[str, ...]
    k: int
    regular: bool
    formula: str
    estimate: Callable[[Floats, Floats], Floats]
    log_density: Callable[[Floats, Floats, Floats], Floats]
    cumulative: Callable[[Floats, Floats, Floats], tuple[Floats, Floats]]
    quantile: Callable[[Floats, Floats, Floats], tuple[Floats, Floats]]
    natural: Callable[[Floats, Place], dict[str, Value]]
    interval: Callable[[Floats, Floats, Floats, Place, float], dict[str, Interval]]
    same_curve: Callable[[dict[str, Value], Place], str | None]


def no_same_curve(parameters: dict[str, Value], place: Place) -> str | None:
    """For laws that no forgetting of a steady rate draws."""
    return None


def log_ratio_interval(n: int, critical: float) -> tuple[float, float]:
    """The two r with 2n(r - 1 - ln r) = critical, r < 1 < r: profile interval of a scale or an exponent over its estimate."""
    target = critical / (2.0 * n)

    def solve(low: float, high: float) -> float:
        for _ in range(200):
            mid = 0.5 * (low + high)
            if mid in (low, high):
                break
            # in terms of the logarithm, so that both sides are as exact near r = 1
            above = float(np.expm1(mid)) - mid > target
            if (mid > 0) == above:
                high = mid
            else:
                low = mid
        return float(np.exp(0.5 * (low + high)))

    return solve(-target - 1.0, 0.0), solve(0.0, float(np.log1p(target + np.sqrt(2.0 * target)) + 1.0))


def bisect(over: Callable[[Floats], npt.NDArray[np.bool_]], inside: Floats, outside: Floats, rounds: int = 80) -> Floats:
    """Where ``over`` turns from False (at ``inside``) to True (at ``outside``), element by element."""
    near, far = np.array(inside, dtype=float), np.array(outside, dtype=float)
    for _ in range(rounds):
        mid = 0.5 * (near + far)
        if np.all((mid == near) | (mid == far)):
            break
        beyond = over(mid)
        far = np.where(beyond, mid, far)
        near = np.where(beyond, near, mid)
    return np.asarray(0.5 * (near + far))
