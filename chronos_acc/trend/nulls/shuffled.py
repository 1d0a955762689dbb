# SPDX-License-Identifier: Apache-2.0
"""The observed intervals in any other order: uneven spacing without a trend."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ...record import Window
from ..null_model import Null

Floats = npt.NDArray[np.float64]


def _make(window: Window, rng: np.random.Generator, size: int) -> Floats:
    """Closed intervals between milestones permuted; the oldest milestone and the open interval stay. Ages are rebuilt from the youngest, so that
    recent dates lose no digits in a long window."""
    intervals = np.broadcast_to(window.intervals, (size, len(window.times) - 1))
    mixed = rng.permuted(intervals, axis=1)
    back = np.cumsum(mixed[:, ::-1], axis=1)[:, ::-1]
    times = np.empty((size, len(window.times)))
    times[:, -1] = window.times[-1]
    times[:, :-1] = window.times[-1] - back
    times[:, 0] = window.times[0]
    return np.maximum.accumulate(times, axis=1)


def _kept(window: Window) -> tuple[int, int]:
    return 1, 1


NULL = Null("shuffled", "Would the same intervals in another order give this?", _make, _kept, rounded=False)
