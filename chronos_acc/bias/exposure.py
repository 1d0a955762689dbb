# SPDX-License-Identifier: Apache-2.0
"""Exposure: growth left beside the people, scholars or publications that could have made, or noticed, a milestone in each year."""

from __future__ import annotations

from typing import Any

import numpy as np
import numpy.typing as npt

from ..errors import WrongUse
from .check import Answer, Check, Context
from .growth import growth
from .offset import offset
from .rows import number, row

Floats = npt.NDArray[np.float64]


def run(context: Context) -> Answer:
    window = context.record.window
    published = growth(window)
    if context.exposure is None:
        return Answer(notes=("exposure: needs a table of exposure by year; give one with --exposure FILE.csv",))
    if not window.n or not window.span > 0:
        return Answer(notes=("exposure: needs a counted milestone",))
    year, value = table_of(context.exposure)
    notes = []
    if year[0] > window.start or year[-1] < window.present - 1.0:
        notes.append(
            f"exposure: known from {year[0]:g} to {year[-1]:g}, the window runs from {window.start:g} to {window.present:g}; "
            "held constant beyond its ends"
        )

    def known(age: Floats) -> Floats:
        return np.exp(np.interp(window.present - age, year, np.log(value)))

    ages = window.present - window.counted
    rng = np.random.default_rng([context.seed, 7801])
    found = offset(window.span, float(ages.min()), known).growth(float(ages.mean()), window.n, rng=rng, size=context.replicates)
    times = np.linspace(window.start, window.present, 2001)
    weight = known(window.present - times)
    per_event = float(weight.mean()) * window.span / window.n
    new = row(
        "exposure",
        "per unit of exposure",
        found,
        published,
        "steady per unit of exposure",
        exposure_first=float(weight[0]),
        exposure_last=float(weight[-1]),
        exposure_per_milestone=per_event,
    )
    fold = weight[-1] / weight[0]
    text = f"per unit of exposure growth is {number(found.estimate)} a year, while exposure itself grew {fold:.3g}-fold over the window"
    return Answer((new,), text, "growth per unit of exposure, and where the exposure comes from", tuple(notes), 0)


def table_of(exposure: Any) -> tuple[Floats, Floats]:
    """Years in order and exposure above zero, from a pair of columns, a two-column array, or an object with ``years`` and
    ``values`` or ``exposure``.
    """
    if hasattr(exposure, "years"):
        columns = (exposure.years, exposure.values if hasattr(exposure, "values") else exposure.exposure)
    else:
        array = np.asarray(exposure, dtype=float)
        columns = (
            (array[0], array[1]) if array.ndim == 2 and len(array) == 2 else (array[:, 0], array[:, 1]) if array.ndim == 2 else ((), ())
        )
    year, value = np.asarray(columns[0], dtype=float), np.asarray(columns[1], dtype=float)
    if not len(year) or year.shape != value.shape or not (np.isfinite(year) & np.isfinite(value)).all() or not (value > 0).all():
        raise WrongUse("exposure needs finite years, each with a value above zero; mend the table")
    order = np.argsort(year, kind="stable")
    if (np.diff(year[order]) <= 0).any():
        raise WrongUse("exposure has a year twice; give each year once")
    return year[order], value[order]


CHECK = Check("exposure", "Did the number of people who could make or note a milestone grow instead?", "a table of exposure by year", run)
