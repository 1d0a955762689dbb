# SPDX-License-Identifier: Apache-2.0
"""What a kind of chart is: a name, the question it answers, what it needs, and a function that makes its numbers."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from ...errors import WrongUse
from ...record import Record, Window
from .data import Axis, ChartData, limits

if TYPE_CHECKING:
    from ...bias import Bias
    from ...bias.grid import Grid
    from ...intervals import Intervals
    from ...trend.analysis import Trend

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True)
class Inputs:
    """What a chart may draw from; results that are None are computed by the kind where that is quick, else refused with what to do."""

    record: Record
    trend: Trend | None = None
    bias: Bias | None = None
    grid: Grid | None = None
    intervals: Intervals | None = None
    seed: int = 1
    draws: int = 2000


@dataclass(frozen=True)
class Chart:
    """A member of the family. ``build`` raises WrongUse or RecordRefused where the record or a missing result does not allow the chart."""

    name: str
    question: str
    needs: str
    build: Callable[[Inputs], ChartData]


def age_axis(record: Record, ages: Floats | list[float], label: str = "age") -> Axis:
    """Ages on a log axis that runs backward, so that time runs to the right."""
    low, high = limits(ages, "log", 0.03)
    return Axis(label, f"years before {present(record)}", low, high, "log", backward=True, style="age")


def present(record: Record) -> str:
    """The present as a year in a label: 2022, or 2021.5."""
    return f"{record.present:.6g}" if abs(record.present) < 1e6 else f"{record.present:g}"


def least_age(record: Record, window: Window) -> float:
    """Ages and intervals are floored at half the finest dating unit before a logarithm; exact dates at their smallest age above zero."""
    if window.finest_unit > 0:
        return 0.5 * window.finest_unit
    above = window.ages[window.ages > 0]
    return float(above.min()) if len(above) else 1.0


def at_least(window: Window, count: int, what: str) -> None:
    """Refuse a window with fewer milestones than a chart can show."""
    from ...errors import RecordRefused

    if len(window.times) < count:
        there = len(window.times)
        raise RecordRefused(f"{what} needs {count} milestones inside the window; there are {there}. Load more lists or widen the window")


def missing(kind: str, result: str, function: str) -> WrongUse:
    """The error for a chart whose result was not given."""
    return WrongUse(f"the chart {kind!r} draws the result of {function}; give it as {result}=")
