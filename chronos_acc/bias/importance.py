# SPDX-License-Identifier: Apache-2.0
"""Importance: is the trend there among the important, and does a threshold of notability that falls towards the present make it?

If only listing changes, the mix of importance changes with age: minor milestones appear late. So a class is taken as complete
back to where its share among it and the classes above it drops (one change point after another, judged by permutation), never by
its own trend, which would beg the question; where the whole mix shows no change with age, every class counts as complete. Pooled
growth is one growth fitted to all classes, each on its own complete range, as unequal periods of observation are pooled in
earthquake catalogues (Weichert 1980, Bull. Seismol. Soc. Am. 70:1337-1346).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.optimize import brentq

from ..record import Record
from .check import Answer, Check, Context, Row
from .growth import Growth, growth, growth_of_mean, profile_ends, rank_p
from .rows import ENOUGH, LEVEL, count, number, p_words, record_row, row, stands

Floats = npt.NDArray[np.float64]
MOST_CLASSES = 10
QUANTILES = np.array([0.0, 0.25, 0.5, 0.75, 0.9])  # thresholds where importance takes more values than that
PERMUTATIONS = 499
GATE = 0.1  # p of the whole mix changing with age, from which classes are not looked at: all count as complete
# p of a change of the mix from which a range counts as complete: cutting too often costs precision, too seldom leaves the bias
SUSPECT = 0.25
SIDE = 4  # milestones on each side of a change of the mix


def run(context: Context) -> Answer:
    published = growth(context.record.window)
    known = np.isfinite(context.record.importance)
    record = context.record if known.all() else context.record.only(keep=known)  # its window is that of the milestones with importance
    window = record.window
    counted = window.index[window.opening : window.opening + window.n]
    value = record.importance[counted]
    if len(value) < ENOUGH or len(np.unique(value)) < 2:
        return Answer(notes=(f"importance: needs a column importance with at least {ENOUGH} values, two of them different",))
    ages = window.present - window.counted
    edges = np.unique(value) if len(np.unique(value)) <= MOST_CLASSES else np.unique(np.quantile(value, QUANTILES, method="lower"))
    strata: list[_Stratum] = []
    changes = mix_changes(ages, value, np.random.default_rng([context.seed, 7403]))
    for i in range(len(edges) - 1, -1, -1):  # from the highest class down, each beside those above it where they are complete
        inside = (value >= edges[i]) & (value < (edges[i + 1] if i + 1 < len(edges) else np.inf))
        span, p = window.span, None  # nothing is above the highest class, so it is taken as complete
        if strata and changes < GATE:
            reach = ages <= strata[0].span
            rng = np.random.default_rng([context.seed, 7401, i])
            span, p = _complete(ages[reach], inside[reach], (value >= edges[i])[reach], strata[0].span, rng)
        strata.insert(0, _Stratum(ages[inside & (ages < span)], int(inside.sum()), span, p))
    pooled = [_pooled(context, strata[i:]) for i in range(len(strata))]
    rows = [_row(record, edges, i, strata[i], pooled[i], published) for i in range(len(edges))]
    tau, tau_p = _moves(ages, value)
    shown = row("importance", float(edges[0]), pooled[0], published, "steady in each class, where complete")
    left_out = int((~known).sum())
    notes = (f"importance: {left_out} milestones without importance take no part",) if left_out else ()
    return Answer(
        tuple(rows),
        _sentence(rows, shown, published, (tau, tau_p, changes)),
        "growth pooled over the ranges in which each class is complete",
        notes,
        len(rows) - 1,
        shown,
    )


@dataclass(frozen=True)
class _Stratum:
    """A class of importance: ages (q,) inside its complete range, how many it holds in all, the range in years, and the p of the
    first change of the mix.
    """

    ages: Floats
    n: int
    span: float
    mix_p: float | None


def _row(record: Record, edges: Floats, i: int, stratum: _Stratum, pooled: Growth, published: Growth) -> Row:
    """Milestones of at least one importance; beside them the class that starts there, where it is complete, and the classes from
    it upward pooled.
    """
    low, high = float(edges[i]), float(edges[i + 1]) if i + 1 < len(edges) else None
    with np.errstate(invalid="ignore"):
        whole = growth(record.only(keep=(record.importance >= low) & (record.importance < (np.inf if high is None else high))).window)
    inner = (
        growth_of_mean(float(stratum.ages.mean() / stratum.span), len(stratum.ages), stratum.span) if len(stratum.ages) else Growth(0, None)
    )
    more = {
        "class_below": high,
        "class_n": stratum.n,
        "class_estimate": whole.estimate,
        "class_p_value": whole.p_value,
        "complete_to_age": stratum.span,
        "mix_p_value": stratum.mix_p,
        "complete_n": inner.n,
        "complete_estimate": inner.estimate,
        "complete_p_value": inner.p_value,
        "pooled_n": pooled.n,
        "pooled_estimate": pooled.estimate,
        "pooled_low": pooled.low,
        "pooled_high": pooled.high,
        "pooled_p_value": pooled.p_value,
        "pooled_stands": stands(pooled.estimate, pooled.p_value, published.estimate),
    }
    return record_row("importance", low, record.only(min_importance=low), published, **more)


def _sentence(rows: Sequence[Row], pooled: Row, published: Growth, mix: tuple[float, float, float]) -> str:
    tau, tau_p, changes = mix
    way = "rises" if tau > 0 else "falls"
    moves = f"importance {way} with age (Kendall's tau {tau:.2f}, p {p_words(tau_p)}; higher beyond some age: p {p_words(changes)})"
    text = f"{moves}; over the ranges in which each class is complete growth is {number(pooled.estimate)} a year; rows: {count(rows)}"
    speeding = published.estimate is not None and published.estimate > 0
    if speeding and changes < GATE and pooled.stands != "yes":
        return f"a threshold of notability that falls towards the present decides the trend: {text}"
    if tau_p < LEVEL or changes < LEVEL:
        return f"the mix of importance changes with age: {text}"
    return text


def _complete(
    ages: Floats, mine: npt.NDArray[np.bool_], from_here_up: npt.NDArray[np.bool_], span: float, rng: np.random.Generator
) -> tuple[float, float | None]:
    """Age back to which a class keeps its share among the classes from it upward, and the p of the first change found."""
    order = np.argsort(ages[from_here_up], kind="stable")
    age, label = ages[from_here_up][order], mine[from_here_up][order].astype(float)
    first = None
    while len(age) >= 2 * SIDE:
        at, gain = _change(label[None, :])
        shuffled = rng.permuted(np.broadcast_to(label, (PERMUTATIONS, len(label))), axis=1)
        p = (1 + int((_change(shuffled)[1] >= gain[0]).sum())) / (PERMUTATIONS + 1)
        first = p if first is None else first
        if p >= SUSPECT or gain[0] <= 0:
            break
        split = int(at[0])
        span = float(age[split])  # the first milestone beyond the change ends the range and is not counted
        age, label = age[:split], label[:split]
    return span, first


def _change(label: Floats) -> tuple[npt.NDArray[np.int64], Floats]:
    """Per row of labels, youngest first: the split before which their share is higher, and its gain in log-likelihood; 0 where
    there is none.
    """
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


def _pooled(context: Context, strata: Sequence[_Stratum]) -> Growth:
    """One growth for classes seen over unequal spans, beside steady classes."""
    used = [(s.ages, s.span) for s in strata if len(s.ages) and s.span > 0]
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
        def excess(k: float) -> float:
            return float((counts * ratio * _mean_age(k * ratio)).sum()) - total / longest

        return float(brentq(excess, -1e15, 1e15, xtol=1e-10, rtol=1e-12, maxiter=400))

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


def mix_changes(ages: Floats, value: Floats, rng: np.random.Generator) -> float:
    """p that importance is higher beyond some age than before it: the largest rank sum over all splits (Pettitt 1979, Appl. Stat.
    28:126-135), permuted.
    """
    from scipy.stats import rankdata

    rank = rankdata(value[np.argsort(ages, kind="stable")])
    rank = rank - rank.mean()
    n = len(rank)
    scale = np.sqrt(np.arange(1, n) * np.arange(n - 1, 0, -1.0))
    inner = slice(SIDE - 1, n - SIDE)

    def largest(rows: Floats) -> Floats:
        return np.asarray((-np.cumsum(rows, axis=1)[:, :-1] / scale)[:, inner].max(axis=1))

    if n < 2 * SIDE:
        return 1.0
    observed = largest(rank[None, :])[0]
    null = largest(rng.permuted(np.broadcast_to(rank, (PERMUTATIONS, n)), axis=1))
    return (1 + int((null >= observed - 1e-12).sum())) / (PERMUTATIONS + 1)


def _moves(ages: Floats, value: Floats) -> tuple[float, float]:
    from scipy.stats import kendalltau

    found = kendalltau(ages, value)
    tau, p = float(found.statistic), float(found.pvalue)
    return (tau, p) if np.isfinite(tau) else (0.0, 1.0)


CHECK = Check("importance", "Does a threshold of notability that falls towards the present make the trend?", "a column importance", run)
