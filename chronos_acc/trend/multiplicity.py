# SPDX-License-Identifier: Apache-2.0
"""Adjusting p-values when several tests look at one record."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]


def holm(p: Sequence[float] | Floats) -> Floats:
    """Holm's step-down adjusted p-values (Holm 1979), valid whatever the dependence."""
    values = np.asarray(p, dtype=float)
    order = np.argsort(values, kind="stable")
    scaled = (len(values) - np.arange(len(values))) * values[order]
    out = np.empty_like(values)
    out[order] = np.minimum(1.0, np.maximum.accumulate(scaled)) if len(values) else scaled
    return out


def benjamini_hochberg(p: Sequence[float] | Floats) -> Floats:
    """Adjusted p-values that control the false discovery rate (Benjamini and Hochberg 1995)."""
    values = np.asarray(p, dtype=float)
    order = np.argsort(values, kind="stable")
    scaled = len(values) / np.arange(1, len(values) + 1) * values[order]
    out = np.empty_like(values)
    out[order] = np.minimum(1.0, np.minimum.accumulate(scaled[::-1])[::-1]) if len(values) else scaled
    return out


def null_p(null: Floats, observed: float, upper_tail: bool = False) -> Floats:
    """p-value of every null draw among the draws and the observed value: null (B,) -> (B,). Two-sided is the doubled smaller tail.

    The same rule as ``monte_carlo_p`` gives the observed one, so that all B + 1 are exchangeable under the null.
    """
    slack = 1e-10 * max(abs(observed), float(np.abs(null).max(initial=0.0)))
    pool = np.sort(np.append(null, observed))
    count = len(pool)
    above = count - np.searchsorted(pool, null - slack, side="left")
    if upper_tail:
        return np.asarray(above / count)
    below = np.searchsorted(pool, null + slack, side="right")
    return np.asarray(np.minimum(1.0, 2.0 * np.minimum(above, below) / count))


def monte_carlo_p(observed: float, null: Floats, upper_tail: bool = False) -> float:
    """(1 + draws at least as extreme)/(B + 1); two-sided is the doubled smaller tail. Draws within rounding of the observed count
    as equal.
    """
    slack = 1e-10 * max(abs(observed), float(np.abs(null).max(initial=0.0)))
    above = 1 + int((null >= observed - slack).sum())
    if upper_tail:
        return above / (len(null) + 1)
    below = 1 + int((null <= observed + slack).sum())
    return min(1.0, 2.0 * min(above, below) / (len(null) + 1))


def step_down_min_p(observed: Floats, null: Floats) -> Floats:
    """Step-down min-p adjustment (Westfall and Young 1993): observed (f,) p-values, null (B, f) p-values of the same null draws,
    jointly.

    The smallest p-value is judged against the law of the smallest of all f, the next against the smallest of the others, and so on;
    adjusted p-values never fall on the way. Strong control where, as here, the tests share their null.
    """
    order = np.argsort(observed, kind="stable")
    out = np.empty(len(observed))
    smallest = np.minimum.accumulate(null[:, order[::-1]], axis=1)[:, ::-1]  # column j: smallest of the j-th and all later
    last = 0.0
    for j, i in enumerate(order):
        p = (1 + int((smallest[:, j] <= observed[i] * (1 + 1e-12)).sum())) / (len(null) + 1)
        last = max(last, p, float(observed[i]))
        out[i] = last
    return out
