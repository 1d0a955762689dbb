# SPDX-License-Identifier: Apache-2.0
"""What a null model is: a way the list could have been made without any speeding, from which whole records are drawn."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ..record import Window

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True)
class Null:
    """A member of the family of nulls.

    ``make(window, rng, size)`` gives times (size, w), sorted along the rows, of as many milestones as the window holds, the kept ones at
    the ends in place: ``kept(window)`` says how many at the old end and how many at the young end are never moved. ``rounded``: whether the
    moved dates pass through the precision kernel (not where they are built from observed intervals, which carry their rounding).
    ``setting`` tells parameters, and whether they were given or fitted; a ``fitted`` null judges slope and R² only.
    """

    name: str
    question: str
    make: Callable[[Window, np.random.Generator, int], Floats]
    kept: Callable[[Window], tuple[int, int]]
    rounded: bool = True
    setting: str = ""
    fitted: bool = False


def kept_ends(window: Window) -> tuple[int, int]:
    """Milestones that open or close the window stay; the counted ones move."""
    return window.opening, window.closing


def youngest_floor(window: Window) -> float:
    """The age below which no logarithm is taken: half the finest dating unit, or where dates are exact the smallest age above zero."""
    if window.finest_unit > 0:
        return 0.5 * window.finest_unit
    ages = window.ages[window.ages > 0]
    return float(ages.min()) if len(ages) else 1.0
