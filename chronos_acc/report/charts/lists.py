# SPDX-License-Identifier: Apache-2.0
"""The slopes of the lists with intervals: each on its own stretch of time, each on the stretch that all cover, and their pooled mean."""

from __future__ import annotations

import numpy as np

from ...errors import RecordRefused, Refused
from ...trend.regressions import regress
from ...trend.studies import Studies, lists_as_studies
from .data import Axis, ChartData, Panel, Series, floats, limits
from .kind import Chart, Inputs

OWN, COMMON = -0.18, 0.18  # above and below the middle of a list's row


def build(inputs: Inputs) -> ChartData:
    record = inputs.record
    studies: Studies | None = getattr(inputs.trend, "studies", None)
    studies = lists_as_studies(record, seed=inputs.seed) if studies is None else studies
    groups = list(dict.fromkeys(record.group.tolist()))
    members = [tuple(n for n, g in zip(record.lists, record.group, strict=True) if g == group) for group in groups]
    own = []
    for row, lists in enumerate(members):
        try:
            fit = regress(record.only(sources=lists).window, predictors=("log10_age",), estimators=("ols_hc3",)).rows
        except Refused:
            fit = ()
        if fit and fit[0].slope is not None:
            own.append((row, fit[0].slope, fit[0].low, fit[0].high))
    if not own:
        raise RecordRefused("no list has three intervals of its own, so there is no slope to draw; load longer lists")
    names = tuple(" + ".join(m) for m in members)
    place = {name: row for row, name in enumerate(names)}
    common = [(place[r.list], r.slope, r.slope_low, r.slope_high) for r in studies.rows if r.slope is not None and r.list in place]
    pooled = [r for r in studies.pooled if r.statistic == "slope"]
    series = [
        Series("1: even picking per log age", "rule", "null", (1.0,)),
        Series("0: no change with age", "rule", "faint", (0.0,)),
        _dots("the whole list, 95 %", "faint" if common else "data", own, OWN if common else 0.0, names),
    ]
    if common:
        series.append(_dots("on the stretch that all lists cover, 95 %", "data", common, COMMON, names))
    rows = names
    notes = list(studies.notes)
    if pooled:
        p = pooled[0]
        rows = (*names, "pooled")
        series.append(
            Series(
                "pooled mean (Hartung–Knapp), 95 %", "dots", "mark", floats([p.mean]), (float(len(names)),), floats([p.low]),
                floats([p.high]),
            )  # fmt: skip
        )
        if p.p_equal is not None:
            notes.append(f"equal slopes: p = {p.p_equal:.3f}, by exchanging the labels of lists within milestones")
    ends = [v for s in series for v in (*s.x, *s.x_low, *s.x_high)]
    finite = np.array([v for v in ends if np.isfinite(v)])
    # one list of a handful of milestones must not squeeze the others: its bar runs to the edge
    low, high = limits(np.clip(finite, -2.0, 4.0), margin=0.05)
    return ChartData(
        "lists",
        CHART.question,
        Axis("slope of log interval on log age", "", low, high),
        (Panel(Axis("list", "", -0.5, len(rows) - 0.5, "names", names=rows), tuple(series)),),
        "A slope near 1 is what even picking per log age gives by itself; lists that disagree on one stretch of time were "
        "made differently.",
        tuple(notes),
    )


def _dots(name: str, role: str, rows: list[tuple[int, float, float | None, float | None]], shift: float, names: tuple[str, ...]) -> Series:
    return Series(
        name, "dots", "faint" if role == "faint" else "data", floats(r[1] for r in rows), floats(r[0] + shift for r in rows),
        floats(r[2] for r in rows), floats(r[3] for r in rows), label=tuple(names[r[0]] for r in rows),
    )  # fmt: skip


CHART = Chart("lists", "Do the lists agree on the slope?", "a list with three intervals", build)
