# SPDX-License-Identifier: Apache-2.0
"""Null laws with a closed form: of the number of reversals, and of A² in large samples."""

from __future__ import annotations

from functools import lru_cache

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]

LARGEST_EXACT = 400  # intervals; beyond, the normal law is right to four digits


@lru_cache(maxsize=128)
def reversal_law(r: int) -> Floats:
    """Probabilities of 0, 1, ..., r(r - 1)/2 reversals among r intervals in random order (the Mahonian law).

    Built up interval by interval: the j-th one stands in 0 to j - 1 reversals with those before, each as likely.
    """
    law = np.ones(1)
    for j in range(2, r + 1):
        cumulated = np.cumsum(np.concatenate([law, np.zeros(j - 1)]))
        cumulated[j:] -= cumulated[: len(cumulated) - j].copy()
        law = cumulated / j
    law = np.maximum(0.5 * (law + law[::-1]), 0.0)  # it is symmetric
    law.setflags(write=False)
    return law


def reversal_tails(reversals: int, r: int) -> tuple[float, float]:
    """P(R >= reversals) and P(R <= reversals)."""
    law = reversal_law(r)
    return min(1.0, float(law[reversals:].sum())), min(1.0, float(law[: reversals + 1].sum()))


def reversal_moments(r: int) -> tuple[float, float]:
    """Mean r(r - 1)/4 and variance (2r + 5)(r - 1) r/72."""
    return r * (r - 1) / 4.0, (2 * r + 5) * (r - 1) * r / 72.0


def anderson_darling_tail(a2: float) -> float:
    """P(A² > a2) in the limit of large samples, for a law known in full (Anderson and Darling 1954; Marsaglia and Marsaglia 2004)."""
    if not a2 > 0:
        return 1.0
    if a2 > 15.0:  # leading term of the tail, and its next two fitted to the series between 12 and 15, where that still has ten digits
        return float(np.sqrt(3.0 / (np.pi * a2)) * np.exp(-a2) * (1.0 - 0.191 / a2 + 0.384 / a2**2))
    total = 0.0
    coefficient = 1.0
    for j in range(60):
        if j:
            coefficient *= -(j - 0.5) / j
        q = 4.0 * j + 1.0
        top = q * q * np.pi**2 / (8.0 * a2)
        term = coefficient * q * np.exp(-top) * _integral(a2, top)
        total += term
        if abs(term) < 1e-18:
            break
    return float(np.clip(1.0 - np.sqrt(2.0 * np.pi) / a2 * total, 0.0, 1.0))


def _integral(a2: float, top: float) -> float:
    """Integral over w > 0 of exp(a2/(8(w² + 1)) - w² top), by Gauss-Legendre on the stretch where it is not nil."""
    nodes, weights = _legendre()
    end = min(40.0 / np.sqrt(top), 1e8)
    total = 0.0
    edges = np.append(0.0, end * 2.0 ** np.arange(-8.0, 1.0))
    for low, high in zip(edges[:-1], edges[1:], strict=True):
        w = low + (high - low) * nodes
        total += (high - low) * float(weights @ np.exp(a2 / (8.0 * (w * w + 1.0)) - w * w * top))
    return total


@lru_cache(maxsize=1)
def _legendre() -> tuple[Floats, Floats]:
    nodes, weights = np.polynomial.legendre.leggauss(40)
    return 0.5 * (nodes + 1.0), 0.5 * weights
