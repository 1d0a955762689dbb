# SPDX-License-Identifier: Apache-2.0
"""The interval series: how long it was from each milestone to the next, on best dates and over draws from the datings.

An interval belongs to the milestone that opens it. In each draw it runs to whatever comes next in that draw, so it is never negative; the
chance that a milestone and its neighbour swap is shown apart. The last interval is open: it runs to the present and nothing has closed it
yet.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np
import numpy.typing as npt

from .errors import WrongUse
from .notebook import ShowsInNotebook
from .progress import Tell, silent
from .record import Record, Window

if TYPE_CHECKING:
    import pandas as pd

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.int64]

HELD_CELLS = 40_000_000  # draws times milestones held at once, about 320 MB; larger records get fewer draws, and a note
LEAST_DRAWS = 200
LOW, HIGH = 0.025, 0.975


@dataclass(frozen=True)
class Intervals(ShowsInNotebook):
    """One row a milestone inside the window (w rows), by best date, ties by id; years throughout.

    milestone (w,) ids; title; year (w,) best dates in decimal years; age (w,) present minus year; interval (w,) to the next best date, the
    last to the present; interval_low, interval_median, interval_high (w,) 2.5, 50 and 97.5 % points over draws, NaN without draws;
    swap_chance (w,) share of draws in which the milestone comes after its next, NaN for the last; next_milestone (w,) its id, -1 for the
    last; open (w,) True for the last; support (w,) independent lists that name it. from_start: years from a given start to the first
    milestone, a residual life and no interval of the series; None where the first milestone opens the window. draws: how many were made.
    """

    milestone: Ints
    title: tuple[str, ...]
    year: Floats
    age: Floats
    interval: Floats
    interval_low: Floats
    interval_median: Floats
    interval_high: Floats
    swap_chance: Floats
    next_milestone: Ints
    open: npt.NDArray[np.bool_]
    support: Ints
    present: float
    from_start: float | None
    draws: int
    seed: int
    notes: tuple[str, ...] = ()

    def __len__(self) -> int:
        return len(self.milestone)

    def to_frame(self) -> pd.DataFrame:
        """Columns as the fields; next_milestone is a nullable integer, missing for the last."""
        import pandas as pd

        last = self.next_milestone < 0
        return pd.DataFrame(
            {
                "milestone": self.milestone,
                "title": list(self.title),
                "year": self.year,
                "age": self.age,
                "interval": self.interval,
                "interval_low": self.interval_low,
                "interval_median": self.interval_median,
                "interval_high": self.interval_high,
                "swap_chance": self.swap_chance,
                "next_milestone": pd.arrays.IntegerArray(self.next_milestone.copy(), last),
                "open": self.open,
                "support": self.support,
            }
        )


def interval_series(record: Record, *, seed: int = 1, draws: int = 2000, tell: Tell = silent) -> Intervals:
    """The interval series of a record inside its window. An empty window gives no rows, one milestone its open interval; ``draws`` 0
    leaves the points NaN.

    Raises WrongUse for a negative number of draws.
    """
    if draws < 0:
        raise WrongUse(f"the number of draws must be 0 or more, not {draws}")
    window = record.window
    w = len(window.times)
    held = draws if draws * w <= HELD_CELLS else min(draws, max(LEAST_DRAWS, HELD_CELLS // w))
    notes = [] if held == draws else [f"{held} draws instead of {draws}, to keep {w} milestones within memory"]
    ids = record.id[window.index]
    following = np.append(ids[1:], -1) if w else ids[:0]
    low, median, high, swap = _over_draws(record, window, held, seed, tell) if held and w else (np.full(w, np.nan) for _ in range(4))
    outside = window.outside
    if outside:
        notes.append(f"{outside} milestones outside the window {window.start:g} to {window.present:g} are left out")
    return Intervals(
        milestone=ids,
        title=tuple(record.title[i] for i in window.index),
        year=window.times,
        age=window.ages,
        interval=np.append(window.intervals, window.present - window.times[-1:]),
        interval_low=low,
        interval_median=median,
        interval_high=high,
        swap_chance=swap,
        next_milestone=following,
        open=np.arange(w) == w - 1,
        support=record.support[window.index],
        present=window.present,
        from_start=None if window.opened_by_milestone or not w else float(window.times[0] - window.start),
        draws=held,
        seed=seed,
        notes=tuple(notes),
    )


def intervals_of(dates: Floats, present: float) -> Floats:
    """(n, w) interval that each of w milestones opens in each of n draws (n, w): to the next date in that draw, the last to the present;
    never negative."""
    order = np.argsort(dates, axis=1, kind="stable")
    ordered = np.take_along_axis(dates, order, axis=1)
    gaps = np.empty_like(ordered)
    np.subtract(ordered[:, 1:], ordered[:, :-1], out=gaps[:, :-1])
    gaps[:, -1] = np.maximum(present - ordered[:, -1], 0.0)
    out = np.empty_like(gaps)
    np.put_along_axis(out, order, gaps, axis=1)
    return out


def _over_draws(record: Record, window: Window, draws: int, seed: int, tell: Tell) -> tuple[Floats, Floats, Floats, Floats]:
    """Points of each interval over draws, and swap chances, (w,) each. All milestones are drawn, so that streams are shared; only the
    window's are used."""
    w = len(window.times)
    gaps = np.empty((draws, w))
    swaps = np.zeros(max(w - 1, 0))
    done = 0
    for chunk in record.draws(draws, seed):
        dates = chunk[:, window.index]
        gaps[done : done + len(dates)] = intervals_of(dates, window.present)
        swaps += (dates[:, :-1] > dates[:, 1:]).sum(axis=0)
        done += len(dates)
        tell("drawing datings", done / draws)
    low, median, high = (np.asarray(q) for q in np.quantile(gaps, (LOW, 0.5, HIGH), axis=0, overwrite_input=True))
    return low, median, high, np.append(swaps / draws, np.nan)


def interval_sets(
    record: Record, by: Literal["list", "support", "category"], *, seed: int = 1, draws: int = 2000, tell: Tell = silent
) -> dict[str, Intervals]:
    """The series of each list alone, at each level of support, or of each category; keys are the list's name, "1", "2", … or the
    category."""
    if by == "list":
        parts = {name: record.only(sources=[name]) for name in record.lists}
    elif by == "support":
        parts = {str(k): record.only(min_support=k) for k in range(1, int(record.support.max(initial=0)) + 1)}
    elif by == "category":
        parts = {c: record.only(category=c) for c in sorted({c for c in record.category if c is not None})}
    else:
        raise WrongUse(f"intervals can be split by list, support or category, not by {by!r}")
    return {name: interval_series(part, seed=seed, draws=draws, tell=tell) for name, part in parts.items()}


@dataclass(frozen=True)
class Epochs:
    """Milestones that share their best date, joined (e epochs): for regressions on the logarithm of intervals, which a zero interval has
    none of.

    year (e,) best dates, strictly increasing; count (e,) milestones joined; index (e,) position in the record of the first of each;
    interval (e - 1,) years from each epoch to the next, all above zero; age (e,) present minus year.
    """

    year: Floats
    count: Ints
    index: Ints
    interval: Floats
    age: Floats

    def __len__(self) -> int:
        return len(self.year)


def joined_epochs(window: Window) -> Epochs:
    """The epochs of a window, milestones with equal best dates joined."""
    year, first, count = np.unique(window.times, return_index=True, return_counts=True)
    return Epochs(year, count.astype(np.int64), window.index[first], np.diff(year), window.present - year)
