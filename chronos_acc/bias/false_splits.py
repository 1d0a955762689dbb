# SPDX-License-Identifier: Apache-2.0
"""False splits: what if linking missed pairs? One milestone under two titles is counted twice, and that happens where many lists
speak, which is recently.

The rate of missed pairs is estimated from the probabilities of the pairs that linking left apart. The record is then split
further at that rate, at random, again and again; what one and two more doses of splits add is carried back by one dose, on a
parabola, to a record without them (as in Cook & Stefanski 1994).
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ..merge import link
from ..merge.entries import LinkOptions
from ..record import Record
from .check import Answer, Check, Context, Row
from .drawn import Drawn, drawn_growth, drawn_row
from .growth import growth, growth_of_mean
from .rebuilt import of_record
from .rows import count, number, row

Floats = npt.NDArray[np.float64]
ASSUMED = (0.05, 0.1, 0.2)
REPLICATES = 200
MOST_ENTRIES = 5000


def run(context: Context) -> Answer:
    record = context.record
    window = record.window
    published = growth(window)
    entries_of = np.bincount(record.owner, minlength=len(record))[window.index]
    if published.estimate is None or not (entries_of > 1).any():
        return Answer(notes=("false_splits: needs milestones that several entries make up",))
    estimated, notes = _miss_rate(context)
    rates = sorted({*ASSUMED, *([] if estimated is None else [estimated])})
    rows: list[Row] = []
    for i, rate in enumerate(rates):
        rng = np.random.default_rng([context.seed, 7601, i])
        split = _split(record, rate, rng)
        kind = "estimated" if rate == estimated else "assumed"
        found = drawn_row("false_splits", f"{rate:.2%} of pairs split again", split, published, kind=kind, rate=rate)
        if found is None:
            continue
        twice = _split(record, min(1.0, 2.0 * rate), rng)
        first = float((window.present - window.counted).mean() / window.span)
        mean = 3.0 * first - 3.0 * float(np.mean(split.mean)) + float(np.mean(twice.mean))
        n = max(1, round(3 * window.n - 3 * float(np.mean(split.n)) + float(np.mean(twice.n))))
        back = growth_of_mean(min(max(mean, 1e-12), 1 - 1e-12), n, window.span)
        rows.append(found)
        rows.append(row("false_splits", f"{rate:.2%} of pairs, taken back", back, published, kind=f"{kind}, extrapolated", rate=rate))
    wanted = "estimated, extrapolated" if estimated is not None else "assumed, extrapolated"
    at = next((i for i, r in enumerate(rows) if r.more["kind"] == wanted and (estimated is not None or r.more["rate"] == ASSUMED[1])), None)
    rate_words = (
        f"linking misses about {estimated:.2%} of true pairs"
        if estimated is not None
        else "the rate of missed pairs is assumed, not estimated"
    )
    shown = rows[at].estimate if at is not None else None
    summary = f"{rate_words}; without their splits growth would be about {number(shown)} a year; rows: {count(rows)}"
    return Answer(tuple(rows), summary, "the estimated rate of missed pairs, and growth with their splits taken back", notes, at)


def _miss_rate(context: Context) -> tuple[float | None, tuple[str, ...]]:
    """Share of true pairs that linking left apart, by its own probabilities."""
    if context.entries is None or context.milestone is None or len(context.record.lists) < 2:
        return None, ("false_splits: without entries the rate of missed pairs is assumed",)
    entries, _, _ = of_record(context.record, context.entries, np.asarray(context.milestone))
    if not 2 <= len(entries) <= MOST_ENTRIES:
        return None, (f"false_splits: the rate of missed pairs is assumed above {MOST_ENTRIES:,} entries",)
    linked = link(entries, context.decisions, LinkOptions(review=0.0))
    together = linked.milestone[linked.a] == linked.milestone[linked.b]
    inside = float(np.where(linked.state == "same", 1.0, linked.score)[together].sum())
    outside = float(linked.score[~together & (linked.state != "different")].sum())
    if not inside + outside > 0:
        return None, ("false_splits: no pair of entries is likely, so no rate of missed pairs can be estimated",)
    return outside / (inside + outside), ()


def _split(record: Record, rate: float, rng: np.random.Generator) -> Drawn:
    """Every entry but one of a milestone leaves it with this chance and stands at its own date."""
    window = record.window
    place = np.full(len(record), -1)
    place[window.index] = np.arange(len(window.index))
    parts = np.nonzero(place[record.owner] >= 0)[0]
    owner = record.owner[parts]
    many = np.bincount(owner, minlength=len(record))[owner] > 1
    parts, owner = parts[many], owner[many]
    first = np.unique(owner, return_index=True)[1]
    leaves = rng.random((REPLICATES, len(parts))) < rate
    leaves[:, first] = False  # one entry stays
    extra = np.where(leaves, record.mode[parts], window.present + 1.0)  # beyond the present: not counted
    dates = np.concatenate([np.broadcast_to(window.times, (REPLICATES, len(window.times))), extra], axis=1)
    return drawn_growth(window, dates)


CHECK = Check("false_splits", "What if linking missed pairs?", "milestones that several entries make up", run)
