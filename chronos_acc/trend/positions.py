# SPDX-License-Identifier: Apache-2.0
"""Where the counted events stand in their window, as fractions of it: what tests and laws work on.

Both the position x = (t - start)/span and the age v = (present - t)/span are kept, each from its own difference, so that neither
a window of 1e10 years with all events in the last 1e6 nor its mirror image loses digits.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ..record import Window

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True)
class Positions:
    """x (n,) ascending positions and v (n,) descending ages, both in (0, 1) as fractions of the window; ``intervals`` (r,) the closed
    intervals between milestones in years, as dated. opened and closed: whether a milestone stands at the start and at the present."""

    x: Floats
    v: Floats
    start: float
    present: float
    span: float
    opened: bool
    closed: bool
    intervals: Floats

    @property
    def n(self) -> int:
        """Counted events."""
        return len(self.x)


def positions(window: Window) -> Positions:
    """The counted events of a window as fractions of it, equal dates spread at fixed mid-ranks within their dating.

    k milestones dated alike to a width w stand at best + w (r - 1/2 - k/2)/k, r = 1..k, the width shrunk to stay inside the window,
    so their mean stays and with it Laplace's statistic and the growth of the log-linear law. Closed intervals are those of the
    dates as given, from the milestone that stands at the start (or the first one) to the one that stands at the present (or the
    last one); milestones in the same instant as the opener count with it. An empty window (no length or no event) gives empty
    arrays.
    """
    first = max(window.opening - 1, 0)
    last = len(window.times) - max(window.closing - 1, 0)
    intervals = np.diff(window.times[first:last])
    if not window.span > 0:
        empty = np.empty(0)
        return Positions(empty, empty, window.start, window.present, window.span, False, False, empty)
    inside = slice(window.opening, len(window.times) - window.closing)
    times = window.times[inside]
    x, v = (times - window.start) / window.span, (window.present - times) / window.span
    if len(times) > 1 and len(window.unit) == len(window.times) and (np.diff(times) == 0).any():
        x, v = _spread(times, window.unit[inside], x, v, window.span)
    return Positions(x, v, window.start, window.present, window.span, window.opening > 0, window.closing > 0, intervals)


def rounding(window: Window) -> float:
    """Years within which two intervals are the same: only the rounding of their dates to floating point parts them."""
    return float(8.0 * np.finfo(float).eps * np.abs(window.times).max(initial=0.0))


def _spread(times: Floats, unit: Floats, x: Floats, v: Floats, span: float) -> tuple[Floats, Floats]:
    _, group, count = np.unique(times, return_inverse=True, return_counts=True)
    narrow = np.full(len(count), np.inf)
    np.minimum.at(narrow, group, np.where(unit > 0, unit, np.inf))
    width = np.where(np.isfinite(narrow), narrow, 0.0)[group] / span
    width = np.minimum(width, 2.0 * np.minimum(x, v))
    size = count[group]
    rank = np.arange(len(times)) - np.searchsorted(times, times, side="left")
    shift = width * (rank + 0.5 - size / 2.0) / size
    x, v = x + shift, v - shift
    order = np.argsort(-v, kind="stable")
    return x[order], v[order]
