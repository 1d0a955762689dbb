# SPDX-License-Identifier: Apache-2.0
"""Lists as studies: each independent list on one common window, whether they agree, and their pooled growth."""

from __future__ import annotations

from scipy.special import stdtr, stdtrit

from ..trend.capture import families, grouped
from ..trend.studies import PooledRow, lists_as_studies
from .check import Answer, Check, Context, Row
from .growth import growth
from .rows import count, number, record_row, stands, telling

REPLICATES = 499
MOST_CELLS = 1_000_000


def run(context: Context) -> Answer:
    record = context.record
    published = growth(record.window)
    found = lists_as_studies(record, seed=context.seed, replicates=_replicates(context))
    notes = tuple(n if n.startswith("lists") else f"lists: {n}" for n in found.notes)
    if not found.rows or found.start is None or found.present is None:
        return Answer(notes=notes or ("lists: needs two independent lists",))
    rows: list[Row] = []
    names, _ = grouped(record)
    for name, members in zip(names, families(record), strict=True):
        part = record.only(sources=[record.lists[i] for i in members], start=found.start, present=found.present)
        rows.append(record_row("lists", name, part, published, kind="list", start=found.start, present=found.present))
    pooled = next((p for p in found.pooled if p.statistic == "growth"), None)
    if pooled is not None:
        rows.append(_pooled(pooled, sum(r.n for r in rows), published.estimate, found.start, found.present))
    at = len(rows) - 1 if pooled is not None else telling(rows, published)
    agree = "" if pooled is None or pooled.p_equal is None else f"equal growth in all lists has p = {number(pooled.p_equal)}; "
    shown = "" if pooled is None else f"pooled growth {number(pooled.mean)} a year ({number(pooled.low)} to {number(pooled.high)}); "
    return Answer(
        tuple(rows), f"{agree}{shown}rows: {count(rows)}", "growth of each list on the common window, and whether they agree", notes, at
    )


def _replicates(context: Context) -> int:
    """Fewer exchanges of labels for large records."""
    return min(REPLICATES, context.replicates, max(99, MOST_CELLS // max(len(context.record), 1)))


def _pooled(p: PooledRow, n: int, published: float | None, start: float, present: float) -> Row:
    """Hartung-Knapp mean; its p and the band of the mean under no growth from its own standard error."""
    df = p.k - 1
    error = (p.high - p.low) / 2 / float(stdtrit(df, 0.975))
    value = 2.0 * float(stdtr(df, -abs(p.mean) / error)) if error > 0 else None
    more = {
        "low": p.low,
        "high": p.high,
        "kind": "pooled",
        "start": start,
        "present": present,
        "k": p.k,
        "p_equal": p.p_equal,
        "i2": p.i2,
        "tau2": p.tau2,
        "prediction_low": p.prediction_low,
        "prediction_high": p.prediction_high,
        "funnel_p": p.funnel_p,
    }
    return Row(
        "lists",
        "pooled",
        n,
        p.mean,
        "no growth in any list",
        p.low - p.mean,
        0.0,
        p.high - p.mean,
        value,
        stands(p.mean, value, published),
        more,
    )


CHECK = Check(
    "lists", "Do the lists, taken as studies of one thing, agree?", "two independent lists with more than eight milestones each", run
)
