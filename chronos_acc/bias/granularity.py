# SPDX-License-Identifier: Apache-2.0
"""Granularity: fine milestones gather where much is known, which is recently. Trend level by level, and with children collapsed
into their parents.
"""

from __future__ import annotations

import numpy as np

from ..record import Record
from .check import Answer, Check, Context
from .growth import growth
from .rows import ENOUGH, count, number, record_row, telling


def run(context: Context) -> Answer:
    record = context.record
    published = growth(record.window)
    levels = sorted({x for x in record.level if x is not None})
    has_parents = any(x is not None for x in record.parent)
    if len(levels) < 2 and not has_parents:
        return Answer(notes=("granularity: needs a column level with two values, or a column parent",))
    rows = []
    if has_parents:
        keep = collapsed(record)
        part = record.only(keep=keep)
        rows.append(record_row("granularity", "children collapsed", part, published, kind="parent", milestones_lost=int((~keep).sum())))
    for level in levels if len(levels) > 1 else []:
        keep = np.array([x == level for x in record.level], dtype=bool)
        rows.append(
            record_row("granularity", f"level {level}", record.only(keep=keep), published, kind="level", milestones_lost=int((~keep).sum()))
        )
    at = 0 if has_parents and rows[0].n >= ENOUGH else telling(rows, published)
    shown = rows[at] if at is not None else rows[0]
    summary = f"{shown.setting}: growth {number(shown.estimate)} a year from {shown.n} milestones; rows: {count(rows)}"
    return Answer(tuple(rows), summary, "growth with children collapsed, or at the coarsest level", (), at)


def collapsed(record: Record) -> np.ndarray[tuple[int], np.dtype[np.bool_]]:
    """(m,) milestones that stay: those without a parent, and for each parent that is no milestone itself the earliest of its children."""
    titles = {t.casefold().strip() for t in record.title}
    keep = np.array([p is None for p in record.parent], dtype=bool)
    order = np.lexsort((record.id, record.best))
    seen: set[str] = set()
    for i in order:
        parent = record.parent[i]
        if parent is None:
            continue
        name = parent.casefold().strip()
        if name not in titles and name not in seen:
            seen.add(name)
            keep[i] = True
    return keep


CHECK = Check("granularity", "Are recent milestones merely finer?", "a column level or parent", run)
