# SPDX-License-Identifier: Apache-2.0
"""One likelihood for growth and for what independent lists missed: methods of capture and recapture with an age effect.

List j names milestone i with probability p, logit p = alpha_j - beta a*, a* a function of age in [0, 1]; a milestone enters the record when
any list names it, pi = 1 - prod(1 - p). With x the position in the window,

    l(g, alpha, beta) = sum_i [g x_i + sum_j y_ij ln p + (1 - y_ij) ln(1 - p)] - n ln integral of exp(g x) pi(a) dx,

which tells growth from forgetting only as far as the lists miss milestones independently; what all lists forget together it cannot see.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ..record import Bools

Floats = npt.NDArray[np.float64]

CHI2_95 = 3.841458820694124
SCALES = ("age", "log_age")
FAR_ALPHA, FAR_BETA = 15.0, 40.0  # logits beyond which a probability is 0 or 1 for any list: a soft wall keeps the maximum finite


@dataclass(frozen=True)
class Sightings:
    """n counted milestones of a window: fraction (n,) ages over the window's length, named (n, t) by t independent lists; ``nodes`` and
    ``weights`` integrate over the fraction; ``floor`` the youngest fraction above zero."""

    fraction: Floats
    named: Bools
    span: float
    floor: float
    nodes: Floats
    weights: Floats

    @classmethod
    def of(cls, ages: Floats, named: Bools, span: float, youngest: float) -> Sightings:
        """From ages in years inside the window; ``youngest`` is the age below which nothing is resolved."""
        fraction = np.asarray(ages, dtype=float) / span
        floor = min(max(float(fraction.min(initial=1.0)), youngest / span, 1e-15), 0.5)
        nodes, weights = _quadrature(floor, max(float((1.0 - fraction).min(initial=1.0)), 1e-9))
        return cls(fraction, np.asarray(named, dtype=bool), span, floor, nodes, weights)

    def stretch(self, scale: str) -> Callable[[Floats], Floats]:
        """a* in [0, 1] of an age fraction: the fraction itself, or log(1 + age/youngest age), scaled to 1 at the start."""
        if scale == "age":
            return lambda f: np.asarray(f, dtype=float)
        top = float(np.log1p(1.0 / self.floor))
        return lambda f: np.asarray(np.log1p(np.asarray(f, dtype=float) / self.floor) / top)


def _quadrature(young: float, old: float) -> tuple[Floats, Floats]:
    """Gauss–Legendre on panels that shrink towards both ends of [0, 1]."""
    down = 2.0 ** -np.arange(1, int(np.ceil(-np.log2(young))) + 5)
    up = 1.0 - 2.0 ** -np.arange(1, int(np.ceil(-np.log2(old))) + 5)
    edges = np.unique(np.concatenate([[0.0, 1.0], down, up, np.arange(1, 16) / 16]))
    x, w = np.polynomial.legendre.leggauss(6)
    half = np.diff(edges)[:, None] / 2
    return (edges[:-1, None] + half * (x + 1)).ravel(), (half * w).ravel()


@dataclass(frozen=True)
class CaptureFit:
    """One maximum on one scale of age. growth per year with its 95 % profile interval (None: unbounded); alpha (t,), beta; aic.

    ``covariance`` (t + 2, t + 2) of (growth times window, alpha, beta), or None where the information matrix is singular.
    """

    scale: str
    growth: float
    low: float | None
    high: float | None
    alpha: Floats
    beta: float
    log_likelihood: float
    aic: float
    sightings: Sightings
    covariance: Floats | None

    def probabilities(self, ages: Floats) -> Floats:
        """(..., t) probability that each list names a milestone of an age in years."""
        z = self.sightings.stretch(self.scale)(np.asarray(ages, dtype=float) / self.sightings.span)
        return np.asarray(1.0 / (1.0 + np.exp(-(self.alpha - self.beta * z[..., None]))))

    def completeness(self, age: float) -> tuple[float, float, float]:
        """Share of the milestones of an age (years) that any list names, with a 95 % interval on the logit scale (delta method; 0 to 1
        where singular)."""
        theta = np.concatenate([[self.growth * self.sightings.span], self.alpha, [self.beta]])
        z = float(self.sightings.stretch(self.scale)(np.array(age / self.sightings.span)))

        def logit(t: Floats) -> float:
            log_missed = -np.logaddexp(0.0, t[1:-1] - t[-1] * z).sum()
            return float(np.log(-np.expm1(log_missed)) - log_missed)

        middle = logit(theta)
        if self.covariance is None:
            return _expit(middle), 0.0, 1.0
        slope = np.array([(logit(theta + e) - logit(theta - e)) / 2e-5 for e in 1e-5 * np.eye(len(theta))])
        half = 1.959963984540054 * float(np.sqrt(max(slope @ self.covariance @ slope, 0.0)))
        return _expit(middle), _expit(middle - half), _expit(middle + half)


def _expit(x: float) -> float:
    return float(1.0 / (1.0 + np.exp(-min(max(x, -700.0), 700.0))))


def fit(sightings: Sightings, scale: str, *, growth: float | None = None, interval: bool = True) -> CaptureFit | None:
    """Maximum likelihood on one scale; ``growth`` (per year) holds it fixed (0: steady). None where the maximum was not found."""
    problem = _Problem.of(sightings, scale)
    fixed = None if growth is None else growth * sightings.span
    starts = [problem.start(b) for b in ((0.0, 2.0) if scale == "age" else (0.0, 4.0))]
    found = [s for s in (problem.climb(s, fixed) for s in starts) if s is not None]
    if not found:
        return None
    theta, top = max(found, key=lambda s: s[1])
    covariance = problem.covariance(theta, fixed is not None)
    low: float | None = None
    high: float | None = None
    if interval and fixed is None:
        low, high = problem.profile(theta, top, covariance)
    k = len(theta) + (0 if fixed is not None else 1)
    return CaptureFit(
        scale,
        float(theta[0]) / sightings.span,
        None if low is None else low / sightings.span,
        None if high is None else high / sightings.span,
        theta[1:-1],
        float(theta[-1]),
        top,
        2.0 * k - 2.0 * top,
        sightings,
        covariance,
    )


@dataclass(frozen=True)
class _Problem:
    """The likelihood and its gradient in theta = (growth times window, alpha (t,), beta)."""

    fraction: Floats
    named: Floats
    z: Floats
    node: Floats
    node_z: Floats
    log_weight: Floats

    @classmethod
    def of(cls, s: Sightings, scale: str) -> _Problem:
        stretch = s.stretch(scale)
        return cls(s.fraction, s.named.astype(float), stretch(s.fraction), s.nodes, stretch(s.nodes), np.log(s.weights))

    def start(self, beta: float) -> Floats:
        share = np.clip(0.8 * self.named.mean(axis=0), 0.02, 0.95)
        return np.concatenate([[0.5], np.log(share / (1 - share)) + beta * self.z.mean(), [beta]])

    def value(self, theta: Floats) -> tuple[float, Floats]:
        """Log-likelihood and gradient. exp(g x) is written as exp(-g age): the constant cancels."""
        g, alpha, beta = theta[0], theta[1:-1], theta[-1]
        n = len(self.fraction)
        eta = alpha - beta * self.z[:, None]
        log_missed = -np.logaddexp(0.0, eta)  # ln(1 - p)
        p = np.exp(eta + log_missed)
        left = self.named - p
        node_eta = alpha - beta * self.node_z[:, None]
        node_missed = -np.logaddexp(0.0, node_eta)
        node_p = np.exp(node_eta + node_missed)
        missed = node_missed.sum(axis=1)
        log_pi = np.log(np.maximum(-np.expm1(missed), 1e-300))
        terms = self.log_weight - g * self.node + log_pi
        peak = terms.max()
        mass = np.exp(terms - peak)
        total = mass.sum()
        share = mass / total
        # d ln pi / d alpha_j = p_j prod(1 - p) / pi
        pull = node_p * np.exp(missed - log_pi)[:, None]
        value = float(-g * self.fraction.sum() + (self.named * eta + log_missed).sum() - n * (peak + np.log(total)))
        gradient = np.empty_like(theta)
        gradient[0] = -self.fraction.sum() + n * float(share @ self.node)
        gradient[1:-1] = left.sum(axis=0) - n * (share @ pull)
        gradient[-1] = -float((left * self.z[:, None]).sum()) + n * float(share @ (pull.sum(axis=1) * self.node_z))
        # the soft wall
        over_alpha = np.sign(alpha) * np.maximum(np.abs(alpha) - FAR_ALPHA - np.abs(beta), 0.0)
        over_beta = np.sign(beta) * max(abs(beta) - FAR_BETA, 0.0)
        value -= float(0.5 * (over_alpha**2).sum() + 0.5 * over_beta**2)
        gradient[1:-1] -= over_alpha
        gradient[-1] -= over_beta - float((np.abs(over_alpha) * np.sign(beta)).sum())
        return value, gradient

    def climb(self, theta: Floats, growth: float | None = None, shape: Floats | None = None) -> tuple[Floats, float] | None:
        """The maximum from a start, growth times window held at ``growth`` where given; ``shape`` guesses the inverse information."""
        from scipy.optimize import minimize

        free = slice(0, len(theta)) if growth is None else slice(1, len(theta))
        base = theta.copy()
        if growth is not None:
            base[0] = growth

        def negative(part: Floats) -> tuple[float, Floats]:
            full = base.copy()
            full[free] = part
            value, gradient = self.value(full)
            return -value, -gradient[free]

        options: dict[str, object] = {"gtol": 1e-6, "maxiter": 400}
        if shape is not None:
            options["hess_inv0"] = shape
        result = minimize(negative, base[free], jac=True, method="BFGS", options=options)
        if not np.isfinite(result.fun):
            return None
        base[free] = result.x
        return base, -float(result.fun)

    def covariance(self, theta: Floats, fixed: bool) -> Floats | None:
        """Inverse of minus the Hessian, by differences of the gradient; None where it is not positive."""
        k = len(theta)
        hessian = np.empty((k, k))
        for i in range(k):
            step = np.zeros(k)
            step[i] = 1e-5 * max(1.0, abs(theta[i]))
            hessian[i] = (self.value(theta + step)[1] - self.value(theta - step)[1]) / (2 * step[i])
        hessian = -(hessian + hessian.T) / 2
        if fixed:
            hessian[0, :] = hessian[:, 0] = 0.0
            hessian[0, 0] = 1.0
        values = np.linalg.eigvalsh(hessian)
        if not values[0] > 1e-10 * values[-1]:
            return None
        inverse = np.linalg.inv(hessian)
        if fixed:
            inverse[0, 0] = 0.0
        return np.asarray(inverse)

    def profile(self, theta: Floats, top: float, covariance: Floats | None) -> tuple[float | None, float | None]:
        """Ends of growth times window where twice the profile log-likelihood has fallen by 3.84; None where it never does within reach."""
        from scipy.optimize import brentq

        width = 2.0 if covariance is None else float(np.clip(1.96 * np.sqrt(covariance[0, 0]), 0.2, 1e4))
        # what the other parameters' information is with growth held: near the maximum the climbs then take few steps
        shape = None if covariance is None else np.linalg.inv(np.linalg.inv(covariance)[1:, 1:])
        shape = None if shape is None else (shape + shape.T) / 2
        if shape is not None and not np.linalg.eigvalsh(shape)[0] > 0:
            shape = None
        ends: list[float | None] = []
        for side in (-1.0, 1.0):
            last = theta

            def drop(g: float) -> float:
                nonlocal last
                start = last.copy()
                start[0] = g
                found = self.climb(start, g, shape)
                if found is None:
                    return CHI2_95
                last = found[0]
                return 2.0 * (top - found[1]) - CHI2_95

            near, reach = float(theta[0]), width
            end: float | None = None
            for _ in range(12):
                far = float(theta[0]) + side * reach
                if drop(far) > 0:
                    end = float(brentq(drop, near, far, xtol=1e-4 * width, rtol=1e-9))
                    break
                near, reach = far, 1.6 * reach
            ends.append(end)
        return ends[0], ends[1]


def simulate(fitted: CaptureFit, n: int, *, rng: np.random.Generator, size: int) -> tuple[Floats, Bools]:
    """``size`` records of n named milestones from a fitted model: ages (size, n) in years, oldest first, and named (size, n, t)."""
    s = fitted.sightings
    order = np.argsort(s.nodes)
    nodes, weights = s.nodes[order], s.weights[order]
    missed = np.log1p(-np.minimum(fitted.probabilities(nodes * s.span), 1 - 1e-16)).sum(axis=1)
    logs = np.log(weights) - fitted.growth * s.span * nodes + np.log(np.maximum(-np.expm1(missed), 1e-300))
    mass = np.exp(logs - logs.max())
    # the mass of each node is spread over its own stretch
    edges = np.concatenate([[0.0], np.cumsum(weights)])
    share = np.concatenate([[0.0], np.cumsum(mass) / mass.sum()])
    fraction = np.interp(rng.random((size, n)), share, edges)
    fraction.sort(axis=1)
    fraction = fraction[:, ::-1]
    ages = fraction * s.span
    p = fitted.probabilities(ages)
    named = np.zeros(p.shape, bool)
    u = rng.random(p.shape)
    for j in range(p.shape[-1]):
        none_yet = ~named[..., :j].any(axis=-1)
        at_least = -np.expm1(np.log1p(-np.minimum(p[..., j:], 1 - 1e-16)).sum(axis=-1))
        chance = np.where(none_yet, p[..., j] / np.maximum(at_least, 1e-300), p[..., j])
        named[..., j] = u[..., j] < chance
    named[..., -1] |= ~named.any(axis=-1)
    return ages, named
