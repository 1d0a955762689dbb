# SPDX-License-Identifier: Apache-2.0
"""The recall curve: what share of a steady past the list would hold at each age, if forgetting alone made it; with the tipping point."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ...trend.forgetting import Tipping, TippingForm, tipping
from .. import numbers
from .data import Axis, ChartData, Panel, Series, floats
from .kind import Chart, Inputs, age_axis, at_least, least_age

Floats = npt.NDArray[np.float64]
POINTS = 120


def build(inputs: Inputs) -> ChartData:
    record = inputs.record
    window = record.window
    at_least(window, 3, "the recall curve")
    found: Tipping | None = inputs.trend.tipping if inputs.trend is not None else None
    found = tipping(window, seed=inputs.seed, replicates=199) if found is None else found
    floor = least_age(record, window)
    ages = np.maximum(window.present - window.counted, floor)
    top = max(window.span, float(ages.max()) if len(ages) else 1.0)
    points = [f.estimate for f in found.forms if f.estimate is not None]
    grid = np.geomspace(max(min(floor, *(p / 30 for p in points)), top * 1e-12) if points else floor, top, POINTS)
    bands, curves, marks = [], [], []
    for form in found.forms:
        if not form.needed or form.estimate is None:
            continue
        name = "half forgotten every" if form.form == "exponential" else "1/(1 + age/s), s ="
        verdict = "" if form.suffices is None else ", suffices" if form.suffices else ", does not suffice"
        words = f"{name} {numbers.span(form.estimate)}{verdict}"
        curves.append(Series(words, "line", "law", floats(grid), floats(form.listed_share(grid))))
        bands.append(_band(form, grid))
        if form.form == "exponential":
            high = top if form.high is None else form.high
            marks.append(Series("tipping point", "dots", "mark", (form.estimate,), (0.5,), floats([form.low]), floats([high])))
    rug = Series("milestone", "ticks", "faint", floats(ages), (0.0,) * len(ages))
    notes = list(found.notes)
    if not curves:
        notes.append("no forgetting is needed: the record does not crowd towards the present")
    return ChartData(
        "recall",
        CHART.question,
        age_axis(record, [float(grid[0]), top]),
        (Panel(Axis("listed share of a steady past", "", -0.04, 1.04, style="share"), (*bands, *curves, rug, *marks)),),
        "If compilers forget at least as fast as a curve falls, a steady past gives this list; slower forgetting leaves some of the "
        "crowding unexplained.",
        tuple(notes),
    )


def _band(form: TippingForm, grid: Floats) -> Series:
    """Between the forgetting of both ends of the interval; an unbounded end is no forgetting at all."""
    exponential = form.form == "exponential"
    low = form.low if form.low is not None else form.estimate
    lower, upper = (_curve(exponential, size, grid) for size in (low, form.high))
    name = f"95 % of the {'half-life' if exponential else 'scale'}"
    return Series(name, "band", "null", floats(grid), y_low=floats(lower), y_high=floats(upper))


def _curve(exponential: bool, size: float | None, grid: Floats) -> Floats:
    if size is None:
        return np.ones_like(grid)
    if size == 0:
        return np.zeros_like(grid)
    return np.asarray(np.exp2(-grid / size) if exponential else 1.0 / (1.0 + grid / size))


CHART = Chart("recall", "How fast would compilers have to forget for a steady past to look like this?", "three milestones", build)
