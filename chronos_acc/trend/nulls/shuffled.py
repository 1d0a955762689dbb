# SPDX-License-Identifier: Apache-2.0
"""The observed intervals in any other order: uneven spacing without a trend."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ...record import Window
from ..null_model import Null

Floats = npt.NDArray[np.float64]


def _make(window: Window, rng: np.random.Generator, size: int) -> Floats:
    """Closed intervals between milestones permuted; the oldest milestone and the open interval stay, and so do milestones tied with either
    end of the window. Ages are rebuilt from the youngest, so that recent dates lose no digits in a long window."""
    opening, closing = _kept(window)
    first, last = opening - 1, len(window.times) - closing
    mixed = rng.permuted(np.broadcast_to(np.diff(window.times[first : last + 1]), (size, max(last - first, 0))), axis=1)
    times = np.broadcast_to(window.times, (size, len(window.times))).copy()
    times[:, first:last] = window.times[last] - np.cumsum(mixed[:, ::-1], axis=1)[:, ::-1]
    times[:, first] = window.times[first]
    return np.maximum.accumulate(times, axis=1)


def _kept(window: Window) -> tuple[int, int]:
    return max(window.opening, 1), max(window.closing, 1)


NULL = Null("shuffled", "Would the same intervals in another order give this?", _make, _kept, rounded=False)
