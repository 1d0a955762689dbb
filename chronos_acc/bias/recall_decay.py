# SPDX-License-Identifier: Apache-2.0
"""Recall decay: what remains of the growth if listing forgets with age, and how fast forgetting would have to be.

The estimate of a row is the growth left beside a listed share of 2^(-age/h), or of 1/(1 + age/s). Steady listing forgotten at that speed is the null. At the fitted
speed nothing is left by construction, so that row carries no p: the fitted half-life equals the doubling time, and one list cannot say which of the two it is.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import numpy.typing as npt

from ..record import Window
from .check import Answer, Check, Context, Row
from .growth import Growth, growth
from .offset import offset
from .rows import number, row, years

Floats = npt.NDArray[np.float64]
GIVEN = (2.0, 1.0, 0.5, 0.25)  # half-lives as shares of the window


def run(context: Context) -> Answer:
    window = context.record.window
    published = growth(window)
    if published.estimate is None or window.n < 2:
        return Answer(notes=("recall_decay: needs two counted milestones",))
    rows = []
    fitted = math.log(2.0) / published.estimate if published.estimate > 0 else None
    if fitted is not None:
        rows.append(_exponential(context, window, published, fitted, "fitted", "half-life fitted"))
        if published.low is not None and published.low > 0:
            rows.append(_exponential(context, window, published, math.log(2.0) / published.low, "critical", "half-life that just ends the significance"))
    for share in GIVEN:
        half_life = share * window.span
        rows.append(_exponential(context, window, published, half_life, "given", f"half-life {years(half_life)} years"))
    if fitted is None:
        return Answer(tuple(rows), "no forgetting needed: the record does not speed up", "nothing", (), 0)
    oldest = 2.0 ** (-float(window.ages[0]) / fitted)
    summary = (
        f"a steady rate half forgotten every {years(fitted)} years gives the same record (oldest listed share {number(oldest)}); "
        "this equals the doubling time, and a list alone cannot say which"
    )
    return Answer(tuple(rows), summary, "the half-life of forgetting that would suffice, beside the doubling time", (), 0)


def _exponential(context: Context, window: Window, published: Growth, half_life: float, kind: str, setting: str) -> Row:
    return forgotten(context, window, published, lambda a: np.asarray(np.exp2(-a / half_life)), "exponential", half_life, kind, setting)


def forgotten(
    context: Context, window: Window, published: Growth, share: Callable[[Floats], Floats], form: str, parameter: float, kind: str, setting: str
) -> Row:
    """Growth left beside a listed share, with the listed and unlisted numbers it implies."""
    known = offset(window.span, float((window.present - window.counted).min()), share)
    rng = np.random.default_rng([context.seed, 7201])
    left = known.growth(float((window.present - window.counted).mean()), window.n, rng=rng, size=context.replicates)
    if kind == "fitted":
        left = replace(left, null_low=None, null_median=None, null_high=None, p_value=None)
    ages = np.sort(window.present - window.counted)
    total = window.n * window.span / known.total
    more = {
        "form": form,
        "parameter": parameter,
        "kind": kind,
        "listed_share_oldest": float(share(ages[-1:])[0]),
        "listed_share_median": float(share(np.array([np.median(ages)]))[0]),
        "listed_share_tenth_oldest": float(share(ages[-min(10, len(ages)) :][:1])[0]),
        "total": total,
        "unlisted": total - window.n,
    }
    name = f"recall_decay ({form}, {'fitted to this' if kind == 'fitted' else 'given'})"
    return row("recall_decay", setting, left, published, name, **more)


CHECK = Check("recall_decay", "Would forgetting of the old alone produce the trend?", "two counted milestones", run)
