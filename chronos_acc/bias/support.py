# SPDX-License-Identifier: Apache-2.0
"""Support: milestones named by at least so many independent lists, beside what steady lists with the fitted capture curve give at
the same threshold.

Asking for more lists raises the bias of recall, since old milestones are the ones that few lists remember: a row here never
upgrades a verdict.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from .capture_curve import capture_curve, steady_growth
from .check import Answer, Check, Context, Row
from .growth import growth
from .rows import ENOUGH, LEVEL, count, number, simulated_row

NULL = "steady, fitted capture curve"


def run(context: Context) -> Answer:
    record = context.record
    published = growth(record.window)
    curve = capture_curve(record)
    if curve is None:
        return Answer(notes=("support: needs two independent lists that share five milestones or more inside the window",))
    rows: list[Row] = []
    for threshold in range(1, int(record.support.max(initial=0)) + 1):
        part = record if threshold == 1 else record.only(min_support=threshold)
        found = growth(part.window)
        if found.estimate is None:
            continue
        rng = np.random.default_rng([context.seed, 7101, threshold])
        null = steady_growth(curve, threshold, found.n, part.window.span, rng=rng, size=context.replicates)
        new = simulated_row(
            "support",
            float(threshold),
            found.n,
            found.estimate,
            NULL,
            null,
            published,
            low=found.low,
            high=found.high,
            excess=found.estimate - float(np.median(null)),
            p_steady=found.p_value,
            capture_scale=curve.scale,
        )
        rows.append(_never_upgraded(new, published.estimate, published.p_value))
    at = 1 if len(rows) > 1 and rows[1].n >= ENOUGH else 0
    shown = rows[at]
    summary = (
        f"at {shown.setting:g} lists or more growth is {number(shown.estimate)} a year, "
        f"and steady lists that forget alike give {number(shown.null_median)}; "
        f"rows: {count(rows)}"
    )
    return Answer(tuple(rows), summary, "never a trend at a support threshold without what forgetting gives at that threshold", (), at)


def _never_upgraded(row: Row, published: float | None, published_p: float | None) -> Row:
    """A yes needs a published trend that is significant, and an estimate on the published side of what forgetting gives."""
    if row.stands != "yes" or row.estimate is None or published is None:
        return row
    beyond = (row.estimate - float(row.null_median or 0.0)) * math.copysign(1.0, published) > 0
    if not beyond:
        return replace(row, stands="weaker")
    return row if published_p is not None and published_p < LEVEL else replace(row, stands="too few")


CHECK = Check(
    "support", "Does the trend stand among milestones that several lists name?", "two independent lists that share milestones", run
)
