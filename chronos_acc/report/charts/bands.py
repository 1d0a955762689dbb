# SPDX-License-Identifier: Apache-2.0
"""Where a null puts its intervals: the middle 95 % of null intervals at each age."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ...record import Record, Window
from ...trend.null_model import Null
from ...trend.precision import null_times

Floats = npt.NDArray[np.float64]
RECORDS = 400  # null records; with some 30 intervals each a bin of age holds hundreds
BINS = 28
LEAST = 40  # pairs in a bin from which a 95 % band is drawn


def interval_band(record: Record, window: Window, null: Null, *, seed: int, floor: float, stream: int) -> tuple[Floats, Floats, Floats]:
    """Ages (b,) and the 2.5 and 97.5 % points (b,) of the null's intervals that open there, all in years, from young to old.

    ``floor`` is the least age and interval that has a logarithm. Bins of equal log age over the window; those the null hardly visits are left out.
    """
    rng = np.random.default_rng([seed, 8801, stream])
    times = null_times(record, window, null, rng, RECORDS)
    ages = np.maximum(window.present - times[:, :-1], floor).ravel()
    gaps = np.diff(times, axis=1).ravel()
    ages, gaps = ages[gaps > 0], np.maximum(gaps[gaps > 0], floor)
    if not len(ages):
        empty = np.empty(0)
        return empty, empty, empty
    edges = np.linspace(np.log(floor), np.log(window.span) + 1e-9, BINS + 1)
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
