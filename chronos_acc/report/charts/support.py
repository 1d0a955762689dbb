# SPDX-License-Identifier: Apache-2.0
"""Milestones on log age, a row a list, and above them how many independent lists name each."""

from __future__ import annotations

import numpy as np

from .data import Axis, ChartData, Panel, Series, floats
from .kind import Chart, Inputs, age_axis, at_least, least_age


def build(inputs: Inputs) -> ChartData:
    record = inputs.record
    window = record.window
    at_least(window, 1, "support by age")
    floor = least_age(record, window)
    index = window.index
    ages = np.maximum(window.ages, floor)
    support = record.support[index]
    most = int(support.max())
    names = tuple(f"{k} list{'' if k == 1 else 's'}" for k in range(most, 0, -1))
    young, old = (np.maximum(record.present - b[index], floor) for b in (record.latest, record.earliest))
    levels = tuple(
        Series(
            "milestone, with its dating", "ticks", "data", floats(ages[support == k]), (float(most - k),) * int((support == k).sum()),
            floats(young[support == k]), floats(old[support == k]), label=tuple(record.title[i] for i in index[support == k]),
        )
        for k in range(most, 0, -1)
        if (support == k).any()
    )  # fmt: skip
    rows = []
    for j, name in enumerate(record.lists):
        named = record.mentions[index, j]
        count = int(named.sum())
        rows.append(Series("named by the list", "ticks", "faint", floats(ages[named]), (float(j),) * count, label=(name,) * count))
    k = len(record.lists)
    panels = (
        Panel(Axis("named by", "independent lists", -0.5, most - 0.5, "names", names=names), levels, 1.0),
        Panel(Axis("each list", "", -0.5, k - 0.5, "names", names=record.lists), tuple(rows), max(0.6, k / most)),
    )
    return ChartData(
        "support",
        CHART.question,
        age_axis(record, [*ages]),
        panels,
        "Where one list ends and another begins, the spacing is the lists' before it is history's; milestones with "
        "more support are better known, and younger.",
    )


CHART = Chart("support", "Which lists speak for which stretch of time, and where do they agree?", "one milestone", build)
