# SPDX-License-Identifier: Apache-2.0
"""The precision kernel: a null date takes the dating of the observed milestone nearest to it in log age.

Without it a null has no ties and no rounding, and a rounded record looks unlike every record of the null for that reason alone.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ..record import Record, Window
from .null_model import Null, youngest_floor

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.int64]


@dataclass(frozen=True)
class Kernel:
    """The window's datings by log age. edges (w - 1,) between neighbours in log age, oldest last; donor (w,) positions in the window,
    youngest first; best, unit, sd (w,) of the window's milestones, oldest first."""

    floor: float
    edges: Floats
    donor: Ints
    best: Floats
    unit: Floats
    sd: Floats

    @classmethod
    def of(cls, record: Record, window: Window) -> Kernel:
        """The kernel of a record's window."""
        floor = youngest_floor(window)
        logs = np.log(np.maximum(window.ages, floor))[::-1]
        return cls(
            floor=floor,
            edges=0.5 * (logs[1:] + logs[:-1]),
            donor=np.arange(len(logs) - 1, -1, -1, dtype=np.int64),
            best=window.times,
            unit=record.unit[window.index],
            sd=record.sd[window.index],
        )

    @property
    def exact(self) -> bool:
        """No date of the window is rounded or blurred."""
        return not (self.unit.any() or self.sd.any())

    def donors(self, times: Floats, present: float) -> Ints:
        """Position in the window of the milestone nearest in log age to each date."""
        if len(self.edges) == 0:
            return np.zeros(times.shape, np.int64)
        return self.donor[np.searchsorted(self.edges, np.log(np.maximum(present - times, self.floor)))]

    def apply(self, times: Floats, low: float, high: float, present: float, rng: np.random.Generator) -> Floats:
        """Dates as the list would give them: rounded to the donor's unit on the donor's own grid, or blurred by its sd and reflected; all
        stay in (low, high).

        A date whose every rounding would leave the window keeps its place.
        """
        if self.exact or not times.size:
            return times
        donor = self.donors(times, present)
        unit, sd = self.unit[donor], self.sd[donor]
        out = times
        if (sd > 0).any():
            blurred = times + sd * rng.standard_normal(times.shape)
            blurred = np.where(blurred >= high, 2 * high - blurred, blurred)
            blurred = np.where(blurred <= low, 2 * low - blurred, blurred)
            out = np.where(sd > 0, blurred, out)
        grid = (sd == 0) & (unit > 0)
        if grid.any():
            step = np.where(grid, unit, 1.0)
            origin = self.best[donor]
            rounded = origin + step * np.round((times - origin) / step)
            rounded = np.where(rounded >= high, rounded - step, rounded)
            rounded = np.where(rounded <= low, rounded + step, rounded)
            out = np.where(grid, rounded, out)
        return np.where((out > low) & (out < high), out, times)


def null_times(record: Record, window: Window, null: Null, rng: np.random.Generator, size: int, kernel: Kernel | None = None) -> Floats:
    """(size, w) sorted dates of null records, dated as the observed list dates its milestones. ``kernel`` spares building it anew."""
    times = null.make(window, rng, size)
    if not null.rounded:
        return times
    kernel = Kernel.of(record, window) if kernel is None else kernel
    if kernel.exact:
        return times
    first, last = null.kept(window)
    inner = slice(first, times.shape[1] - last)
    # a kept milestone of the counted ones may be met, never passed; the ends of the window themselves are open
    low = window.start if first <= window.opening else float(np.nextafter(window.times[0], -np.inf))
    high = window.present if last <= window.closing else float(np.nextafter(window.times[-1], np.inf))
    times[:, inner] = kernel.apply(times[:, inner], low, high, window.present, rng)
    times[:, inner].sort(axis=1)
    return times
