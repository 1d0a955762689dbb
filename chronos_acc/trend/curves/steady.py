# SPDX-License-Identifier: Apache-2.0
"""The steady rate: as many events in any year as in any other (homogeneous Poisson process)."""

from __future__ import annotations

import numpy as np

from .curve import Curve, Floats, Interval, Place, Value, log_ratio_interval, no_same_curve


def estimate(x: Floats, v: Floats) -> Floats:
    """Nothing to estimate beyond the scale: theta is empty."""
    return np.empty((*x.shape[:-1], 0))


def log_density(theta: Floats, x: Floats, v: Floats) -> Floats:
    """Zero everywhere."""
    return np.zeros_like(x)


def cumulative(theta: Floats, x: Floats, v: Floats) -> tuple[Floats, Floats]:
    """The positions themselves."""
    return x, v


def quantile(theta: Floats, u: Floats, c: Floats) -> tuple[Floats, Floats]:
    """The shares themselves."""
    return u, c


def natural(theta: Floats, place: Place) -> dict[str, Value]:
    """Events per year."""
    return {"rate": place.n / place.span}


def interval(theta: Floats, x: Floats, v: Floats, place: Place, critical: float) -> dict[str, Interval]:
    """Profile interval of the rate."""
    low, high = log_ratio_interval(place.n, critical)
    rate = place.n / place.span
    return {"rate": (rate * low, rate * high)}


CURVE = Curve(
    name="steady",
    parameters=("rate",),
    k=1,
    regular=True,
    formula="rate",
    estimate=estimate,
    log_density=log_density,
    cumulative=cumulative,
    quantile=quantile,
    natural=natural,
    interval=interval,
    same_curve=no_same_curve,
)
