# SPDX-License-Identifier: Apache-2.0
"""Recent end: the last years left out, since recognition takes time and its lag looks like slowing."""

from __future__ import annotations

from .check import Answer, Check, Context, Row
from .growth import growth
from .rows import count, record_row, telling, years

CUTS = (0.0, 1.0, 2.0, 5.0, 10.0, 20.0, 30.0, 40.0, 50.0)


def run(context: Context) -> Answer:
    record = context.record
    published = growth(record.window)
    rows: list[Row] = []
    skipped = []
    for cut in CUTS:
        present = record.window.present - cut
        if present <= record.window.start:
            skipped.append(cut)
            continue
        shorter = record.only(present=present)
        left_out = record.window.n - shorter.window.n
        rows.append(record_row("recent_end", cut, shorter, published, present=present, left_out=left_out))
    notes = (f"recent_end: leaving out {', '.join(years(c) for c in skipped)} years would leave no window",) if skipped else ()
    at = telling(rows, published)
    rising = len(rows) > 1 and all(
        b.estimate is not None and a.estimate is not None and b.estimate > a.estimate for a, b in zip(rows[:3], rows[1:4], strict=False)
    )
    summary = f"rows: {count(rows)}" + (
        "; growth rises as the latest years are left out, as recognition that takes time would have it" if rising else ""
    )
    return Answer(tuple(rows), summary, "growth with the last 10 and 50 years left out", notes, at)


CHECK = Check("recent_end", "Does recognition lag at the recent end shape the trend?", "a window longer than the years left out", run)
