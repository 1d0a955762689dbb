# SPDX-License-Identifier: Apache-2.0
"""Completeness: growth after correction for what independent lists missed, and the share they name by range of age.

Rows of the joint likelihood first, one a scale of age, then one a range of age with the counts of overlap. It corrects only for
what the lists missed independently of one another: what all of them forgot no overlap can show.
"""

from __future__ import annotations

from dataclasses import asdict
from typing import Any

from scipy.special import erfc

from ..trend.capture import Capture, against_forgetting, corrected_growth
from ..trend.forgetting import tipping
from ..trend.overlap import fit
from .check import Answer, Check, Context, Row
from .growth import SMALLEST_P, Growth, growth
from .recall_decay import FITS
from .rows import number, record_row, stands, years

NULL = "steady, after correction"
BIN_COLUMNS = (
    "age_from",
    "age_to",
    "shared",
    "method",
    "total",
    "total_low",
    "total_high",
    "completeness",
    "completeness_low",
    "completeness_high",
    "chao_bound",
    "chapman",
    "log_linear_low",
    "log_linear_high",
)


def run(context: Context) -> Answer:
    record = context.record
    published = growth(record.window)
    capture = corrected_growth(record)
    notes = tuple(f"completeness: {n}" for n in capture.notes)
    if not capture.estimable:
        return Answer(notes=notes)
    rows = [_scale(capture, i, published) for i in range(len(capture.rows))]
    at = next(i for i, r in enumerate(capture.rows) if r.headline)
    for b in capture.bins:
        present, start = record.window.present - b.age_from, record.window.present - b.age_to
        part = record.only(start=start, present=present) if start < present else None
        if part is None:
            continue
        columns = {k: v for k, v in asdict(b).items() if k in BIN_COLUMNS}
        rows.append(
            record_row(
                "completeness",
                f"ages {years(b.age_from)} to {years(b.age_to)}",
                part,
                published,
                kind="age range",
                named=b.named,
                **columns,
            )
        )
    shown = rows[at]
    found = tipping(record.window, seed=context.seed, replicates=min(FITS, context.replicates))
    against = against_forgetting(capture, found)
    summary = (
        f"after correction for what {len(capture.lists)} independent lists missed, growth is {number(shown.estimate)} a year "
        f"({number(shown.more['low'])} to {number(shown.more['high'])}){'; ' + against if against else ''}; "
        "what all lists forgot together stays unseen"
    )
    return Answer(tuple(rows), summary, "corrected growth with its interval, and the share named at the oldest", notes, at)


def _scale(capture: Capture, i: int, published: Growth) -> Row:
    """One scale of age: profile interval of the growth, likelihood ratio against no growth."""
    found = capture.rows[i]
    p = None
    if capture.fit is not None:
        steady = fit(capture.fit.sightings, found.scale, growth=0.0, interval=False)
        if steady is not None:
            gain = max(0.0, found.log_likelihood - steady.log_likelihood)
            p = max(float(erfc(gain**0.5)), SMALLEST_P)  # chi-square on one degree of freedom, of twice the gain
    more: dict[str, Any] = {
        "low": found.low,
        "high": found.high,
        "kind": "joint likelihood",
        "age_effect": found.age_effect,
        "aic": found.aic,
    }
    more.update(
        headline=found.headline,
        shared=capture.shared,
        **{f"share_{s.at.replace(' ', '_')}": s.share for s in capture.shares if found.headline},
    )
    more.update(
        {f"share_{s.at.replace(' ', '_')}_{end}": getattr(s, end) for s in capture.shares if found.headline for end in ("low", "high")}
    )
    low = None if found.low is None else found.low - found.growth
    high = None if found.high is None else found.high - found.growth
    return Row(
        "completeness",
        f"joint likelihood, {found.scale}",
        capture.n,
        found.growth,
        NULL,
        low,
        0.0,
        high,
        p,
        stands(found.growth, p, published.estimate),
        more,
    )


CHECK = Check(
    "completeness",
    "Does the trend stand after correction for what independent lists missed?",
    "two independent lists that share ten milestones",
    run,
)
