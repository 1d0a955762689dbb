# SPDX-License-Identifier: Apache-2.0
"""What steady lists would show, given how likely each list names a milestone of a given age: the capture curve fitted to their
overlap, without its growth.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from scipy.special import expit

from ..record import Record
from ..trend.capture import grouped
from ..trend.kernels import growth_of_mean_age
from ..trend.null_model import youngest_floor
from ..trend.overlap import SCALES, CaptureFit, Sightings, fit
from .offset import LEAST, MOST_CELLS

Floats = npt.NDArray[np.float64]
FEWEST_COUNTED = 5
FEWEST_SHARED = 5
_CELLS = 500_000  # replicates are taken in chunks of about this many probabilities


def capture_curve(record: Record) -> CaptureFit | None:
    """The joint fit of growth and naming on the scale of age with the lower AIC.

    Growth is free, so that the overlap of the lists and not their crowding decides the curve. None where fewer than two
    independent lists, or fewer than five shared milestones, speak.
    """
    window = record.window
    names, mentions = grouped(record)
    named = mentions[window.index[window.opening : window.opening + window.n]]
    named = named[:, named.any(axis=0)]
    if named.shape[1] < 2 or window.n < FEWEST_COUNTED or int((named.sum(axis=1) > 1).sum()) < FEWEST_SHARED or not window.span > 0:
        return None
    sightings = Sightings.of(window.present - window.counted, named, window.span, youngest_floor(window))
    fits = [f for f in (fit(sightings, scale, interval=False) for scale in SCALES) if f is not None]
    return min(fits, key=lambda f: f.aic, default=None)


def at_least(logits: Floats, threshold: int) -> Floats:
    """(..., q) probability that at least ``threshold`` of the lists name a milestone, from logits (..., k, q): Poisson-binomial
    by recursion.
    """
    k = logits.shape[-2]
    if threshold > k:
        return np.zeros(logits.shape[:-2] + logits.shape[-1:])
    p = expit(logits)
    if threshold == 1:
        return np.asarray(1.0 - (1.0 - p).prod(axis=-2))
    exactly = np.zeros((*logits.shape[:-2], threshold, logits.shape[-1]))
    exactly[..., 0, :] = 1.0
    seen = np.zeros(logits.shape[:-2] + logits.shape[-1:])
    for j in range(k):
        here = p[..., j, :]
        seen += exactly[..., threshold - 1, :] * here
        exactly[..., 1:, :] = exactly[..., 1:, :] * (1 - here[..., None, :]) + exactly[..., :-1, :] * here[..., None, :]
        exactly[..., 0, :] *= 1 - here
    return np.asarray(seen)


def steady_growth(curve: CaptureFit, threshold: int, n: int, span: float, *, rng: np.random.Generator, size: int) -> Floats:
    """(size,) growth per year, fewer for large records, that a steady rate shows in n milestones named by at least ``threshold``
    lists, in the last ``span`` years up to the present.

    Each replicate takes its own curve from the law of the fitted parameters (where the fit gives one), so the band holds both
    chance and what is not known of the curve.
    """
    size = min(size, max(LEAST, MOST_CELLS // max(n, 1)))
    middle, edges, weight = _cells(curve, span)
    star = curve.sightings.stretch(curve.scale)(middle / curve.sightings.span)
    alpha, beta = _parameters(curve, rng, size)
    out = np.empty(size)
    step = max(1, _CELLS // (len(middle) * alpha.shape[1]))
    for first in range(0, size, step):
        logits = alpha[first : first + step, :, None] - beta[first : first + step, None, None] * star
        mass = np.cumsum(at_least(logits, threshold) * weight, axis=1)
        cdf = np.concatenate([np.zeros((len(mass), 1)), mass / np.maximum(mass[:, -1:], 1e-300)], axis=1)
        for i, u in enumerate(rng.random((len(mass), n))):
            out[first + i] = np.interp(u, cdf[i], edges).mean()
    return np.asarray(growth_of_mean_age(np.clip(out / span, 1e-15, 1 - 1e-15)) / span)


def _parameters(curve: CaptureFit, rng: np.random.Generator, size: int) -> tuple[Floats, Floats]:
    """alpha (size, t) and beta (size,) from the normal law of the fit."""
    t = len(curve.alpha)
    centre = np.concatenate([curve.alpha, [curve.beta]])
    if curve.covariance is None:
        theta = np.broadcast_to(centre, (size, t + 1))
    else:
        values, vectors = np.linalg.eigh(curve.covariance[1:, 1:])
        theta = centre + rng.standard_normal((size, t + 1)) @ (vectors * np.sqrt(np.maximum(values, 0.0))).T
    return np.asarray(theta[:, :t]), np.asarray(theta[:, t])


def _cells(curve: CaptureFit, span: float) -> tuple[Floats, Floats, Floats]:
    """Cells of age over a window: middles, edges, widths, fine near the present."""
    youngest = min(curve.sightings.floor * curve.sightings.span, span / 10)
    edges = np.unique(np.concatenate([youngest * np.expm1(np.linspace(0.0, np.log1p(span / youngest), 120)), np.linspace(0.0, span, 120)]))
    edges[-1] = span
    return (edges[1:] + edges[:-1]) / 2, edges, np.diff(edges)
