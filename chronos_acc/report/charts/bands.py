# SPDX-License-Identifier: Apache-2.0
"""Where a null puts its intervals: the middle 95 % of null intervals at each age."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ...record import Record, Window
from ...trend.null_model import Null
from ...trend.precision import null_times

Floats = npt.NDArray[np.float64]
CELLS = 120_000  # intervals of null records: some 1,400 records of 85 milestones
MOST_RECORDS, LEAST_RECORDS = 4000, 200
BINS = 28
LEAST = 100  # pairs in a bin from which a 95 % band is drawn


def interval_band(record: Record, window: Window, null: Null, *, seed: int, floor: float, stream: int) -> tuple[Floats, Floats, Floats]:
    """Ages (b,) and the 2.5 and 97.5 % points (b,) of the null's intervals that open there, all in years, from young to old.

    ``floor`` is the least age and interval that has a logarithm. Bins of equal log age, from half the youngest
    age of the window to its length; those the null hardly visits are left out.
    """
    rng = np.random.default_rng([seed, 8801, stream])
    size = min(MOST_RECORDS, max(LEAST_RECORDS, CELLS // max(len(window.times), 1)))
    times = null_times(record, window, null, rng, size)
    ages = np.maximum(window.present - times[:, :-1], floor).ravel()
    gaps = np.diff(times, axis=1).ravel()
    ages, gaps = ages[gaps > 0], np.maximum(gaps[gaps > 0], floor)
    if not len(ages):
        empty = np.empty(0)
        return empty, empty, empty
    youngest = max(floor, float(window.ages.min()) / 2)
    edges = np.linspace(np.log(min(youngest, window.span / 2)), np.log(window.span) + 1e-9, BINS + 1)
    which = np.searchsorted(edges, np.log(ages), side="right") - 1
    middle, low, high = [], [], []
    for b in range(BINS):
        here = gaps[which == b]
        if len(here) >= LEAST:
            middle.append(float(np.exp(0.5 * (edges[b] + edges[b + 1]))))
            ends = np.quantile(here, (0.025, 0.975))
            low.append(float(ends[0]))
            high.append(float(ends[1]))
    return np.array(middle), np.array(low), np.array(high)
