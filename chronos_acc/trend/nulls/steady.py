# SPDX-License-Identifier: Apache-2.0
"""Milestones at a steady rate: uniform on the window, given their number."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ...record import Window
from ..null_model import Null, kept_ends

Floats = npt.NDArray[np.float64]


def _make(window: Window, rng: np.random.Generator, size: int) -> Floats:
    ages = rng.random((size, window.n)) * window.span
    ages.sort(axis=1)
    return _between(window, window.present - ages[:, ::-1])


def _between(window: Window, counted: Floats) -> Floats:
    """The kept ends around counted dates (size, n)."""
    size = len(counted)
    opening = np.full((size, window.opening), window.start)
    closing = np.full((size, window.closing), window.present)
    return np.concatenate([opening, counted, closing], axis=1)


NULL = Null("steady", "Would a steady rate give this?", _make, kept_ends)
