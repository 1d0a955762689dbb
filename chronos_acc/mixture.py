# SPDX-License-Identifier: Apache-2.0
"""Mixture: the datings of one milestone as one distribution, with its quantiles, cut at the present for draws."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.special import ndtr, ndtri

from .dating.dating import Z975

Floats = npt.NDArray[np.float64]
Kinds = npt.NDArray[np.int8]

UNIFORM, NORMAL = 0, 1


@dataclass(frozen=True)
class Mixture:
    """One milestone's datings, ready for inverse-CDF draws, cut at the present."""

    edges: Floats  # cumulative weights, last 1
    kind: Kinds
    low: Floats
    mode: Floats
    high: Floats
    reach: Floats  # probability below the present of each component
    present: float

    @classmethod
    def of(cls, weight: Floats, kind: Kinds, low: Floats, mode: Floats, high: Floats, present: float) -> Mixture:
        """From the parts of one milestone, each (parts,), cut at the present."""
        reach = np.array([_cdf(k, a, b, c, present) for k, a, b, c in zip(kind, low, mode, high, strict=True)])
        mass = weight * reach
        if not mass.sum() > 0:  # dated wholly after the present: outside the window, drawn as it is
            reach, mass = np.ones(len(kind)), weight
        edges = np.cumsum(mass) / mass.sum()
        edges[-1] = 1.0
        return cls(edges, kind, low, mode, high, reach, present)

    def quantile(self, u: Floats) -> Floats:
        """Dates at probabilities u: the uniform that picks the component is rescaled and used for the date."""
        if len(self.edges) == 1:
            return self._component(0, u * self.reach[0] if self.reach[0] < 1 else u)
        out = np.empty_like(u)
        which = np.searchsorted(self.edges, u, side="right")
        below = 0.0
        for c in range(len(self.edges)):
            here = np.nonzero(which == c)[0]
            width = self.edges[c] - below
            if len(here) and width > 0:
                out[here] = self._component(c, np.clip((u[here] - below) / width, 0.0, 1.0) * self.reach[c])
            below = self.edges[c]
        return out

    def _component(self, c: int, u: Floats) -> Floats:
        low, mode, high = self.low[c], self.mode[c], self.high[c]
        if self.kind[c] == UNIFORM:
            return np.asarray(low + u * (high - low))
        z = ndtri(np.clip(u, 1e-300, 1 - 1e-16))
        if _is_log_normal(low, mode, high, self.present):
            age = self.present - mode
            return np.asarray(self.present - age * np.exp(-z * np.log((self.present - low) / age) / Z975))
        return np.asarray(mode + z * np.where(z < 0, mode - low, high - mode) / Z975)


def _is_log_normal(low: float, mode: float, high: float, present: float) -> bool:
    """A normal dating so near the present that its younger tail would pass it: age under four sd of the younger side."""
    return bool(0 < present - mode < 4 * (high - mode) / Z975 and low < mode)


def _cdf(kind: int, low: float, mode: float, high: float, t: float) -> float:
    """Probability that a component lies below t."""
    if kind == UNIFORM:
        if high <= low:
            return 1.0 if low <= t else 0.0
        return float(np.clip((t - low) / (high - low), 0.0, 1.0))
    if _is_log_normal(low, mode, high, t):
        return 1.0
    side = (mode - low) if t < mode else (high - mode)
    if side <= 0:
        return 1.0 if t >= mode else 0.0
    return float(ndtr((t - mode) * Z975 / side))


def mixture_points(
    weight: Floats, kind: Kinds, low: Floats, mode: Floats, high: Floats, probabilities: Sequence[float]
) -> Floats:
    """Quantiles of one mixture of datings (no cut at a present), by bisection on its distribution function, to about 1e-12 of its span."""
    wide = np.maximum(high - low, 0.0)
    a, b = float((low - 3 * wide).min()), float((high + 3 * wide).max())
    out = []
    for p in probabilities:
        lo, hi = a, b
        for _ in range(100):
            mid = 0.5 * (lo + hi)
            mass = sum(w * _plain_cdf(k, x, y, z, mid) for w, k, x, y, z in zip(weight, kind, low, mode, high, strict=True))
            lo, hi = (mid, hi) if mass < p else (lo, mid)
            if mid in (lo, hi) and hi - lo <= 1e-13 * max(abs(lo), abs(hi), 1e-300):
                break
        out.append(0.5 * (lo + hi))
    return np.array(out)


def _plain_cdf(kind: int, low: float, mode: float, high: float, t: float) -> float:
    if kind == UNIFORM:
        return _cdf(UNIFORM, low, mode, high, t)
    side = (mode - low) if t < mode else (high - mode)
    if side <= 0:
        return 1.0 if t >= mode else 0.0
    return float(ndtr((t - mode) * Z975 / side))


def summary_of_parts(
    weight: Floats, kind: Kinds, low: Floats, mode: Floats, high: Floats
) -> tuple[float, float, float, float, float]:
    """best, earliest, latest, unit, sd of one milestone from its parts: the part's own for one, quantiles of the mixture for several."""
    if len(weight) == 1 or (np.ptp(low) == 0 and np.ptp(mode) == 0 and np.ptp(high) == 0 and np.ptp(kind) == 0):
        best, earliest, latest = float(mode[0]), float(low[0]), float(high[0])
    else:
        earliest, best, latest = (float(x) for x in mixture_points(weight, kind, low, mode, high, (0.025, 0.5, 0.975)))
    width = latest - earliest
    normal = bool((kind == NORMAL).all())
    return best, earliest, latest, width, width / (2 * Z975) if normal else 0.0
