# SPDX-License-Identifier: Apache-2.0
"""The fitted capture curve: how likely each list names a milestone of a given age, and what steady lists with that curve would show.

Joint likelihood of dates and mentions, conditional on being named at all: list j names a milestone of age a with logit p_j(a) = alpha_j - beta a*, and the rate of
milestones grows as exp(g x). Lists that derive from one another count as one. The curve comes with g free, so overlap decides it; its uncertainty is carried on.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
import numpy.typing as npt
from scipy.optimize import minimize
from scipy.special import expit

from ..record import Record
from ..trend.kernels import growth_of_mean_age

Floats = npt.NDArray[np.float64]
NODES = 240
_WEAK = 8.0  # sd of a weak normal prior on logits, so that a list naming everything or nothing has a finite fit


@dataclass(frozen=True)
class CaptureCurve:
    """theta: growth times window, one logit at age 0 for each of k independent lists, and beta; covariance of theta; form of a* "age" or "log_age"; AIC."""

    theta: Floats
    covariance: Floats
    form: str
    aic: float
    smallest_age: float
    span: float

    def logits(self, theta: Floats, ages: Floats) -> Floats:
        """(..., k, q) logits at ages (q,) for parameters theta (..., k + 2)."""
        star = _star(ages, self.form, self.smallest_age, self.span)
        return np.asarray(theta[..., 1:-1, None] - theta[..., -1:, None] * star)

    def probability(self, ages: Floats) -> Floats:
        """(k, q) fitted probability that each list names a milestone of these ages."""
        return np.asarray(expit(self.logits(self.theta, ages)))


def independent(record: Record) -> tuple[npt.NDArray[np.bool_], tuple[str, ...]]:
    """(m, g) mentions by independent groups of lists, and the groups' names."""
    labels = list(dict.fromkeys(record.group.tolist()))
    columns = [record.mentions[:, record.group == g].any(axis=1) for g in labels]
    names = tuple("+".join(n for n, x in zip(record.lists, record.group, strict=True) if x == g) for g in labels)
    return np.array(columns, dtype=bool).T.reshape(len(record), len(labels)), names


def fit(record: Record) -> CaptureCurve | None:
    """The form with the lower AIC; None where fewer than two independent lists or fewer than three shared milestones speak."""
    window = record.window
    mentions, names = independent(record)
    inside = window.index[window.opening : window.opening + window.n]
    y = mentions[inside]
    if len(names) < 2 or window.n < ENOUGH_COUNTED or int((y.sum(axis=1) > 1).sum()) < ENOUGH_SHARED:
        return None
    named = y.any(axis=0)
    if named.sum() < 2:
        return None
    ages = window.present - window.counted
    fits = [_fit_form(form, ages, y[:, named].astype(float), window.span, window.finest_unit) for form in ("age", "log_age")]
    return min(fits, key=lambda f: f.aic)


ENOUGH_COUNTED = 5
ENOUGH_SHARED = 3


def _star(ages: Floats, form: str, smallest: float, span: float) -> Floats:
    return np.asarray(ages / span if form == "age" else np.log1p(ages / smallest))


@lru_cache(maxsize=1)
def _legendre() -> tuple[Floats, Floats]:
    x, w = np.polynomial.legendre.leggauss(NODES)
    return x, w


def _quadrature(smallest: float, span: float) -> tuple[Floats, Floats]:
    """Ages and log weights: Gauss-Legendre in log(1 + age/smallest), so that a crowd of events near the present is resolved in any window."""
    x, w = _legendre()
    top = float(np.log1p(span / smallest))
    s = (x + 1) / 2 * top
    return smallest * np.expm1(s), np.log(w * top / 2) + s + np.log(smallest / span)


def _fit_form(form: str, ages: Floats, y: Floats, span: float, unit: float) -> CaptureCurve:
    n, k = y.shape
    smallest = float(max(ages.min(), unit / 2, span * 1e-12))
    nodes, log_weight = _quadrature(smallest, span)
    star_nodes, star = _star(nodes, form, smallest, span), _star(ages, form, smallest, span)
    scale = float(star_nodes.max())
    star_nodes, star = star_nodes / scale, star / scale
    x_nodes, x = 1.0 - nodes / span, 1.0 - ages / span
    totals, sum_x, sum_y_star = y.sum(axis=0), float(x.sum()), float((y * star[:, None]).sum())

    def negative(theta: Floats) -> tuple[float, Floats]:
        g, alpha, beta = theta[0], theta[1:-1], theta[-1]
        at_events = alpha[None, :] - beta * star[:, None]
        p = expit(at_events)
        value = g * sum_x + float(alpha @ totals) - beta * sum_y_star - float(np.logaddexp(0.0, at_events).sum())
        at_nodes = alpha[None, :] - beta * star_nodes[:, None]
        log_missed = -np.logaddexp(0.0, at_nodes).sum(axis=1)
        log_seen = np.log(np.maximum(-np.expm1(log_missed), 1e-300))
        log_mass = g * x_nodes + log_seen + log_weight
        top = log_mass.max()
        mass = np.exp(log_mass - top)
        total = mass.sum()
        value -= n * (float(np.log(total)) + top)
        share = mass / total
        slope_seen = np.exp(log_missed - log_seen)[:, None] * expit(at_nodes)  # d log(seen) / d logit of each list
        gradient = np.empty_like(theta)
        gradient[0] = sum_x - n * float(share @ x_nodes)
        gradient[1:-1] = totals - p.sum(axis=0) - n * (share @ slope_seen)
        gradient[-1] = -sum_y_star + float((p * star[:, None]).sum()) + n * float(share @ (slope_seen.sum(axis=1) * star_nodes))
        prior = np.concatenate([[0.0], theta[1:] / _WEAK**2])
        return -(value - 0.5 * float((theta[1:] ** 2).sum()) / _WEAK**2), -(gradient - prior)

    rate = np.clip(totals / n, 0.02, 0.98)
    start = np.concatenate([[float(np.clip(growth_of_mean_age(np.array(1.0 - sum_x / n)), -1e5, 1e5))], np.log(rate / (1 - rate)), [0.0]])
    best = minimize(negative, start, jac=True, method="BFGS", options={"maxiter": 400, "gtol": 1e-6 * n})
    theta = np.asarray(best.x)
    covariance = _covariance(negative, theta)
    theta[-1] /= scale
    covariance[-1, :] /= scale
    covariance[:, -1] /= scale
    return CaptureCurve(theta, covariance, form, 2.0 * float(best.fun) + 2.0 * (k + 2), smallest, span)


def _covariance(negative: object, theta: Floats) -> Floats:
    """Inverse of the observed information, from differences of the gradient; made positive where the surface is flat."""
    d = len(theta)
    hessian = np.empty((d, d))
    for i in range(d):
        step = 1e-4 * max(1.0, abs(theta[i]))
        up, down = theta.copy(), theta.copy()
        up[i] += step
        down[i] -= step
        hessian[i] = (negative(up)[1] - negative(down)[1]) / (2 * step)  # type: ignore[operator]
    values, vectors = np.linalg.eigh((hessian + hessian.T) / 2)
    return np.asarray((vectors / np.maximum(values, 1e-3)) @ vectors.T)


def at_least(logits: Floats, threshold: int) -> Floats:
    """(..., q) probability that at least ``threshold`` of the lists name a milestone, from logits (..., k, q): Poisson-binomial by recursion."""
    k = logits.shape[-2]
    if threshold > k:
        return np.zeros(logits.shape[:-2] + logits.shape[-1:])
    p = expit(logits)
    exactly = np.zeros((*logits.shape[:-2], threshold, logits.shape[-1]))
    exactly[..., 0, :] = 1.0
    seen = np.zeros(logits.shape[:-2] + logits.shape[-1:])
    for j in range(k):
        here = p[..., j, :]
        seen += exactly[..., threshold - 1, :] * here
        exactly[..., 1:, :] = exactly[..., 1:, :] * (1 - here[..., None, :]) + exactly[..., :-1, :] * here[..., None, :]
        exactly[..., 0, :] *= 1 - here
    return np.asarray(seen)


def steady_growth(curve: CaptureCurve, threshold: int, n: int, span: float, *, rng: np.random.Generator, size: int, uncertain: bool = True) -> Floats:
    """(size,) growth per year that a steady rate shows in n milestones named by at least ``threshold`` lists, in a window of ``span`` years up to the present.

    Each replicate takes its own curve from the law of the fitted parameters, so the band holds both chance and what is not known of the curve.
    """
    nodes, log_weight = _quadrature(min(curve.smallest_age, span / 10), span)
    order = np.argsort(nodes)
    nodes, weight = nodes[order], np.exp(log_weight[order])
    if uncertain:
        values, vectors = np.linalg.eigh(curve.covariance)
        root = vectors * np.sqrt(np.maximum(values, 0.0))
        theta = curve.theta + rng.standard_normal((size, len(curve.theta))) @ root.T
    else:
        theta = np.broadcast_to(curve.theta, (size, len(curve.theta)))
    out = np.empty(size)
    step = max(1, 400_000 // (len(nodes) * (len(curve.theta) - 2)))
    grid = np.concatenate([[0.0], nodes, [span]])
    for first in range(0, size, step):
        seen = at_least(curve.logits(theta[first : first + step], nodes), threshold) * weight
        mass = np.cumsum(seen, axis=1)
        cdf = np.concatenate([np.zeros((len(mass), 1)), (mass - seen / 2) / np.maximum(mass[:, -1:], 1e-300), np.ones((len(mass), 1))], axis=1)
        for i, u in enumerate(rng.random((len(mass), n))):
            out[first + i] = np.interp(u, cdf[i], grid).mean()
    return np.asarray(growth_of_mean_age(np.clip(out / span, 1e-300, 1 - 1e-16)) / span)
