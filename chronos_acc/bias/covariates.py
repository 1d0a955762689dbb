# SPDX-License-Identifier: Apache-2.0
"""Covariates: what moves with the date. Nothing is adjusted for: precision, support, category and list are consequences of age as
much as its company.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ..record import Record
from .check import Answer, Check, Context, Row
from .growth import Growth, growth
from .rows import ENOUGH, LEVEL, number, record_row

Floats = npt.NDArray[np.float64]


def run(context: Context) -> Answer:
    record = context.record
    window = record.window
    published = growth(window)
    rows: list[Row] = []
    moving: list[str] = []
    for name, value in _numbers(record).items():
        tau, p = _association(window.times, value[window.index])
        if tau is None:
            continue
        if p is not None and p < LEVEL:
            moving.append(f"{name} (tau {tau:.2f})")
        rows.extend(_halves(record, name, value, published, tau, p))
    for name, labels in (("category", record.category),):
        rows.extend(_classes(record, name, labels, published, moving))
    rows.extend(_lists(record, published, moving))
    if not rows:
        return Answer(notes=("covariates: nothing differs between milestones but their dates",))
    summary = f"moves with the date: {', '.join(moving)}; never adjusted for" if moving else "nothing moves with the date at the 5 % level"
    rows.insert(
        0, record_row("covariates", "all milestones, unadjusted", record, published, covariate=None, moves_with=None, moves_with_p=None)
    )
    at = 0  # nothing here says whether the trend stands: the rows below it are picked by a consequence of age
    return Answer(tuple(rows), summary, "which columns move with the date, without adjusting for them", (), at)


def _numbers(record: Record) -> dict[str, Floats]:
    """Precision is the dating's width over its age; support the number of independent lists."""
    age = np.maximum(record.present - record.best, np.where(record.unit > 0, record.unit / 2, 1e-9))
    with np.errstate(divide="ignore"):
        precision = np.where(record.unit > 0, np.log10(np.maximum(record.unit, 1e-300) / age), np.nan)
    return {
        "relative precision": precision if len(np.unique(record.unit)) > 1 else np.full(len(record), np.nan),
        "width of dating": np.where(record.unit > 0, record.unit, np.nan),
        "support": record.support.astype(float),
        "importance": record.importance,
    }


def _association(times: Floats, value: Floats) -> tuple[float | None, float | None]:
    from scipy.stats import kendalltau

    known = np.isfinite(value)
    if known.sum() < ENOUGH or len(np.unique(value[known])) < 2 or len(np.unique(times[known])) < 2:
        return None, None
    found = kendalltau(times[known], value[known])
    return float(found.statistic), float(found.pvalue)


def _halves(record: Record, name: str, value: Floats, published: Growth, tau: float | None, p: float | None) -> list[Row]:
    known = np.isfinite(value)
    middle = float(np.median(value[known]))
    upper = known & (value > middle) if (value[known] > middle).any() else known & (value >= middle)
    out = []
    for side, keep in (("lower", known & ~upper), ("upper", upper)):
        if keep.any():
            out.append(
                record_row(
                    "covariates", f"{name}, {side} half", record.only(keep=keep), published, covariate=name, moves_with=tau, moves_with_p=p
                )
            )
    return out


def _classes(record: Record, name: str, labels: tuple[str | None, ...], published: Growth, moving: list[str]) -> list[Row]:
    from scipy.stats import kruskal

    window = record.window
    names = sorted({x for x in labels if x is not None})
    if len(names) < 2:
        return []
    inside = [np.array([labels[i] == x for i in window.index], dtype=bool) for x in names]
    groups = [window.times[keep] for keep in inside if keep.sum() >= 2]
    p = float(kruskal(*groups).pvalue) if len(groups) > 1 and len(np.unique(window.times)) > 1 else None
    if p is not None and p < LEVEL:
        moving.append(f"{name} (p {number(p)})")
    return [
        record_row("covariates", f"{name} {x}", record.only(category=x), published, covariate=name, moves_with=None, moves_with_p=p)
        for x in names
    ]


def _lists(record: Record, published: Growth, moving: list[str]) -> list[Row]:
    if len(record.lists) < 2:
        return []
    window = record.window
    out = []
    for j, x in enumerate(record.lists):
        named = record.mentions[:, j]
        tau, p = _association(window.times, named[window.index].astype(float))
        if p is not None and p < LEVEL:
            moving.append(f"list {x} (tau {tau:.2f})")
        if named.any():
            out.append(
                record_row(
                    "covariates", f"named by {x}", record.only(keep=named), published, covariate="list", moves_with=tau, moves_with_p=p
                )
            )
    return out


CHECK = Check("covariates", "What moves with the date?", "a column that differs between milestones", run)
