# SPDX-License-Identifier: Apache-2.0
"""Merging: the threshold at which two entries count as one milestone, and the rule that pools their datings."""

from __future__ import annotations

import numpy as np

from ..merge import link
from ..merge.entries import LinkOptions
from .check import Answer, Check, Context
from .growth import growth
from .rebuilt import merged, of_record
from .rows import count, record_row, telling

THRESHOLDS = (0.1, 0.25, 0.5, 0.75, 0.9, 0.99)
RULES = ("mixture", "inverse_variance", "random_effects", "paule_mandel")
MOST_ENTRIES = 5000  # linking is done again for each threshold


def run(context: Context) -> Answer:
    record = context.record
    published = growth(record.window)
    if context.entries is None or context.milestone is None or len(record.lists) < 2:
        return Answer(notes=("merging: needs the entries of two lists or more",))
    entries, labels, belongs = of_record(record, context.entries, np.asarray(context.milestone))
    if len(entries) < 2 or not belongs.any():
        return Answer(notes=("merging: the entries of this record are not at hand",))
    rows = []
    notes: tuple[str, ...] = ()
    if len(entries) <= MOST_ENTRIES:
        for i, accept in enumerate(THRESHOLDS):
            context.tell("merging anew", i / len(THRESHOLDS))
            linked = link(entries, context.decisions, LinkOptions(accept=accept, review=min(accept, 0.1)))
            part = merged(record, entries, linked.milestone, belongs)
            rows.append(
                record_row("merging", f"accept from {accept:g}", part, published, kind="threshold", accept=accept, milestones=len(part))
            )
    else:
        notes = (f"merging: above {MOST_ENTRIES:,} entries the threshold is not varied; link with another --accept and compare",)
    prefer = [("preferred", x) for x in record.lists]
    for rule, name in [*((r, None) for r in RULES), *prefer]:
        part = merged(record, entries, labels, belongs, rule=rule, prefer=name)
        setting = f"pooling {rule.replace('_', ' ')}" if name is None else f"pooling preferred {name}"
        rows.append(record_row("merging", setting, part, published, kind="pooling", accept=None, milestones=len(part)))
    at = telling(rows, published)
    many = [r.more["milestones"] for r in rows if r.more["kind"] == "threshold"]
    spread = f"{min(many)} to {max(many)} milestones over the thresholds; " if many else ""
    return Answer(tuple(rows), f"{spread}rows: {count(rows)}", "growth at the loosest and the strictest threshold", notes, at)


CHECK = Check("merging", "Does the trend hang on how entries were merged?", "the entries of two lists or more", run)
