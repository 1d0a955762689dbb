# SPDX-License-Identifier: Apache-2.0
"""Importance: is the trend there among the important, and does a threshold of notability that falls towards the present make it?

If only listing changes, the mix of importance changes with age: minor milestones appear late. So a class is taken as complete back to where its share among the
classes from it upward drops (one change point after another, each judged by permutation), never by its own trend, which would beg the question. The pooled row
fits one growth to all classes, each on its own complete range, as unequal periods of observation are pooled in earthquake catalogues (Weichert 1980,
Bull. Seismol. Soc. Am. 70:1337-1346).
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt
from scipy.optimize import brentq

from ..record import Record
from .check import Answer, Check, Context, Row
from .growth import Growth, growth, growth_of_mean, profile_ends, rank_p
from .rows import ENOUGH, LEVEL, count, number, record_row, row

Floats = npt.NDArray[np.float64]
MOST_THRESHOLDS = 10
MOST_CLASSES = 6
PERMUTATIONS = 499
SIDE = 4  # milestones on each side of a change of the mix


def run(context: Context) -> Answer:
    record = context.record
    window = record.window
    published = growth(window)
    counted = window.index[window.opening : window.opening + window.n]
    value = record.importance[counted]
    known = np.isfinite(value)
    if known.sum() < ENOUGH or len(np.unique(value[known])) < 2:
        return Answer(notes=(f"importance: needs a column importance with at least {ENOUGH} values, two of them different",))
    ages, value = (window.present - window.counted)[known], value[known]
    rows = [
        record_row("importance", float(c), record.only(min_importance=float(c)), published, kind="at least")
        for c in _steps(value, MOST_THRESHOLDS, np.arange(0.0, 1.0, 0.1))
    ]
    edges = _steps(value, MOST_CLASSES, np.array([0.0, 0.25, 0.5, 0.75]))
    spans = []
    for i, low in enumerate(edges):
        high = edges[i + 1] if i + 1 < len(edges) else np.inf
        inside = (value >= low) & (value < high)
        rows.append(_class_row(record, low, high, published))
        span, p = _complete(ages, inside, value >= low, window.span, np.random.default_rng([context.seed, 7401, i])) if high < np.inf else (window.span, None)
        spans.append((ages[inside & (ages < span)], span))
        rows.append(_complete_row(low, high, *spans[-1], p, published))
    pooled = _pooled(context, spans)
    rows.append(row("importance", float(edges[0]), pooled, published, "steady in each class", kind="pooled over complete ranges"))
    tau, tau_p = _moves(ages, value)
    at = len(rows) - 1
    left_out = len(record.importance[counted]) - int(known.sum())
    notes = (f"importance: {left_out} counted milestones without importance take no part",) if left_out else ()
    return Answer(tuple(rows), _sentence(rows, published, tau, tau_p), "growth pooled over the ranges in which each class is complete", notes, at)


def _sentence(rows: Sequence[Row], published: Growth, tau: float, tau_p: float) -> str:
    pooled = rows[-1]
    mix = f"importance {'rises' if tau > 0 else 'falls'} with age (Kendall's tau {tau:.2f}, p = {number(tau_p)})"
    text = f"{mix}; over the ranges in which each class is complete growth is {number(pooled.estimate)} a year; rows: {count(rows)}"
    speeding = published.estimate is not None and published.estimate > 0
    if speeding and tau > 0 and tau_p < LEVEL and pooled.stands != "yes":
        return f"a threshold of notability that falls towards the present decides the trend: {text}"
    if tau_p < LEVEL:
        return f"the mix of importance changes with age: {text}"
    return text


def _steps(value: Floats, most: int, shares: Floats) -> Floats:
    distinct = np.unique(value)
    return distinct if len(distinct) <= most else np.unique(np.quantile(value, shares, method="lower"))


def _class_row(record: Record, low: float, high: float, published: Growth) -> Row:
    with np.errstate(invalid="ignore"):
        keep = (record.importance >= low) & (record.importance < high)
    return record_row("importance", float(low), record.only(keep=keep), published, kind="class", below=None if high == np.inf else float(high))


def _complete_row(low: float, high: float, ages: Floats, span: float, p: float | None, published: Growth) -> Row:
    found = growth_of_mean(float(ages.mean() / span), len(ages), span) if len(ages) else Growth(0, None)
    return row(
        "importance", float(low), found, published, kind="class, where complete", below=None if high == np.inf else float(high), complete_to_age=span,
        mix_p_value=p,
    )  # fmt: skip


def _complete(ages: Floats, mine: npt.NDArray[np.bool_], from_here_up: npt.NDArray[np.bool_], span: float, rng: np.random.Generator) -> tuple[float, float | None]:
    """Age back to which a class keeps its share among the classes from it upward, and the p of the first change found."""
    order = np.argsort(ages[from_here_up], kind="stable")
    age, label = ages[from_here_up][order], mine[from_here_up][order].astype(float)
    first = None
    while len(age) >= 2 * SIDE:
        at, gain = _change(label[None, :])
        shuffled = rng.permuted(np.broadcast_to(label, (PERMUTATIONS, len(label))), axis=1)
        p = (1 + int((_change(shuffled)[1] >= gain[0]).sum())) / (PERMUTATIONS + 1)
        first = p if first is None else first
        if p >= LEVEL or gain[0] <= 0:
            break
        split = int(at[0])
        span = float(age[split])  # the first milestone beyond the change ends the range and is not counted
        age, label = age[:split], label[:split]
    return span, first


def _change(label: Floats) -> tuple[npt.NDArray[np.int64], Floats]:
    """Per row of labels, youngest first: the split before which their share is higher, and its gain in log-likelihood; 0 where there is none."""
    n = label.shape[1]
    young = np.arange(SIDE, n - SIDE + 1)
    total = np.cumsum(label, axis=1)
    a, whole = total[:, young - 1], total[:, -1:]
    gain = _fit(a, young) + _fit(whole - a, n - young) - _fit(whole, np.array([n]))
    gain = np.where(a / young > (whole - a) / (n - young), gain, 0.0)
    best = np.argmax(gain, axis=1)
    return young[best], gain[np.arange(len(label)), best]


def _fit(ones: Floats, n: npt.NDArray[np.int64]) -> Floats:
    p = np.clip(ones / n, 1e-12, 1 - 1e-12)
    return np.asarray(ones * np.log(p) + (n - ones) * np.log1p(-p))


def _pooled(context: Context, strata: Sequence[tuple[Floats, float]]) -> Growth:
    """One growth for classes seen over unequal spans, beside steady classes."""
    used = [(a, s) for a, s in strata if len(a) and s > 0]
    n = sum(len(a) for a, _ in used)
    if not n:
        return Growth(0, None)
    counts, spans = np.array([len(a) for a, _ in used], dtype=float), np.array([s for _, s in used])
    longest = float(spans.max())
    ratio = spans / longest
    rng = np.random.default_rng([context.seed, 7402])
    null = sum(s * rng.random((context.replicates, len(a))).sum(axis=1) for a, s in used)
    observed = float(sum(a.sum() for a, _ in used))

    def estimate(total: float) -> float:
        return float(brentq(lambda k: float((counts * ratio * _mean_age(k * ratio)).sum()) - total / longest, -1e7, 1e7, xtol=1e-10, rtol=1e-12))

    def per_event(k: float) -> float:
        return -k * observed / longest / n - float((counts * _log_mass(k * ratio)).sum()) / n

    k = estimate(observed)
    low, high = profile_ends(per_event, k, n)
    band = [estimate(float(q)) / longest for q in np.quantile(null, (0.975, 0.5, 0.025))]
    return Growth(n, k / longest, low / longest, high / longest, band[0], band[1], band[2], rank_p(observed, np.asarray(null)))


def _mean_age(k: Floats) -> Floats:
    """Mean age fraction under density proportional to exp(-k a)."""
    small = np.abs(k) < 1e-4
    safe = np.where(small, 1.0, k)
    with np.errstate(over="ignore"):
        return np.where(small, 0.5 - k / 12.0, 1.0 / safe - 1.0 / np.expm1(safe))


def _log_mass(k: Floats) -> Floats:
    """log of the integral of exp(-k a) over a in (0, 1)."""
    size = np.abs(k)
    safe = np.where(size < 1e-8, 1.0, size)
    return np.where(size < 1e-8, -k / 2, np.log(-np.expm1(-safe) / safe)) + np.where(k < 0, -k, 0.0)


def _moves(ages: Floats, value: Floats) -> tuple[float, float]:
    from scipy.stats import kendalltau

    found = kendalltau(ages, value)
    tau, p = float(found.statistic), float(found.pvalue)
    return (tau, p) if np.isfinite(tau) else (0.0, 1.0)


CHECK = Check("importance", "Does a threshold of notability that falls towards the present make the trend?", "a column importance", run)
