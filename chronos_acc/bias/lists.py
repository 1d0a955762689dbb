# SPDX-License-Identifier: Apache-2.0
"""Lists as studies: each independent list on one common window, whether they agree, and their pooled growth."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ..trend.capture import families, grouped
from ..trend.kernels import growth_of_mean_age
from ..trend.meta import pooled as pool_studies
from ..trend.studies import PooledRow, lists_as_studies
from .check import Answer, Check, Context, Row
from .growth import Growth, growth
from .rows import count, number, p_words, record_row, simulated_row, telling

Floats = npt.NDArray[np.float64]
Bools = npt.NDArray[np.bool_]

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
        chosen = np.array([r.pooled for r in found.rows], dtype=bool)
        rows.append(_pooled(context, pooled, chosen, published, found.start, found.present))
    at = len(rows) - 1 if pooled is not None else telling(rows, published)
    agree = "" if pooled is None or pooled.p_equal is None else f"equal growth in all lists has p {p_words(pooled.p_equal)}; "
    shown = "" if pooled is None else f"pooled growth {number(pooled.mean)} a year ({number(pooled.low)} to {number(pooled.high)}); "
    return Answer(
        tuple(rows), f"{agree}{shown}rows: {count(rows)}", "growth of each list on the common window, and whether they agree", notes, at
    )


def _replicates(context: Context) -> int:
    """Fewer exchanges of labels for large records."""
    return min(REPLICATES, context.replicates, max(99, MOST_CELLS // max(len(context.record), 1)))


def _pooled(context: Context, p: PooledRow, chosen: Bools, published: Growth, start: float, present: float) -> Row:
    """Hartung-Knapp mean. Lists share milestones, so its own interval is too short: the row's null is a steady rate with the same
    shared mentions.
    """
    window = context.record.only(start=start, present=present).window
    counted = window.index[window.opening : window.opening + window.n]
    named = grouped(context.record)[1][counted][:, chosen]
    named = named[named.any(axis=1)]
    null = _steady_means(named, window.span, np.random.default_rng([context.seed, 7901]), _replicates(context))
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
    return simulated_row("lists", "pooled", len(named), p.mean, "steady, mentions shared alike", null, published, **more)


def _steady_means(named: Bools, span: float, rng: np.random.Generator, size: int) -> Floats:
    """(size,) pooled growth per year of lists that name (m, k) the milestones of a steady rate."""
    n = named.sum(axis=0).astype(float)
    mean = rng.random((size, len(named))) @ named / n
    k = growth_of_mean_age(np.clip(mean, 1e-9, 1 - 1e-9))
    small = np.abs(k) < 1e-3
    safe = np.where(small, 1.0, np.minimum(np.abs(k), 500.0))
    variance = np.where(small, 1.0 / 12.0, 1.0 / safe**2 - 1.0 / (4.0 * np.sinh(safe / 2.0) ** 2))  # of an age fraction
    error = 1.0 / np.sqrt(n * variance)
    return np.array([pool_studies(a, b).mean for a, b in zip(k, error, strict=True)]) / span


CHECK = Check(
    "lists", "Do the lists, taken as studies of one thing, agree?", "two independent lists with more than eight milestones each", run
)
