# SPDX-License-Identifier: Apache-2.0
"""Growth of the log-linear rate in closed form, beside what a steady rate gives for the same n and window.

Given n events in a window, the estimate of growth is a monotone function of their mean age, and so of Laplace's statistic. Under
a steady rate the mean of the n age fractions is the mean of n uniforms, whose law is known exactly (Irwin 1927; Hall 1927): the
band and the p of a row need no simulation.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
import numpy.typing as npt
from scipy.optimize import brentq
from scipy.special import ndtri

from ..record import Window
from ..trend.kernels import growth_of_mean_age

Floats = npt.NDArray[np.float64]
CHI2_95 = 3.841458820694124  # 95 % point of chi-square on one degree of freedom
SMALLEST_P = 1e-12  # the law is computed to about 1e-13; nothing smaller is claimed
_SUM_UP_TO = 12  # the alternating sum is exact to rounding up to here
_NODES = 320


@dataclass(frozen=True)
class Growth:
    """n counted events; growth per year with its profile-likelihood interval (95 %); the steady band (2.5, 50, 97.5 %) and the two-sided p.

    None where there is nothing to estimate (no event, or a window without length).
    """

    n: int
    estimate: float | None
    low: float | None = None
    high: float | None = None
    null_low: float | None = None
    null_median: float | None = None
    null_high: float | None = None
    p_value: float | None = None


def growth(window: Window) -> Growth:
    """Growth of a window's counted events on best dates."""
    if window.n == 0 or not window.span > 0:
        return Growth(max(window.n, 0), None)
    return growth_of_mean(float((window.present - window.counted).mean() / window.span), window.n, window.span)


def growth_of_mean(mean: float, n: int, span: float) -> Growth:
    """Growth from the mean age fraction of n events in a window of ``span`` years."""
    k = float(growth_of_mean_age(np.array(mean)))
    low, high = profile_interval(mean, n, k)
    band = steady_band(n)
    return Growth(n, k / span, low / span, high / span, band[0] / span, 0.0, band[1] / span, float(two_sided(np.array(mean), n)))


def two_sided(mean: Floats, n: int) -> Floats:
    """Doubled smaller tail of mean age fractions (...) under a steady rate."""
    below = mean_cdf(mean, n)
    return np.asarray(np.clip(2.0 * np.minimum(below, 1.0 - below), SMALLEST_P, 1.0))


def mean_cdf(mean: Floats, n: int) -> Floats:
    """P(mean of n uniforms <= mean), to about 1e-13. mean (...) in [0, 1]."""
    m = np.asarray(mean, dtype=float)
    upper = m > 0.5
    low = np.where(upper, 1.0 - m, m)  # the law is symmetric
    value = _irwin_hall(low * n, n) if n <= _SUM_UP_TO else _inverted(low, n)
    value = np.clip(value, 0.0, 0.5)
    return np.asarray(np.where(upper, 1.0 - value, value))


def _irwin_hall(x: Floats, n: int) -> Floats:
    total = np.zeros_like(x)
    for j in range(n // 2 + 1):
        total += (-1.0) ** j * math.comb(n, j) * np.maximum(x - j, 0.0) ** n
    return total / math.factorial(n)


def _inverted(mean: Floats, n: int) -> Floats:
    """By inverting the characteristic function of the standardised sum (Gil-Pelaez 1951): the integrand is smooth and dies like a
    normal one.
    """
    z = np.minimum((0.5 - mean) * math.sqrt(12.0 * n), 8.0)  # further out the law is 0 to rounding
    t, weight = _nodes(n)
    half = t * math.sqrt(3.0 / n)
    kernel = weight * np.sign(np.sin(half) / half) ** n * np.abs(np.sin(half) / half) ** n / t
    return np.asarray(0.5 - (np.sin(z[..., None] * t) * kernel).sum(axis=-1) / math.pi)


@lru_cache(maxsize=1)
def _legendre() -> tuple[Floats, Floats]:
    x, w = np.polynomial.legendre.leggauss(_NODES)
    return x, w


def _nodes(n: int) -> tuple[Floats, Floats]:
    x, w = _legendre()
    top = 60.0 if n < 20 else 20.0 if n < 60 else 12.0
    return (x + 1.0) * top / 2.0, w * top / 2.0


@lru_cache(maxsize=4096)
def steady_band(n: int) -> tuple[float, float]:
    """Growth times window at the 2.5 and 97.5 % points of a steady rate with n events."""
    least = max(0.0, 0.5 - 3.0 / math.sqrt(12.0 * n))
    at = brentq(lambda m: float(mean_cdf(np.array(m), n)) - 0.025, least, 0.5, xtol=1e-13)
    k = float(growth_of_mean_age(np.array(at)))
    return -k, k


def profile_interval(mean: float, n: int, k: float | None = None) -> tuple[float, float]:
    """Growth times window at which twice the log-likelihood lies 3.84 under its maximum."""
    k = float(growth_of_mean_age(np.array(mean))) if k is None else k
    return profile_ends(lambda x: _log_likelihood(x, mean), k, n)


def profile_ends(per_event: Callable[[float], float], k: float, n: int) -> tuple[float, float]:
    """Both ends of the profile interval of a concave log-likelihood per event with its maximum at k."""
    top = per_event(k)
    drop = CHI2_95 / (2.0 * n)
    reach = max(1.0, abs(k)) * max(1.0, 4.0 / math.sqrt(n))
    ends = []
    for side in (-1.0, 1.0):
        inside, outside = k, k + side * reach
        while top - per_event(outside) < drop and abs(outside) < 1e300:
            inside, outside = outside, k + 2.0 * (outside - k)
        for _ in range(80):
            middle = 0.5 * (inside + outside)
            if middle in (inside, outside) or abs(outside - inside) <= 1e-13 * abs(middle):
                break
            inside, outside = (middle, outside) if top - per_event(middle) < drop else (inside, middle)
        ends.append(0.5 * (inside + outside))
    return ends[0], ends[1]


def _log_likelihood(k: float, mean: float) -> float:
    """Per event, of age fractions with density proportional to exp(-k a)."""
    if abs(k) < 1e-5:
        return -k * (mean - 0.5) - k * k / 24.0
    if k > 0:
        return -k * mean - math.log(-math.expm1(-k) / k)
    return -k * (mean - 1.0) - math.log(-math.expm1(k) / -k)


def band_of(null: Floats) -> tuple[float, float, float]:
    """2.5, 50 and 97.5 % points of simulated values."""
    low, median, high = np.quantile(null, (0.025, 0.5, 0.975))
    return float(low), float(median), float(high)


def rank_p(observed: float, null: Floats) -> float:
    """Two-sided p, doubled smaller tail, with (1 + count)/(B + 1)."""
    above, below = int((null >= observed).sum()), int((null <= observed).sum())
    return min(1.0, 2.0 * (1 + min(above, below)) / (len(null) + 1))


def z_of_p(p: float, sign: float) -> float:
    """Signed normal deviate of a two-sided p, by which rows of different n are compared."""
    return float(math.copysign(-ndtri(max(p, 1e-300) / 2.0), sign))
