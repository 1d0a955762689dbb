# SPDX-License-Identifier: Apache-2.0
"""Growth over drawn dates: many records of one set of milestones at once."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from ..record import Record, Window
from ..trend.kernels import growth_of_mean_age
from .check import Row
from .growth import Growth, growth_of_mean, two_sided
from .rows import LEVEL, row

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True)
class Drawn:
    """Per draw: growth per year, its two-sided p under a steady rate, counted events; ``swaps`` the share of neighbouring pairs
    that change places.
    """

    growth: Floats
    p_value: Floats
    n: npt.NDArray[np.int64]
    mean: Floats
    span: Floats
    swaps: float


def drawn_growth(window: Window, dates: Floats) -> Drawn:
    """dates (draws, w) of the window's milestones in the window's order; those that leave a given window are not counted in that draw."""
    present = window.present
    inside = dates <= present
    if window.opened_by_milestone:
        start = np.where(inside, dates, np.inf).min(axis=1)
        counted = inside & (dates > start[:, None]) & (dates < present)
    else:
        start = np.full(len(dates), window.start)
        counted = inside & (dates > window.start) & (dates < present)
    n = counted.sum(axis=1)
    span = present - start
    with np.errstate(invalid="ignore", divide="ignore"):
        mean = np.where(counted, present - dates, 0.0).sum(axis=1) / n / span
    good = (n > 0) & (span > 0) & np.isfinite(mean)
    n, mean, span = n[good], mean[good], span[good]
    p = np.ones(len(mean))
    for size in np.unique(n):
        p[n == size] = two_sided(mean[n == size], int(size))
    swaps = float((np.diff(dates, axis=1) < 0).mean()) if dates.size and dates.shape[1] > 1 else 0.0
    return Drawn(np.asarray(growth_of_mean_age(np.clip(mean, 1e-15, 1 - 1e-15)) / span), p, n, mean, span, swaps)


def drawn_row(check: str, setting: str, found: Drawn, published: Growth, **more: Any) -> Row | None:
    """The median draw, with the 95 % range of growth over draws and the share of draws that are significant."""
    if not len(found.growth):
        return None
    middle = int(np.argsort(found.growth, kind="stable")[len(found.growth) // 2])
    centre = growth_of_mean(float(found.mean[middle]), int(found.n[middle]), float(found.span[middle]))
    low, high = np.quantile(found.growth, (0.025, 0.975))
    return row(
        check,
        setting,
        centre,
        published,
        draws_low=float(low),
        draws_high=float(high),
        draws_significant=float((found.p_value < LEVEL).mean()),
        swap_share=found.swaps,
        **more,
    )


def window_draws(record: Record, draws: int, seed: int) -> Floats:
    """(draws, w) drawn dates of the window's milestones, in its order."""
    return record.all_draws(draws, seed)[:, record.window.index]
