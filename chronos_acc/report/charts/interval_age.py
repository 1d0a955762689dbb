# SPDX-License-Identifier: Apache-2.0
"""Interval against age on log axes, with dating bars, the bands of two nulls behind, and the open interval marked."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ...trend import kernels
from ...trend.nulls import LOG_UNIFORM, STEADY
from .bands import interval_band
from .data import Axis, ChartData, Panel, Series, floats, limits
from .kind import Chart, Inputs, age_axis, at_least, least_age

Floats = npt.NDArray[np.float64]


def build(inputs: Inputs) -> ChartData:
    record = inputs.record
    window = record.window
    at_least(window, 3, "interval against age")
    floor = least_age(record, window)
    series = inputs.intervals
    if series is None:
        from ...intervals import interval_series

        series = interval_series(record, seed=inputs.seed, draws=inputs.draws)
    table = series.to_frame()
    closed = table[~table["open"].astype(bool) & (table["interval"] > 0)]
    last = table[table["open"].astype(bool)]
    ages = np.maximum(closed["age"].to_numpy(float), floor)
    gaps = np.maximum(closed["interval"].to_numpy(float), floor)
    low, high = (np.maximum(closed[c].to_numpy(float), floor) for c in ("interval_low", "interval_high"))
    place = {int(i): k for k, i in enumerate(record.id)}
    rows = [place[int(i)] for i in closed["milestone"]]
    young, old = (np.maximum(record.present - b[rows], floor) for b in (record.latest, record.earliest))

    bands = []
    for stream, (null, name) in enumerate(((LOG_UNIFORM, "picked evenly per log age, 95 %"), (STEADY, "steady rate, 95 %"))):
        x, a, b = interval_band(record, window, null, seed=inputs.seed, floor=floor, stream=stream)
        bands.append(Series(name, "band", "null", floats(x), y_low=floats(a), y_high=floats(b)))
    lines = []
    slope, level = (float(v) for v in kernels.log_log(ages, gaps)[:2]) if len(ages) > 2 else (np.nan, np.nan)
    if np.isfinite(slope):
        ends = np.array([ages.min(), ages.max()])
        fitted = 10.0 ** (level + slope * np.log10(ends))
        lines.append(Series(f"least squares, slope {slope:.2f}", "line", "law", floats(ends), floats(fitted)))
    points = Series(
        "milestone, with 95 % bars", "dots", "data", floats(ages), floats(gaps), floats(young), floats(old), floats(low), floats(high),
        label=tuple(str(t) for t in closed["title"]),
    )  # fmt: skip
    open_age = np.maximum(last["age"].to_numpy(float), floor)
    still = Series("open: nothing since", "dots", "open", floats(open_age), floats(np.maximum(last["interval"].to_numpy(float), floor)))
    heights = np.concatenate([gaps, low, high, open_age, *(s.y for s in lines), *(s.y_high for s in bands)])
    bottom, top = limits(heights, "log", 0.04)  # a band may run out below: no interval lies there
    joined = window.joined
    notes = []
    if joined:
        notes.append(f"{joined} milestones share their date with the one before; an interval of zero has no place on a log axis")
    if len(ages) and len(bands[0]):
        out = _outside(bands[0], ages, gaps)
        chance = f"{0.05 * len(ages):.0f}"
        notes.append(f"{out} of {len(ages)} intervals lie outside the band of even picking; chance alone puts about {chance} there")
    return ChartData(
        "interval_age",
        CHART.question,
        age_axis(record, [*ages, *open_age, *(a for s in bands for a in s.x)]),
        (Panel(Axis("interval to the next", "years", bottom, top, "log", style="length"), (*bands, *lines, points, still)),),
        "A straight cloud with slope near 1 is what even picking per log age gives by itself; only points outside the bands ask "
        "for another explanation.",
        tuple(notes),
    )


def _outside(band: Series, ages: Floats, gaps: Floats) -> int:
    """Intervals outside a band, which is carried on level beyond its ends."""
    x, at = np.log(band.x), np.log(ages)
    low, high = np.interp(at, x, np.log(band.y_low)), np.interp(at, x, np.log(band.y_high))
    return int(((np.log(gaps) < low - 1e-9) | (np.log(gaps) > high + 1e-9)).sum())


CHART = Chart("interval_age", "Do intervals shrink with age, and would making the list do that?", "three milestones", build)
