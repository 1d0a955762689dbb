# SPDX-License-Identifier: Apache-2.0
"""The cumulative count of milestones with the fitted rate laws."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ...trend.curves import CURVES
from ...trend.positions import positions
from ...trend.rate_laws import Fit, fit_curve
from .data import Axis, ChartData, Panel, Series, floats
from .kind import Chart, Inputs, age_axis, at_least, least_age, present

Floats = npt.NDArray[np.float64]
POINTS = 160
DEEP = 300.0  # a window this many times longer than its median age is drawn over log age
DRAWN = ("steady", "log_linear", "hyperbolic", "power_law")
WORDS = {"steady": "steady", "log_linear": "log-linear (constant doubling time)", "hyperbolic": "hyperbolic", "power_law": "power law"}


def build(inputs: Inputs) -> ChartData:
    record = inputs.record
    window = record.window
    at_least(window, 3, "the cumulative count")
    events = positions(window)
    floor = least_age(record, window)
    ages = np.maximum(window.present - window.counted, floor)
    deep = bool(len(ages)) and window.span > DEEP * float(np.median(ages))
    grid = np.geomspace(window.span, floor, POINTS) if deep else np.linspace(window.span, 0.0, POINTS)
    grid[0] = window.span
    laws = []
    for curve in CURVES:
        # a power law counts from a start that was given; opened by the first milestone it is another law
        if curve.name not in DRAWN or (curve.name == "power_law" and window.opened_by_milestone):
            continue
        fit = fit_curve(curve, events)
        if fit is not None and not _same_as_steady(fit):
            laws.append(Series(WORDS[curve.name], "line", "law", _x(grid, window.present, deep), floats(expected(fit, grid / window.span))))
    steps = np.concatenate([[window.span], ages, [floor if deep else 0.0]])
    counts = np.concatenate([[0.0], np.arange(1.0, len(ages) + 1), [float(len(ages))]])
    count = Series("milestones", "steps", "data", _x(steps, window.present, deep), floats(counts))
    if deep:
        x = age_axis(record, [window.span, floor])
    else:
        x = Axis("year", "CE" if window.start >= 1 else "astronomical years, BCE marked", window.start, window.present, style="year")
    return ChartData(
        "cumulative",
        CHART.question,
        x,
        (Panel(Axis("milestones so far", "count", 0.0, 1.06 * max(len(ages), 1)), (*laws, count)),),
        "Every law is fitted to end at the count listed; what tells them apart is where the staircase leaves the line between.",
        (f"ages count back from {present(record)}",) if deep else (),
    )


def expected(fit: Fit, age_share: Floats) -> Floats:
    """(k,) expected number of events older than ages given as shares of the window."""
    v = np.clip(age_share, 0.0, 1.0)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        share, _ = fit.curve.cumulative(fit.theta, 1.0 - v, v)
    return np.asarray(fit.place.n * np.clip(share, 0.0, 1.0))


def _same_as_steady(fit: Fit) -> bool:
    return fit.curve.name == "hyperbolic" and fit.parameters.get("t_star") is None


def _x(ages: Floats, present_year: float, deep: bool) -> tuple[float, ...]:
    return floats(ages if deep else present_year - ages)


CHART = Chart("cumulative", "How does the count grow, and which simple law follows it?", "three milestones", build)
