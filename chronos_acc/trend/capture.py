# SPDX-License-Identifier: Apache-2.0
"""Completeness from overlap: what do independent lists say of the milestones that none of them names, and of the trend after correction?"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from ..record import Bools, Record, Window
from . import words
from .null_model import youngest_floor
from .overlap import SCALES, CaptureFit, Sightings, fit
from .overlap_bins import CoverageBin, chao, chapman, coverage_bins, log_linear_models, petersen
from .rate_laws import growth_interval

if TYPE_CHECKING:
    import pandas as pd

    from .forgetting import Tipping

Floats = npt.NDArray[np.float64]

FEWEST_SHARED = 10

__all__ = [
    "Capture",
    "CaptureRow",
    "CaptureShare",
    "CoverageBin",
    "against_forgetting",
    "chao",
    "chapman",
    "corrected_growth",
    "coverage_bins",
    "families",
    "grouped",
    "log_linear_models",
    "petersen",
]


@dataclass(frozen=True)
class CaptureRow:
    """Growth per year after correction on one scale of age; low and high None where unbounded. age_effect: beta, above zero where older is
    named less."""

    scale: str
    growth: float
    low: float | None
    high: float | None
    age_effect: float
    log_likelihood: float
    aic: float
    headline: bool


@dataclass(frozen=True)
class CaptureShare:
    """Share of the milestones of an age that any of the lists names, by the headline fit; 95 % interval."""

    at: str
    age: float
    share: float
    low: float
    high: float


@dataclass(frozen=True)
class Capture:
    """What overlap says. lists: independent lists (a family of derived ones joined by +); shared: counted milestones named by two or more.

    growth, low, high per year are the headline's (the scale of lower AIC), None where not estimable; uncorrected the same without
    correction, the wider interval. ``fit`` and ``steady`` are the headline fit and the fit with growth held at zero, for simulating lists.
    """

    n: int
    lists: tuple[str, ...]
    shared: int
    estimable: bool
    scale: str | None = None
    growth: float | None = None
    low: float | None = None
    high: float | None = None
    uncorrected: float | None = None
    uncorrected_low: float | None = None
    uncorrected_high: float | None = None
    rows: tuple[CaptureRow, ...] = ()
    shares: tuple[CaptureShare, ...] = ()
    bins: tuple[CoverageBin, ...] = ()
    fit: CaptureFit | None = field(default=None, repr=False, compare=False)
    steady: CaptureFit | None = field(default=None, repr=False, compare=False)
    notes: tuple[str, ...] = ()

    @property
    def survives(self) -> bool:
        """The corrected growth lies above zero with its whole interval, from two independent lists or more."""
        return self.estimable and self.low is not None and self.low > 0

    def to_frame(self) -> pd.DataFrame:
        """One row a scale of age."""
        from .frames import frame

        return frame(self.rows, CaptureRow)

    def bins_frame(self) -> pd.DataFrame:
        """One row a bin of age."""
        from .frames import frame

        return frame(self.bins, CoverageBin)


def families(record: Record) -> tuple[tuple[int, ...], ...]:
    """Positions of the lists that count as one, a tuple each, in the order of their first list."""
    seen: dict[int, list[int]] = {}
    for position, label in enumerate(record.group):
        seen.setdefault(int(label), []).append(position)
    return tuple(tuple(members) for members in seen.values())


def grouped(record: Record) -> tuple[tuple[str, ...], Bools]:
    """Independent lists: those with a common ancestor become one that names what any of them names. Names (t,) joined by +, and mentions
    (m, t)."""
    together = families(record)
    names = tuple(" + ".join(record.lists[j] for j in members) for members in together)
    columns = [record.mentions[:, list(members)].any(axis=1) for members in together]
    return names, np.column_stack(columns) if columns else np.zeros((len(record), 0), bool)


def corrected_growth(record: Record, window: Window | None = None, *, interval: bool = True) -> Capture:
    """The joint likelihood of growth and naming on the window's counted milestones, with completeness by bins of age.

    Not estimable with fewer than two independent lists or fewer than ten shared milestones, nor where all are shared: the likelihood
    takes a milestone to be seen once one list names it, and of milestones chosen at support two or more it would find hardly any missed
    and call the growth real. Says why in ``notes``.
    """
    window = record.window if window is None else window
    names, mentions = grouped(record)
    inside = window.index[window.opening : len(window.times) - window.closing]
    named = mentions[inside]
    ages = window.present - window.counted
    keep = np.nonzero(named.any(axis=0))[0]
    names, named = tuple(names[j] for j in keep), named[:, keep]
    shared = int((named.sum(axis=1) >= 2).sum())
    if len(names) < 2:
        word = "one list" if len(names) == 1 else "no list"
        return Capture(
            window.n, names, shared, False, notes=(f"{word} only (lists that derive from one another count as one): overlap says nothing",)
        )
    if shared < FEWEST_SHARED or not window.span > 0:
        return Capture(
            window.n,
            names,
            shared,
            False,
            notes=(
                f"{shared} milestones are shared by independent lists; at least {FEWEST_SHARED} are needed to estimate what they missed",
            ),
        )
    if shared == window.n:
        return Capture(
            window.n,
            names,
            shared,
            False,
            notes=(
                "every milestone counted is named by two independent lists or more: chosen for their overlap (a least support) or copied from "
                "one another, they cannot say what was missed",
            ),
        )
    floor = youngest_floor(window)
    sightings = Sightings.of(ages, named, window.span, floor)
    fits = [f for f in (fit(sightings, scale, interval=interval) for scale in SCALES) if f is not None]
    estimate, low, high, low_robust, high_robust = growth_interval(window)
    notes = ["corrects for what the lists missed independently of one another, never for what all of them forgot"]
    if not fits:
        return Capture(window.n, names, shared, False, notes=("the joint likelihood found no maximum",))
    best = min(fits, key=lambda f: f.aic)
    rows = tuple(CaptureRow(f.scale, f.growth, f.low, f.high, f.beta, f.log_likelihood, f.aic, f is best) for f in fits)
    bins = coverage_bins(ages, named, FEWEST_SHARED)
    ordered = window.ages  # the milestone that opens the window among them, as at the tipping point
    places = [("oldest", float(ordered[0]))]
    if len(ordered) >= 10:
        places.append(("tenth oldest", float(ordered[9])))
    places.append(("median", float(np.median(ordered))))
    shares = tuple(CaptureShare(at, age, *best.completeness(age)) for at, age in places)
    lows = [x for x in (low, low_robust) if x is not None]
    highs = [x for x in (high, high_robust) if x is not None]
    return Capture(
        n=window.n,
        lists=names,
        shared=shared,
        estimable=True,
        scale=best.scale,
        growth=best.growth,
        low=best.low,
        high=best.high,
        uncorrected=estimate,
        uncorrected_low=min(lows, default=None),
        uncorrected_high=max(highs, default=None),
        rows=rows,
        shares=shares,
        bins=bins,
        fit=best,
        steady=fit(sightings, best.scale, growth=0.0, interval=False),
        notes=tuple(notes),
    )


def against_forgetting(capture: Capture, tipping: Tipping) -> str:
    """The share of the oldest that forgetting alone would leave listed, set against what overlap says of the same age; empty where one of
    them is not known."""
    form = tipping.adequate or next((f for f in tipping.forms if f.needed), None)
    needed = None if form is None else next((s for s in form.shares if s.at == "oldest"), None)
    found = next((s for s in capture.shares if s.at == "oldest"), None)
    if needed is None or found is None:
        return ""
    return (
        f"forgetting alone would need {words.percent(needed.share)} of the oldest listed ({words.years(needed.age)}); "
        f"overlap says {words.percent(found.low)} to {words.percent(found.high)}, of those that not all lists forgot alike"
    )
