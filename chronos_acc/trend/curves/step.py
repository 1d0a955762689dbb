# SPDX-License-Identifier: Apache-2.0
"""The step: one rate before a date, another after it. Judged by its bootstrap likelihood ratio only.

theta is (position of the step, share of the events before it). On either side at least max(5, a tenth) of the events; between two
events the likelihood is convex in the date of the step, so its top is at an event: just after it, or just before it.
"""

from __future__ import annotations

import numpy as np

from .curve import Curve, Floats, Interval, Place, Value, no_same_curve


def fewest(n: int) -> int:
    """Events that must stand on each side: five, and a tenth of all."""
    return max(5, -(-n // 10))


def estimate(x: Floats, v: Floats) -> Floats:
    """(position, share before) (..., 2), NaN where no step is allowed."""
    n = x.shape[-1]
    least = fewest(n)
    if n < 2 * least:
        return np.full((*x.shape[:-1], 2), np.nan)
    before = np.arange(least, n - least + 1)  # events before the step
    share = before / n
    apart = v[..., before - 1] > v[..., before]
    base = share * np.log(share) + (1.0 - share) * np.log1p(-share)
    values, spots = [], []
    for event in (before - 1, before):  # just after the last event of the first part; just before the first event of the second
        at, rest = x[..., event], v[..., event]
        value = base - share * np.log(at) - (1.0 - share) * np.log(rest)
        values.append(np.where(apart, value, -np.inf))
        spots.append(at)
    value, spot = np.concatenate(values, axis=-1), np.concatenate(spots, axis=-1)
    best = value.argmax(axis=-1)[..., None]
    top = np.take_along_axis(value, best, axis=-1)
    theta = np.concatenate([np.take_along_axis(spot, best, axis=-1), share[best % len(share)]], axis=-1)
    return np.where(np.isfinite(top), theta, np.nan)


def _densities(theta: Floats) -> tuple[Floats, Floats, Floats]:
    at, share = theta[..., :1], theta[..., 1:]
    return at, share / at, (1.0 - share) / (1.0 - at)


def likelihood_gain(theta: Floats, n: int) -> Floats:
    """Log-likelihood over the steady law's; the step's own event belongs to the side that the fit gave it."""
    at, share = theta[..., 0], theta[..., 1]
    return np.asarray(n * (share * np.log(share / at) + (1.0 - share) * np.log((1.0 - share) / (1.0 - at))))


def log_density(theta: Floats, x: Floats, v: Floats) -> Floats:
    """Log density at each position: the first share·n events, in order, are those before the step."""
    _, before, after = _densities(theta)
    first = np.rint(theta[..., 1:] * x.shape[-1])
    return np.where(np.arange(x.shape[-1]) < first, np.log(before), np.log(after))


def cumulative(theta: Floats, x: Floats, v: Floats) -> tuple[Floats, Floats]:
    """Piecewise linear share before each position, and the rest."""
    at, before, after = _densities(theta)
    early = x <= at
    return np.where(early, x * before, 1.0 - v * after), np.where(early, 1.0 - x * before, v * after)


def quantile(theta: Floats, u: Floats, c: Floats) -> tuple[Floats, Floats]:
    """Positions at cumulated shares."""
    _, before, after = _densities(theta)
    early = u <= theta[..., 1:]
    return np.where(early, u / before, 1.0 - c / after), np.where(early, 1.0 - u / before, c / after)


def natural(theta: Floats, place: Place) -> dict[str, Value]:
    """The year of the step, and events per year before and after it."""
    if not np.isfinite(theta).all():
        return {"year": None, "before": None, "after": None}
    _, before, after = _densities(theta)
    scale = place.n / place.span
    return {"year": place.start + place.span * float(theta[0]), "before": scale * float(before[0]), "after": scale * float(after[0])}


def interval(theta: Floats, x: Floats, v: Floats, place: Place, critical: float) -> dict[str, Interval]:
    """None: the likelihood of a step is not regular, and no profile interval has its stated coverage."""
    return {"year": (None, None), "before": (None, None), "after": (None, None)}


CURVE = Curve(
    name="step",
    parameters=("year", "before", "after"),
    k=3,
    regular=False,
    formula="before until year, after from then on",
    estimate=estimate,
    log_density=log_density,
    cumulative=cumulative,
    quantile=quantile,
    natural=natural,
    interval=interval,
    same_curve=no_same_curve,
)
