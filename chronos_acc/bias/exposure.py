# SPDX-License-Identifier: Apache-2.0
"""Exposure: growth left beside the people, scholars or publications that could have made, or noticed, a milestone in each year."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..trend.exposure import exposure_of
from .check import Answer, Check, Context
from .growth import growth
from .offset import offset
from .rows import number, row


def run(context: Context) -> Answer:
    window = context.record.window
    published = growth(window)
    if context.exposure is None:
        return Answer(notes=("exposure: needs a table of exposure by year; give one with --exposure FILE.csv",))
    if not window.n or not window.span > 0:
        return Answer(notes=("exposure: needs a counted milestone",))
    exposure = exposure_of(context.exposure)
    first, last = exposure.covers
    notes = []
    if first > window.start or last < window.present:
        notes.append(
            f"exposure: known from {first:g} to {last:g}, the window runs from {window.start:g} to {window.present:g}; "
            "held constant beyond its ends"
        )
    ages = window.present - window.counted
    cells = offset(window.span, float(ages.min()))
    upto = window.present - cells.edge
    cells = replace(cells, mass=np.maximum(exposure.cumulated(upto) - exposure.cumulated(upto - cells.width), 0.0))
    rng = np.random.default_rng([context.seed, 7801])
    found = cells.growth(float(ages.mean()), window.n, rng=rng, size=context.replicates)
    edge = window.span / 100.0  # exposure at the ends of the window, over a hundredth of it
    old, young = (float(exposure.cumulated(t + edge) - exposure.cumulated(t)) / edge for t in (window.start, window.present - edge))
    new = row(
        "exposure",
        "per unit of exposure",
        found,
        published,
        "steady per unit of exposure",
        exposure_first=old,
        exposure_last=young,
        exposure_per_milestone=cells.total / window.n,
    )
    text = (
        f"per unit of exposure growth is {number(found.estimate)} a year, while exposure itself went from {number(old)} to {number(young)} "
        "over the window"
    )
    return Answer((new,), text, "growth per unit of exposure, and where the exposure comes from", tuple(notes), 0)


CHECK = Check("exposure", "Did the number of people who could make or note a milestone grow instead?", "a table of exposure by year", run)
