# SPDX-License-Identifier: Apache-2.0
"""The hyperbolic rate, a/(t_star - t): it would pass every bound at t_star, which lies after the present.

theta is tau = ln((t_star - present)/window), +inf where the likelihood only rises towards t_star -> infinity: then the law is the
steady one. Near the singular date nothing is observed: t_star is a property of the curve, no forecast.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from .curve import Curve, Floats, Interval, Place, Value, bisect

FAR = 14.0  # ln of t_star - present in windows beyond which the law cannot be told from the steady one
DEEP = -5000.0  # as near the present as the search goes
CELLS = 4_000_000


def mean_log_density(tau: Floats, v: Floats) -> Floats:
    """Log-likelihood per event on the unit window. tau (...), v (..., n)."""
    tau = np.asarray(tau, dtype=float)
    here = np.where(np.isfinite(tau), tau, 0.0)[..., None]
    sigma = np.exp(np.minimum(here, 700.0))
    wide = here > 0
    # a wide and a narrow form of the same sum, each without loss
    large, small = np.where(wide, sigma, 1.0), np.where(wide, 0.0, sigma)
    value = np.where(
        wide[..., 0],
        -np.log1p(v / large).mean(axis=-1) - np.log(large * np.log1p(1.0 / large))[..., 0],
        -np.log(v + small).mean(axis=-1) - np.log(_log_ratio(here))[..., 0],
    )
    return np.where(np.isfinite(tau), value, 0.0)


def _log_ratio(tau: Floats) -> Floats:
    """ln(1 + 1/sigma)."""
    return np.logaddexp(0.0, -tau)


def _score(tau: Floats, v: Floats) -> tuple[Floats, Floats]:
    """Derivative of the mean log-likelihood in tau, and its derivative."""
    sigma = np.exp(tau)
    length = _log_ratio(tau)
    part = sigma[..., None] / (sigma[..., None] + v)
    p = 1.0 / ((1.0 + sigma) * length)
    slope_p = p * (p - sigma / (1.0 + sigma))
    mean = part.mean(axis=-1)
    return p - mean, slope_p - (mean - (part * part).mean(axis=-1))


def estimate(x: Floats, v: Floats) -> Floats:
    """tau (..., 1): a grid over the whole range, since the likelihood may have two humps, then Newton inside the best cell."""
    flat = v.reshape(-1, v.shape[-1])
    rows = max(1, CELLS // max(flat.shape[-1], 1))
    out = np.concatenate([_estimate(flat[i : i + rows]) for i in range(0, len(flat), rows)]) if len(flat) else np.empty(0)
    return out.reshape(*v.shape[:-1], 1)


def _estimate(v: Floats) -> Floats:
    lowest = float(np.log(max(v.min(), 1e-300))) - 3.0
    grid = np.append(np.arange(lowest, 3.0, 1.0), [3.0, 5.0, 8.0, FAR])
    best, where = np.zeros(len(v)), np.full(len(v), len(grid))  # the steady law, at infinity
    for i, tau in enumerate(grid):
        value = mean_log_density(np.full(len(v), tau), v)
        better = value > best
        best, where = np.where(better, value, best), np.where(better, i, where)
    # a likelihood that still rises at the last point, or falls from infinity on, has its top beyond
    rises = v.mean(axis=-1) < 0.5
    where = np.where((where == len(grid)) & rises, len(grid) - 1, where)
    tau = np.full(len(v), np.inf)
    inside = where < len(grid)
    if not inside.any():
        return tau
    ages, at = v[inside], where[inside]
    low, high = grid[np.maximum(at - 1, 0)], np.append(grid, 2.0 * FAR)[at + 1]
    low = np.where(at == 0, low - 10.0, low)
    now = np.minimum(grid[at], FAR)
    for _ in range(60):
        value, slope = _score(now, ages)
        low, high = np.where(value > 0, now, low), np.where(value > 0, high, now)
        with np.errstate(divide="ignore", invalid="ignore"):
            step = now - value / slope
        good = (slope < 0) & (step > low) & (step < high)
        following = np.where(good, step, 0.5 * (low + high))
        done = np.abs(following - now) <= 1e-13 * (1.0 + np.abs(now))
        now = following
        if done.all():
            break
    tau[inside] = np.where(now >= FAR, np.inf, now)
    return tau


def profile(tau: Floats, v: Floats, critical: Floats | float) -> tuple[Floats, Floats]:
    """Ends of tau between which twice the log-likelihood falls by less than ``critical``: -inf and inf where it never does. tau
    (...), v (..., n).
    """
    top = mean_log_density(tau, v)
    fall = np.broadcast_to(np.asarray(critical, dtype=float) / (2.0 * v.shape[-1]), top.shape)

    def over(at: Floats) -> npt.NDArray[np.bool_]:
        return np.asarray(top - mean_log_density(at, v) > fall)

    centre = np.where(np.isfinite(tau), tau, FAR)
    reach = np.full(top.shape, 0.5)
    while True:
        at = np.maximum(centre - reach, DEEP)
        beyond = over(at)
        if (beyond | (at <= DEEP)).all():
            break
        reach = np.where(beyond, reach, 2.0 * reach)
    low = np.where(beyond, bisect(over, centre, at), -np.inf)
    open_end = ~np.isfinite(tau) | ~over(np.full(top.shape, np.inf))
    reach = np.full(top.shape, 0.5)
    while True:
        at = centre + reach
        beyond = over(at) | open_end
        if (beyond | (at > 60.0)).all():
            break
        reach = np.where(beyond, reach, 2.0 * reach)
    high = np.where(open_end, np.inf, bisect(over, centre, at))
    return low, high


def log_density(theta: Floats, x: Floats, v: Floats) -> Floats:
    """Log density at each position."""
    tau = theta[..., :1]
    flat = ~np.isfinite(tau)
    here = np.where(flat, 0.0, tau)
    return np.where(flat, 0.0, -np.log(v + np.exp(here)) - np.log(_log_ratio(here)))


def cumulative(theta: Floats, x: Floats, v: Floats) -> tuple[Floats, Floats]:
    """ln((sigma + 1)/(sigma + v))/ln(1 + 1/sigma), and its rest."""
    tau = theta[..., :1]
    flat = ~np.isfinite(tau)
    here = np.where(flat, 0.0, tau)
    sigma, length = np.exp(here), _log_ratio(here)
    rest = _log1p_ratio(v, here, sigma) / length
    return np.where(flat, x, np.log1p(x / (sigma + v)) / length), np.where(flat, v, rest)


def _log1p_ratio(v: Floats, tau: Floats, sigma: Floats) -> Floats:
    """ln(1 + v/sigma), also where sigma is below the smallest number."""
    with np.errstate(divide="ignore"):
        return np.asarray(np.logaddexp(0.0, np.log(v) - tau))


def quantile(theta: Floats, u: Floats, c: Floats) -> tuple[Floats, Floats]:
    """Positions at cumulated shares."""
    tau = theta[..., :1]
    flat = ~np.isfinite(tau)
    here = np.where(flat, 0.0, tau)
    power = c * _log_ratio(here)
    with np.errstate(divide="ignore"):
        # sigma (exp(power) - 1), in logs
        v = np.exp(here + power + np.log(-np.expm1(-power)))
    v = np.clip(np.where(flat, c, v), 0.0, 1.0)
    return 1.0 - v, v


def natural(theta: Floats, place: Place) -> dict[str, Value]:
    """The singular date as a year; None at infinity."""
    return {"t_star": _year(float(theta[0]), place)}


def _year(tau: float, place: Place) -> Value:
    return None if not tau < np.inf else place.present + place.span * float(np.exp(tau))


def interval(theta: Floats, x: Floats, v: Floats, place: Place, critical: float) -> dict[str, Interval]:
    """Profile interval of t_star: the upper end is None (unbounded) where the steady law lies inside."""
    low, high = profile(theta[0], v, critical)
    return {"t_star": (_year(float(low), place), _year(float(high), place))}


def same_curve(parameters: dict[str, Value], place: Place) -> str | None:
    """A steady rate seen through a memory that fades as a power of age; with s -> 0, picking evenly per unit of log age."""
    date = parameters["t_star"]
    if date is None:
        return "steady (the best singular date is infinitely far)"
    return (
        f"recall_decay: a steady rate of which 1/(1 + age/s) is remembered, s = t_star − present = {date - place.present:.4g} years; "
        "with s → 0 the same as log_uniform, picking evenly per unit of log age"
    )


CURVE = Curve(
    name="hyperbolic",
    parameters=("t_star",),
    k=2,
    regular=True,
    formula="a/(t_star − t)",
    estimate=estimate,
    log_density=log_density,
    cumulative=cumulative,
    quantile=quantile,
    natural=natural,
    interval=interval,
    same_curve=same_curve,
)
