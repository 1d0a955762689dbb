# SPDX-License-Identifier: Apache-2.0
"""Picking evenly per unit of log age between the oldest and the youngest milestone, which are kept."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ...record import Window
from ..null_model import Null, youngest_floor

Floats = npt.NDArray[np.float64]


def _kept(window: Window) -> tuple[int, int]:
    return max(window.opening, 1), max(window.closing, 1)


def _make(window: Window, rng: np.random.Generator, size: int) -> Floats:
    first, last = _kept(window)
    w = len(window.times)
    moved = max(w - first - last, 0)
    floor = youngest_floor(window)
    oldest, youngest = max(float(window.ages[0]), floor), max(float(window.ages[-1]), floor)
    v = rng.random((size, moved))
    v.sort(axis=1)
    ages = oldest * (youngest / oldest) ** v
    times = np.broadcast_to(window.times, (size, w)).copy()
    if moved:
        times[:, first : first + moved] = window.present - ages
    return times


NULL = Null("log_uniform", "Would picking evenly per decade of age give this?", _make, _kept)
