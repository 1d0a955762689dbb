# SPDX-License-Identifier: Apache-2.0
"""How complete the lists are at each age, as far as their overlap can tell: bins, and the joint fit of growth and naming."""

from __future__ import annotations

import math

import numpy as np

from ...errors import RecordRefused
from ...trend.capture import corrected_growth
from ...trend.overlap import CaptureFit
from ...trend.overlap_bins import CoverageBin
from .data import Axis, ChartData, Panel, Series, floats
from .kind import Chart, Inputs, age_axis, at_least, least_age

POINTS = 60


def build(inputs: Inputs) -> ChartData:
    record = inputs.record
    window = record.window
    at_least(window, 3, "completeness by age")
    capture = getattr(inputs.trend, "capture", None)
    if capture is None or capture.fit is None:
        capture = corrected_growth(record, interval=False)
    if not capture.estimable or capture.fit is None:
        raise RecordRefused("; ".join(capture.notes) or "overlap says nothing here; load more independent lists")
    floor = least_age(record, window)
    ages = np.maximum(window.present - window.counted, floor)
    grid = np.geomspace(ages.min(), ages.max(), POINTS)
    share = np.array([capture.fit.completeness(float(a)) for a in grid])
    band = Series("joint fit, 95 %", "band", "null", floats(grid), y_low=floats(share[:, 1]), y_high=floats(share[:, 2]))
    lines = [Series("named by any list, joint fit", "line", "law", floats(grid), floats(share[:, 0]))]
    each = capture.fit.probabilities(grid)
    gap = (math.nan,)  # parts the lines of one series
    x = tuple(v for _ in capture.lists for v in (*floats(grid), *gap))
    y = tuple(v for j in range(len(capture.lists)) for v in (*floats(each[:, j]), *gap))
    lines.append(Series("named by each list alone, joint fit", "line", "faint", x, y))
    points = []
    for method, name in (("chapman", "two lists (Chapman)"), ("log_linear", "log-linear models"), ("chao", "at most (Chao's bound)")):
        bins = [b for b in capture.bins if b.method == method]
        if bins:
            middle = [float(np.sqrt(max(b.age_from, floor) * max(b.age_to, floor))) for b in bins]
            points.append(
                Series(
                    name, "dots", "data", floats(middle), floats(b.completeness for b in bins),
                    floats(max(b.age_from, floor) for b in bins), floats(max(b.age_to, floor) for b in bins),
                    floats(b.completeness_low for b in bins), floats(b.completeness_high for b in bins),
                )
            )  # fmt: skip
    named = window.index[window.opening : len(window.times) - window.closing]
    rug = Series("milestone", "ticks", "faint", floats(ages), (0.0,) * len(ages), label=tuple(record.title[i] for i in named))
    notes = list(capture.notes)
    if not capture.bins:
        notes.append("no bin of age holds ten shared milestones")
    apart = sum(not _meets(capture.fit, b, floor) for b in capture.bins)
    if apart:
        notes.append(
            f"{apart} of {len(capture.bins)} bins lie outside the joint fit's band: one curve of naming does not suit all ages, "
            "or lists follow one another"
        )
    return ChartData(
        "completeness",
        CHART.question,
        age_axis(record, [*ages]),
        (Panel(Axis("share of all milestones", "", -0.04, 1.04, style="share"), (band, *lines, rug, *points)),),
        "Where the share falls with age, part of the crowding towards the present is the lists' own.",
        tuple(notes),
    )


def _meets(fit: CaptureFit, found: CoverageBin, floor: float) -> bool:
    """The bin's interval and the band share some value at an age inside the bin; a bound from below leaves room above."""
    for age in np.geomspace(max(found.age_from, floor), max(found.age_to, floor), 5):
        _, low, high = fit.completeness(float(age))
        least = 0.0 if found.method == "chao" else found.completeness_low
        if low <= found.completeness_high and high >= least:
            return True
    return False


CHART = Chart(
    "completeness", "What share of the milestones of each age did the lists find?", "two independent lists that share ten milestones", build
)
