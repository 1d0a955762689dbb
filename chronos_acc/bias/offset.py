# SPDX-License-Identifier: Apache-2.0
"""Growth beside a known factor of the rate: a listed share that falls with age, an exposure, or a window with a hole in it.

The rate is known(age) times exp(-g age), up to a scale. Given n events the mean age is enough for g, as in the plain log-linear
law, and under g = 0 ages are drawn from known(age) itself, which gives the null of the same estimate.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ..trend.kernels import growth_of_mean_age
from .growth import Growth, profile_ends, rank_p

Floats = npt.NDArray[np.float64]
CELLS = 1500
MOST_CELLS = 2_000_000  # events drawn for one null; fewer replicates serve larger records, down to LEAST
LEAST = 399


@dataclass(frozen=True)
class Offset:
    """Cells of age, youngest first: lower edge, width (q,) in years, and the known factor of the rate times the width (q,)."""

    edge: Floats
    width: Floats
    mass: Floats

    @property
    def total(self) -> float:
        """Integral of the known factor over the window, in years."""
        return float(self.mass.sum())

    def growth(self, mean_age: float, n: int, *, rng: np.random.Generator, size: int) -> Growth:
        """Growth per year of n events with this mean age, with its profile interval, beside records drawn from the known factor alone.

        Growth is a monotone function of the mean age, so the p is that of the mean age and the band is mapped from its quantiles.
        """
        null = self.mean_ages(n, rng=rng, size=int(min(size, max(LEAST, MOST_CELLS // max(n, 1)))))
        estimate, low, high = self.fit(mean_age, n)
        first, median, last = (self.estimate(float(q)) for q in np.quantile(null, (0.975, 0.5, 0.025)))
        return Growth(n, estimate, low, high, first, median, last, rank_p(mean_age, null))

    def estimate(self, mean_age: float) -> float:
        """Growth per year whose mean age under known(age) exp(-g age) is this one."""
        span, ages, log_mass = self._scaled()
        return _newton(float(np.clip(mean_age / span, ages[0], ages[-1])), ages, log_mass) / span

    def fit(self, mean_age: float, n: int) -> tuple[float, float, float]:
        """Growth per year and its profile interval."""
        span, ages, log_mass = self._scaled()
        target = float(np.clip(mean_age / span, ages[0], ages[-1]))
        k = _newton(target, ages, log_mass)

        def per_event(x: float) -> float:
            e = log_mass - x * ages
            top = float(e.max())
            return -x * target - top - float(np.log(np.exp(e - top).sum()))

        low, high = profile_ends(per_event, k, n)
        return k / span, low / span, high / span

    def _scaled(self) -> tuple[float, Floats, Floats]:
        span = float(self.edge[-1] + self.width[-1])
        return span, (self.edge + self.width / 2) / span, np.log(np.maximum(self.mass, 1e-300))

    def mean_ages(self, n: int, *, rng: np.random.Generator, size: int) -> Floats:
        """(size,) mean ages of n events drawn from the known factor."""
        cdf = np.concatenate([[0.0], np.cumsum(self.mass)])
        cdf /= cdf[-1]
        out = np.zeros(size)
        rows = max(1, 2_000_000 // max(n, 1))
        for first in range(0, size, rows):
            u = rng.random((min(rows, size - first), n))
            cell = np.clip(np.searchsorted(cdf, u, side="right") - 1, 0, len(self.mass) - 1)
            inside = (u - cdf[cell]) / np.maximum(cdf[cell + 1] - cdf[cell], 1e-300)
            out[first : first + len(u)] = (self.edge[cell] + inside * self.width[cell]).mean(axis=1)
        return out


def _newton(target: float, ages: Floats, log_mass: Floats) -> float:
    k = float(growth_of_mean_age(np.array(np.clip(target, 1e-15, 1 - 1e-15))))
    low, high = -np.inf, np.inf
    for _ in range(200):
        e = log_mass - k * ages
        p = np.exp(e - e.max())
        p /= p.sum()
        mean = float(p @ ages)
        variance = max(float(p @ (ages - mean) ** 2), 1e-300)
        low, high = (k, high) if mean > target else (low, k)
        step = float(np.clip((mean - target) / variance, -5.0 - abs(k), 5.0 + abs(k)))
        if not low <= k + step <= high:
            step = (low + high) / 2 - k
        k += step
        if abs(step) <= 1e-10 * (1.0 + abs(k)):
            break
    return k


def offset(
    span: float, smallest: float, known: Callable[[Floats], Floats] | None = None, pieces: Sequence[tuple[float, float]] | None = None
) -> Offset:
    """Cells fine near the present and wide far from it; ``pieces`` are the stretches of age (low, high) that count, all of the
    window by default.

    ``smallest`` is the age to be resolved, ``known`` maps ages (q,) to the factor, 1 by default.
    """
    smallest = max(min(smallest, span / 10), span * 1e-12)
    edges = smallest * np.expm1(np.linspace(0.0, np.log1p(span / smallest), CELLS + 1))
    edges = np.unique(np.concatenate([edges, np.linspace(0.0, span, CELLS // 3), *(np.array(p) for p in pieces or [])]))
    edges = edges[(edges >= 0) & (edges <= span)]
    low, high = edges[:-1], edges[1:]
    middle = (low + high) / 2
    inside = np.ones(len(middle), bool) if pieces is None else np.zeros(len(middle), bool)
    for a, b in pieces or []:
        inside |= (middle > a) & (middle < b)
    factor = np.ones(len(middle)) if known is None else np.asarray(known(middle), dtype=float)
    return Offset(low[inside], (high - low)[inside], (factor * (high - low))[inside])
