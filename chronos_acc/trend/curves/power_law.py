# SPDX-License-Identifier: Apache-2.0
"""The power law of reliability growth, rate ∝ (t - start)^(exponent - 1) (Crow 1974): above 1 speeding, below 1 slowing.

theta is the exponent; its origin is the start of the window, so it has an interval only where a start was given.
"""

from __future__ import annotations

import numpy as np

from .curve import Curve, Floats, Interval, Place, Value, log_ratio_interval, no_same_curve


def estimate(x: Floats, v: Floats) -> Floats:
    """n / sum ln(1/x), unmodified maximum likelihood."""
    return np.asarray(-x.shape[-1] / _log(x, v).sum(axis=-1))[..., None]


def log_density(theta: Floats, x: Floats, v: Floats) -> Floats:
    """ln b + (b - 1) ln x."""
    b = theta[..., :1]
    return np.asarray(np.log(b) + (b - 1.0) * _log(x, v))


def cumulative(theta: Floats, x: Floats, v: Floats) -> tuple[Floats, Floats]:
    """x^b and its rest."""
    power = theta[..., :1] * _log(x, v)
    return np.exp(power), -np.expm1(power)


def quantile(theta: Floats, u: Floats, c: Floats) -> tuple[Floats, Floats]:
    """Positions at cumulated shares."""
    log_x = np.log(u) / theta[..., :1]
    return np.exp(log_x), -np.expm1(log_x)


def _log(x: Floats, v: Floats) -> Floats:
    """ln x, from the age where that is the smaller."""
    return np.where(v < 0.5, np.log1p(-np.minimum(v, 0.5)), np.log(x))


def natural(theta: Floats, place: Place) -> dict[str, Value]:
    """The exponent has no unit."""
    return {"exponent": float(theta[0])}


def interval(theta: Floats, x: Floats, v: Floats, place: Place, critical: float) -> dict[str, Interval]:
    """Profile interval of the exponent; always bounded."""
    low, high = log_ratio_interval(place.n, critical)
    return {"exponent": (float(theta[0]) * low, float(theta[0]) * high)}


CURVE = Curve(
    name="power_law",
    parameters=("exponent",),
    k=2,
    regular=True,
    formula="a·(t − start)^(exponent − 1)",
    estimate=estimate,
    log_density=log_density,
    cumulative=cumulative,
    quantile=quantile,
    natural=natural,
    interval=interval,
    same_curve=no_same_curve,
)
