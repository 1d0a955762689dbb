# SPDX-License-Identifier: Apache-2.0
"""Depth: only milestones younger, or only older, than a cut, and the present moved later."""

from __future__ import annotations

import numpy as np

from .check import Answer, Check, Context, Row
from .growth import growth
from .rows import count, record_row, telling, years

MOVES = (0.0, 10.0, 50.0, 100.0, 500.0)


def run(context: Context) -> Answer:
    """Cuts at each tenth of the ranked ages.

    Younger than a cut: the first milestone kept opens the window. Older than a cut: the first milestone left out closes it. A
    later present adds a stretch in which nothing is listed.
    """
    record = context.record
    window = record.window
    published = growth(window)
    rows: list[Row] = []
    times = window.times
    for tenth in range(9, 0, -1):
        kept = int(round(len(times) * tenth / 10))
        if not 0 < kept < len(times):
            continue
        opener = float(times[len(times) - kept])
        part = record.only(start=opener)
        rows.append(
            record_row(
                "depth",
                f"youngest {tenth}0 %",
                part,
                published,
                cut="younger",
                cut_age=window.present - opener,
                start=opener,
                present=window.present,
            )
        )
    for tenth in range(9, 0, -1):
        kept = int(round(len(times) * tenth / 10))
        if not 0 < kept < len(times) or not times[kept] > window.start:
            continue
        closer = float(times[kept])
        part = record.only(present=closer)
        rows.append(
            record_row(
                "depth",
                f"oldest {tenth}0 %",
                part,
                published,
                cut="older",
                cut_age=window.present - closer,
                start=window.start,
                present=closer,
            )
        )
    for move in MOVES:
        present = window.present + move
        rows.append(
            record_row(
                "depth",
                f"present {years(move)} years later",
                record.only(present=present),
                published,
                cut="present",
                cut_age=-move,
                start=window.start,
                present=present,
            )
        )
    at = telling([r for r in rows if r.more["cut"] != "present"], published, int(np.ceil(window.n / 2)))
    summary = f"rows: {count(rows)}; the row shown weakens the estimate most while it keeps at least half of the milestones"
    return Answer(tuple(rows), summary, "growth in the younger and in the older half, each beside its own null", (), at)


CHECK = Check("depth", "Does the trend hang on how far back the list goes, or on the present?", "two milestones at different dates", run)
