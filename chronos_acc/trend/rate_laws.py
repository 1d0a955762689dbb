# SPDX-License-Identifier: Apache-2.0
"""Rate laws fitted to one window: estimates, intervals, weights, and whether each law fits at all.

log L = sum ln rate(t_i) - integral of the rate over the window, in events per year, without n!. Intervals are profile likelihoods,
twice: Poisson, and robust against renewal spacing: the likelihood may fall further, by the dispersion of the spacing
(``robust_critical``). Fit has two sides: ``fit_p_shape``, Anderson-Darling on the positions rescaled by the law, which sees a wrong
law; ``fit_p_clustering``, Kolmogorov-Smirnov on the rescaled intervals against the exponential (Brown et al. 2002), which sees
dependence. Both by parametric bootstrap in which every replicate is fitted anew.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np
from scipy.special import gammaincc, stdtrit

from ..progress import Tell, silent
from ..record import Window
from . import kernels
from .curves import CURVES, Curve, Place, log_linear, step
from .positions import Floats, Positions, positions

if TYPE_CHECKING:
    import pandas as pd

CHI2_95 = 3.841458820694124  # upper 5 % point of chi-square on one degree of freedom
OF_THE_LAW = (
    "log_likelihood", "aicc", "bic", "weight", "lr", "lr_p", "fit_p_shape", "fit_p_clustering", "rate_at_start", "rate_now",
    "doubling_time", "same_curve_as", "formula", "n", "k",
)  # fmt: skip
CELLS = 2_000_000  # bootstrap replicates are made in chunks of about this many cells


@dataclass(frozen=True)
class LawRow:
    """One fitted law. Objects hold one value a parameter, None where unbounded or not computed; rates per year, dates in decimal
    years.

    low and high: 95 % profile interval; low_robust and high_robust: the same, robust against renewal spacing. aicc is None where n
    <= k + 1. weight: Akaike weight among the regular laws. lr and lr_p: twice the log-likelihood over the steady law, and its p
    (chi-square; hyperbolic: half of it, since steady lies on the boundary; step: bootstrap). doubling_time in years, negative where
    the rate halves.
    """

    law: str
    formula: str
    n: int
    k: int
    parameters: dict[str, float | None]
    low: dict[str, float | None]
    high: dict[str, float | None]
    low_robust: dict[str, float | None]
    high_robust: dict[str, float | None]
    log_likelihood: float | None
    aicc: float | None
    bic: float | None
    weight: float | None
    lr: float | None
    lr_p: float | None
    fit_p_shape: float | None
    fit_p_clustering: float | None
    rate_at_start: float | None
    rate_now: float | None
    doubling_time: float | None
    same_curve_as: str | None


@dataclass(frozen=True)
class LawsResult:
    """All laws on one window. dispersion: squared coefficient of variation of the closed intervals rescaled by each law, None below
    two intervals.
    """

    rows: tuple[LawRow, ...]
    dispersion: dict[str, float | None]
    n: int
    seed: int
    replicates: int
    notes: tuple[str, ...] = field(default=())

    def row(self, law: str) -> LawRow:
        """The row of one law, by name."""
        return next(r for r in self.rows if r.law == law)

    def to_frame(self) -> pd.DataFrame:
        """One row a law and parameter: law, parameter, estimate, low, high, low_robust, high_robust, then what belongs to the law
        as a whole.
        """
        import pandas as pd

        lines = []
        for r in self.rows:
            for name, value in r.parameters.items():
                line: dict[str, object] = {"law": r.law, "parameter": name, "estimate": value, "low": r.low[name], "high": r.high[name]}
                line.update(low_robust=r.low_robust[name], high_robust=r.high_robust[name])
                line.update({key: getattr(r, key) for key in OF_THE_LAW})
                lines.append(line)
        frame = pd.DataFrame(lines)
        texts = ("law", "parameter", "same_curve_as", "formula")
        return frame.astype({c: float for c in frame.columns if c not in texts and c not in ("n", "k")})


@dataclass(frozen=True)
class Fit:
    """A law's maximum likelihood on scaled positions: theta (q,) scaled parameters (see the law), log-likelihood in events per year."""

    curve: Curve
    theta: Floats
    place: Place
    parameters: dict[str, float | None]
    log_likelihood: float
    share: Floats  # (n,) cumulated share before each event
    rest: Floats  # (n,) one minus it


def fit_curve(curve: Curve, events: Positions) -> Fit | None:
    """Fit one law; None where it has no maximum (no event, or too few for a step)."""
    if not events.n:
        return None
    theta = curve.estimate(events.x, events.v)
    if not np.isfinite(theta[~np.isinf(theta)]).all():
        return None
    place = Place(events.start, events.span, events.present, events.n)
    n = events.n
    total = n * np.log(n / events.span) - n + float(curve.log_density(theta, events.x, events.v).sum())
    share, rest = curve.cumulative(theta, events.x, events.v)
    return Fit(curve, theta, place, curve.natural(theta, place), float(total), share, rest)


def rescaled_intervals(share: Floats, rest: Floats, opened: bool, closed: bool) -> Floats:
    """Closed intervals (..., r) in units of the mean under the law: differences of n times the cumulated share, ends included where
    a milestone stands.
    """
    n = share.shape[-1]
    edge = np.zeros((*share.shape[:-1], 1))
    left, right = ([edge] if opened else []), ([1.0 + edge] if closed else [])
    up = np.concatenate([*left, share, *right], axis=-1)
    down = np.concatenate([*(1.0 - e for e in left), rest, *(1.0 - e for e in right)], axis=-1)
    gaps = np.where(down[..., :-1] < 0.5, down[..., :-1] - down[..., 1:], up[..., 1:] - up[..., :-1])
    return np.asarray(n * np.maximum(gaps, 0.0))


def dispersion(share: Floats, rest: Floats, opened: bool, closed: bool) -> Floats:
    """Squared coefficient of variation of the rescaled closed intervals (...), NaN below two of them: 1 for a Poisson process."""
    gaps = rescaled_intervals(share, rest, opened, closed)
    if gaps.shape[-1] < 2:
        return np.full(gaps.shape[:-1], np.nan)
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(kernels.variation(gaps) ** 2)


def robust_critical(ratio: float, n: int, intervals: int) -> float:
    """How far twice the log-likelihood may fall in the 95 % interval that allows for renewal spacing.

    The scale is the dispersion CV² of the closed intervals rescaled by the fitted law, as for a quasi-likelihood (McCullagh and
    Nelder 1989). Being estimated from r intervals it takes F(1, r - 1) in place of chi-square, and it is too small by about 2 CV²/n
    of itself where spacing is skew (found by simulation, tests/simulate/coverage.py: with chi-square and no correction the interval
    covers 87 to 92 % at 10 and 30 events, with both 93 to 95 %).
    """
    return float(stdtrit(intervals - 1, 0.975)) ** 2 * ratio * (1.0 + 2.0 * ratio / n)


def growth_interval(window: Window) -> tuple[float | None, float | None, float | None, float | None, float | None]:
    """Growth of the log-linear law per year: estimate, low, high, low_robust, high_robust (95 % profile intervals). None where not
    computed.
    """
    events = positions(window)
    fit = fit_curve(log_linear.CURVE, events)
    if fit is None:
        return None, None, None, None, None
    age, position = events.v.mean(), events.x.mean()
    spread = float(dispersion(fit.share, fit.rest, events.opened, events.closed))
    best, low, high = (float(a) / events.span for a in log_linear.profile(age, position, events.n, CHI2_95))
    if not (np.isfinite(spread) and spread > 0):
        return best, low, high, None, None
    critical = robust_critical(spread, events.n, len(events.intervals))
    _, low_robust, high_robust = (float(a) / events.span for a in log_linear.profile(age, position, events.n, critical))
    return best, low, high, low_robust, high_robust


def fit_laws(window: Window, *, seed: int, replicates: int = 499, tell: Tell = silent) -> LawsResult:
    """All laws on one window; ``replicates`` 0 leaves the bootstrap p-values out (None). Empty windows give rows of None."""
    events = positions(window)
    notes: list[str] = []
    if window.opened_by_milestone and events.n:
        notes.append(
            "power_law counts time from the start; here the first milestone opened the window, so its exponent has no interval "
            "and no part in the weights. Give --start to use it."
        )
    fits: list[Fit | None] = []
    for curve in CURVES:
        fits.append(fit_curve(curve, events))
        if fits[-1] is None and events.n and curve is step.CURVE:
            notes.append(f"step needs at least {step.fewest(events.n)} events on each side; {events.n} are counted.")
    rows: list[LawRow] = []
    spread: dict[str, float | None] = {}
    for i, (curve, fit) in enumerate(zip(CURVES, fits, strict=True)):
        tell(f"rate law {curve.name}", i / len(CURVES))
        row, ratio = _row(curve, fit, events, fits[0], window, seed, replicates, i)
        rows.append(row)
        spread[curve.name] = ratio
    weights = _weights(rows, window.opened_by_milestone)
    rows = [_with_weight(r, weights.get(r.law)) for r in rows]
    hyperbolic = next(r for r in rows if r.law == "hyperbolic")
    if hyperbolic.log_likelihood is not None:
        if hyperbolic.parameters["t_star"] is None:
            notes.append("hyperbolic fits best with its singular date infinitely far: it is the steady law here.")
        else:
            notes.append(
                "t_star is a property of the fitted curve, not a forecast: no record speaks of a time at which nothing has been observed."
            )
    return LawsResult(tuple(rows), spread, events.n, seed, replicates, tuple(notes))


def _row(
    curve: Curve, fit: Fit | None, events: Positions, base: Fit | None, window: Window, seed: int, replicates: int, stream: int
) -> tuple[LawRow, float | None]:
    nothing: dict[str, float | None] = dict.fromkeys(curve.parameters)
    if fit is None or base is None:
        return LawRow(curve.name, curve.formula, events.n, curve.k, *(nothing,) * 5, *(None,) * 12), None
    n, k = events.n, curve.k
    ratio = float(dispersion(fit.share, fit.rest, events.opened, events.closed))
    has_interval = curve.regular and not (curve.name == "power_law" and window.opened_by_milestone)
    plain = curve.interval(fit.theta, events.x, events.v, fit.place, CHI2_95) if has_interval else {}
    robust = {}
    if has_interval and np.isfinite(ratio) and ratio > 0:
        robust = curve.interval(fit.theta, events.x, events.v, fit.place, robust_critical(ratio, n, len(events.intervals)))
    lr = max(0.0, 2.0 * (fit.log_likelihood - base.log_likelihood)) if curve.name != "steady" else None
    shape, clustering = _fit_p(fit, events, seed, replicates, stream)
    start_rate, now_rate = _rates(fit)
    growth = fit.parameters.get("growth")
    row = LawRow(
        law=curve.name,
        formula=curve.formula,
        n=n,
        k=k,
        parameters=fit.parameters,
        low={p: plain.get(p, (None, None))[0] for p in curve.parameters},
        high={p: plain.get(p, (None, None))[1] for p in curve.parameters},
        low_robust={p: robust.get(p, (None, None))[0] for p in curve.parameters},
        high_robust={p: robust.get(p, (None, None))[1] for p in curve.parameters},
        log_likelihood=fit.log_likelihood,
        aicc=-2.0 * fit.log_likelihood + 2.0 * k + 2.0 * k * (k + 1) / (n - k - 1) if n > k + 1 else None,
        bic=-2.0 * fit.log_likelihood + k * float(np.log(n)),
        weight=None,
        lr=lr,
        lr_p=None if lr is None else _lr_p(curve, lr, n, seed, replicates),
        fit_p_shape=shape,
        fit_p_clustering=clustering,
        rate_at_start=start_rate,
        rate_now=now_rate,
        doubling_time=float(np.log(2.0)) / growth if growth else None,
        same_curve_as=curve.same_curve(fit.parameters, fit.place),
    )
    return row, ratio if np.isfinite(ratio) else None


def _rates(fit: Fit) -> tuple[float | None, float | None]:
    """Events per year at the start and at the present; None where the law has no finite rate there."""
    if fit.curve is step.CURVE:
        return fit.parameters["before"], fit.parameters["after"]
    scale = fit.place.n / fit.place.span
    zero, one = np.zeros(1), np.ones(1)
    with np.errstate(divide="ignore", over="ignore", invalid="ignore"):
        ends = [scale * float(np.exp(fit.curve.log_density(fit.theta, x, v))[0]) for x, v in ((zero, one), (one, zero))]
    return (ends[0] if np.isfinite(ends[0]) else None), (ends[1] if np.isfinite(ends[1]) else None)


def _lr_p(curve: Curve, lr: float, n: int, seed: int, replicates: int) -> float | None:
    if curve is step.CURVE:
        if not replicates:
            return None
        null = null_step_ratios(n, seed, replicates)
        return float((1 + (null >= lr * (1 - 1e-12)).sum()) / (replicates + 1))
    tail = float(gammaincc(0.5, lr / 2.0))
    return tail if curve.name != "hyperbolic" else (0.5 * tail if lr > 0 else 1.0)


@lru_cache(maxsize=64)
def null_step_ratios(n: int, seed: int, replicates: int) -> Floats:
    """(replicates,) likelihood ratios of step against steady under a steady rate, n events; kept, since it depends on n alone."""
    out = [
        2.0 * step.likelihood_gain(step.estimate(u, c), n)
        for u, c in _sorted_uniforms(n, replicates, np.random.default_rng([seed, 5401]))
    ]
    joined = np.concatenate(out)
    joined.setflags(write=False)
    return joined


def _sorted_uniforms(n: int, replicates: int, rng: np.random.Generator) -> Iterator[tuple[Floats, Floats]]:
    """Chunks (rows, n) of sorted uniforms and one minus them, never 0 or 1."""
    rows = max(1, CELLS // max(n, 1))
    for first in range(0, replicates, rows):
        u = rng.random((min(rows, replicates - first), n))
        np.clip(u, 1e-16, 1.0 - 1.2e-16, out=u)
        u.sort(axis=-1)
        yield u, 1.0 - u


def _fit_p(fit: Fit, events: Positions, seed: int, replicates: int, stream: int) -> tuple[float | None, float | None]:
    """Upper-tail bootstrap p of Anderson-Darling on positions and of Kolmogorov-Smirnov on rescaled intervals; every replicate is
    fitted anew.
    """
    if not replicates or events.n < 2:
        return None, None
    shape, clustering = _fit_statistics(fit.share, fit.rest, events.opened, events.closed)
    more_shape = more_clustering = 0
    curve = fit.curve
    for u, c in _sorted_uniforms(events.n, replicates, np.random.default_rng([seed, 5400, stream])):
        x, v = curve.quantile(fit.theta, u, c)
        x, v = np.maximum(x, 1e-300), np.maximum(v, 1e-300)
        share, rest = curve.cumulative(curve.estimate(x, v), x, v)
        null_shape, null_clustering = _fit_statistics(share, rest, events.opened, events.closed)
        more_shape += int((null_shape >= shape).sum())
        more_clustering += int((null_clustering >= clustering).sum())
    p_shape = (1 + more_shape) / (replicates + 1)
    return p_shape, (1 + more_clustering) / (replicates + 1) if np.isfinite(clustering) else None


def _fit_statistics(share: Floats, rest: Floats, opened: bool, closed: bool) -> tuple[Floats, Floats]:
    tiny = 1e-300
    shape = kernels.anderson_darling(np.maximum(share, tiny), np.maximum(rest, tiny))
    gaps = rescaled_intervals(share, rest, opened, closed)
    if gaps.shape[-1] < 2:
        return shape, np.full(shape.shape, np.nan)
    return shape, kernels.kolmogorov_smirnov(np.sort(-np.expm1(-gaps), axis=-1))


def _weights(rows: list[LawRow], opened_by_milestone: bool) -> dict[str, float]:
    """Akaike weights by AICc over the regular laws; none where a law among them has no AICc."""
    regular = {c.name for c in CURVES if c.regular and not (c.name == "power_law" and opened_by_milestone)}
    chosen = [(r.law, r.aicc) for r in rows if r.law in regular]
    values = np.array([np.nan if a is None else a for _, a in chosen])
    if not len(values) or not np.isfinite(values).all():
        return {}
    relative = np.exp(-0.5 * (values - values.min()))
    return {law: float(w) for (law, _), w in zip(chosen, relative / relative.sum(), strict=True)}


def _with_weight(row: LawRow, weight: float | None) -> LawRow:
    return replace(row, weight=weight)
