# SPDX-License-Identifier: Apache-2.0
"""The hyperbolic law with its exponent free, a/(t_star - t)^p: on request only, and never a headline.

Its two parameters trade against one another: with t_star -> infinity it is the log-linear law, with t_star -> present a power of
age. So the interval of t_star touches the present or has no upper end for most records of the size of a list, and it says so. For a
given t_star the logarithm of t_star - t has an exponential density on a known stretch, so p has the closed form of the log-linear
law.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.optimize import brentq

from ..record import Window
from .curves import hyperbolic, log_linear
from .positions import Floats, positions
from .rate_laws import CHI2_95

NEAREST, FARTHEST = -46.0, 9.0  # ln of t_star - present in windows; beyond, the limits at either end are reached to all digits
GRID = 441


@dataclass(frozen=True)
class FreeHyperbolic:
    """t_star (year, None at infinity) and p with 95 % profile intervals (None: no end), log-likelihood in events per year, and lr:
    twice its gain over p = 1. touches_present: the interval of t_star reaches the present.
    """

    t_star: float | None
    t_star_low: float | None
    t_star_high: float | None
    p: float | None
    p_low: float | None
    p_high: float | None
    log_likelihood: float | None
    lr: float | None
    touches_present: bool
    n: int
    notes: tuple[str, ...]


def fit_free_hyperbolic(window: Window) -> FreeHyperbolic:
    """Fit t_star and p to the counted events of a window; all None below three events."""
    events = positions(window)
    n, v = events.n, events.v
    if n < 3:
        return FreeHyperbolic(*(None,) * 8, False, n, ("t_star and p need at least three counted events.",))
    taus = np.linspace(NEAREST, FARTHEST, GRID)
    values, _ = _profile(taus, v)
    best = int(np.argmax(values))
    low, high = taus[max(best - 1, 0)], taus[min(best + 1, GRID - 1)]
    for _ in range(60):  # golden section is safe on the single hump inside one cell of the grid
        a, b = high - 0.6180339887498949 * (high - low), low + 0.6180339887498949 * (high - low)
        (at_a, at_b), _ = _profile(np.array([a, b]), v)
        low, high = (low, b) if at_a > at_b else (a, high)
    tau = 0.5 * (low + high)
    top_array, p_array = _profile(np.array([tau]), v)
    top, p = float(top_array[0]), float(p_array[0])
    at_infinity, at_present = best == GRID - 1, best == 0
    fall = 2.0 * n * (top - values) - CHI2_95
    inside = np.nonzero(fall <= 0)[0]
    first, last = (int(inside[0]), int(inside[-1])) if len(inside) else (best, best)
    star_low = (
        events.present if first == 0 else _year(_crossing(taus[first - 1], min(taus[first], tau), top, v), events.present, events.span)
    )
    star_high = (
        None if last == GRID - 1 else _year(_crossing(taus[last + 1], max(taus[last], tau), top, v), events.present, events.span)
    )
    p_low, p_high = (None, None) if at_infinity or at_present else _exponent_interval(p, top, taus, v)
    base = float(hyperbolic.mean_log_density(hyperbolic.estimate(events.x, v)[0], v))
    notes = ["With p free t_star is no headline: it trades against p."]
    if at_infinity:
        notes.append("The best t_star is infinitely far: the law is the log-linear one.")
    return FreeHyperbolic(
        t_star=None if at_infinity else _year(tau, events.present, events.span),
        t_star_low=star_low,
        t_star_high=star_high,
        p=None if at_infinity else p,
        p_low=p_low,
        p_high=p_high,
        log_likelihood=n * float(np.log(n / events.span)) - n + n * top,
        lr=max(0.0, 2.0 * n * (top - base)),
        touches_present=first == 0,
        n=n,
        notes=tuple(notes),
    )


def _year(tau: float, present: float, span: float) -> float:
    return present + span * float(np.exp(tau))


def _profile(taus: Floats, v: Floats) -> tuple[Floats, Floats]:
    """Mean log-likelihood on the unit window with p at its best, and that p, for each tau (q,)."""
    here = taus[:, None]
    length = np.logaddexp(0.0, -taus)
    y = np.logaddexp(0.0, np.log(v) - here) / length[:, None]
    mean = y.mean(axis=1)
    k = log_linear.growth(1.0 - mean, mean)
    value = log_linear.mean_log_density(k, 1.0 - mean, mean) - np.log(v + np.exp(here)).mean(axis=1) - np.log(length)
    return np.asarray(value), 1.0 - k / length


def _crossing(outside: float, inside: float, top: float, v: Floats) -> float:
    n = len(v)
    return float(brentq(lambda t: 2.0 * n * (top - float(_profile(np.array([t]), v)[0][0])) - CHI2_95, outside, inside, xtol=1e-10))


def _exponent_interval(p: float, top: float, taus: Floats, v: Floats) -> tuple[float | None, float | None]:
    """Ends of p with t_star at its best for each p; None where none is found within 50 of the estimate."""
    n = len(v)

    def values(at: float, t: Floats) -> Floats:
        length = np.logaddexp(0.0, -t)
        mean = (np.logaddexp(0.0, np.log(v) - t[:, None]) / length[:, None]).mean(axis=1)
        value = log_linear.mean_log_density((1.0 - at) * length, 1.0 - mean, mean)
        return np.asarray(value - np.log(v + np.exp(t[:, None])).mean(axis=1) - np.log(length))

    def fall(at: float) -> float:
        coarse = values(at, taus)
        i = int(coarse.argmax())
        fine = taus
        for _ in range(4):  # each round narrows the cell tenfold
            fine = np.linspace(fine[max(i - 1, 0)], fine[min(i + 1, len(fine) - 1)], 21)
            coarse = values(at, fine)
            i = int(coarse.argmax())
        return 2.0 * n * (top - float(coarse.max())) - CHI2_95

    out: list[float | None] = []
    for side in (-1.0, 1.0):
        reach, end = 0.05, None
        while reach < 50.0:
            if fall(p + side * reach) > 0:
                end = float(brentq(fall, p, p + side * reach, xtol=1e-8)) if fall(p) < 0 else p
                break
            reach *= 1.5
        out.append(end)
    return out[0], out[1]
