# SPDX-License-Identifier: Apache-2.0
"""Leave out: lists, categories, epochs and single milestones, and the smallest number of milestones whose loss ends the significance."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ..record import Record
from ..trend.kernels import growth_of_mean_age
from .check import Answer, Check, Context, Row
from .growth import Growth, growth, two_sided
from .offset import offset
from .rows import LEVEL, count, record_row, row, telling, years

Floats = npt.NDArray[np.float64]
EPOCHS = 10
MOST_TELLING = 5


def run(context: Context) -> Answer:
    record = context.record
    published = growth(record.window)
    rows = _lists(record, published) + _categories(record, published) + _epochs(context, published)
    single, greedy, sentence = _milestones(record, published)
    at = telling([r for r in rows if r.more["left_out"] in ("list", "category")], published)
    if at is None:
        at = telling(rows, published)
    rows += single + greedy
    return Answer(
        tuple(rows),
        f"rows: {count(rows)}; {sentence}",
        "the list or category whose loss matters most, and how many milestones carry the trend",
        (),
        at,
    )


def _lists(record: Record, published: Growth) -> list[Row]:
    rows = []
    for j, name in enumerate(record.lists):
        if len(record.lists) < 2:
            break
        rest = record.only(sources=[x for i, x in enumerate(record.lists) if i != j])
        rows.append(
            record_row("leave_out", f"without list {name}", rest, published, left_out="list", milestones_lost=len(record) - len(rest))
        )
    return rows


def _categories(record: Record, published: Growth) -> list[Row]:
    names = sorted({c for c in record.category if c is not None})
    rows = []
    for name in names if len(names) > 1 else []:
        keep = np.array([c != name for c in record.category], dtype=bool)
        rest = record.only(keep=keep)
        rows.append(
            record_row("leave_out", f"without category {name}", rest, published, left_out="category", milestones_lost=int((~keep).sum()))
        )
    return rows


def _epochs(context: Context, published: Growth) -> list[Row]:
    """A stretch leaves with its time: the rate is fitted, and the null drawn, on what remains of the window."""
    window = context.record.window
    if window.n < 2 or not window.span > 0:
        return []
    edges = np.quantile(window.counted, np.linspace(0, 1, min(EPOCHS, window.n) + 1))
    edges[0], edges[-1] = window.start, window.present
    rows = []
    for i, (low, high) in enumerate(zip(edges[:-1], edges[1:], strict=True)):
        out = (window.counted > low) & (window.counted <= high)
        pieces = [(a, b) for a, b in ((window.start, low), (high, window.present)) if b > a]
        left = window.counted[~out]
        if high <= low or not pieces or not len(left):
            continue
        rng = np.random.default_rng([context.seed, 7301, i])
        remains = offset(
            window.span, float((window.present - left).min()), pieces=[(window.present - b, window.present - a) for a, b in pieces]
        )
        found = remains.growth(float((window.present - left).mean()), len(left), rng=rng, size=context.replicates)
        rows.append(
            row("leave_out", f"without {years(low)} to {years(high)}", found, published, left_out="epoch", milestones_lost=int(out.sum()))
        )
    return rows


def _milestones(record: Record, published: Growth) -> tuple[list[Row], list[Row], str]:
    """Each milestone left out in turn: the two intervals beside it merge and all is fitted again. Then the most telling one,
    again and again.
    """
    window = record.window
    if published.estimate is None or published.p_value is None or window.n < 3:
        return [], [], "too few milestones to leave any out"
    sign = 1.0 if published.estimate >= 0 else -1.0
    change = np.array([sign * (e - published.estimate) for e in _without_each(record)])
    order = [int(i) for i in np.argsort(change, kind="stable")[:MOST_TELLING]]
    single = [_without(record, [i], published, f"without {record.title[window.index[i]]}", "milestone") for i in order]
    if published.p_value >= LEVEL:
        return single, [], "not significant as published, so no milestone need go"
    gone = _greedy(record, sign)
    if gone is None:
        return single, [], "more than half of the milestones would have to go before the significance ends"
    many = len(gone) > 1
    greedy = [_without(record, gone, published, f"without {len(gone)} milestone{'s' if many else ''}", "milestones")]
    return single, greedy, f"at most {len(gone)} milestone{'s' if many else ''} must go for the significance to end (found greedily)"


def _without_each(record: Record) -> Floats:
    """(w,) growth without each milestone of the window."""
    window = record.window
    ages = window.present - window.counted
    total, n = ages.sum(), window.n
    out = np.full(len(window.times), growth(window).estimate or 0.0)
    first = window.opening
    out[first : first + n] = growth_of_mean_age(np.clip((total - ages) / (n - 1) / window.span, 1e-15, 1 - 1e-15)) / window.span
    if window.opened_by_milestone and window.opening == 1:  # the next milestone opens the window
        keep = np.ones(len(record), bool)
        keep[window.index[0]] = False
        out[0] = growth(record.only(keep=keep).window).estimate or 0.0
    return out


def _without(record: Record, positions: list[int], published: Growth, setting: str, kind: str) -> Row:
    keep = np.ones(len(record), bool)
    keep[record.window.index[positions]] = False
    titles = "; ".join(record.title[record.window.index[i]] for i in positions[:20]) + ("; …" if len(positions) > 20 else "")
    return record_row("leave_out", setting, record.only(keep=keep), published, left_out=kind, milestones_lost=len(positions), titles=titles)


def _greedy(record: Record, sign: float) -> list[int] | None:
    """Positions in the window whose loss ends the significance, most telling first; None where half of them do not suffice.

    At one n and window, p depends on the mean age alone, so the most telling counted milestone is the youngest of a speeding
    record and the oldest of a slowing one; the only rival is the milestone that opens the window.
    """
    window = record.window
    times = window.times
    opener, low, high = (0 if window.opened_by_milestone else None), window.opening, window.opening + window.n

    def p_of(opener: int | None, low: int, high: int) -> float:
        start = window.start if opener is None else float(times[opener])
        counted = times[low:high][times[low:high] > start]
        if not len(counted):
            return 1.0
        mean = float((window.present - counted).mean() / (window.present - start))
        return 1.0 if (0.5 - mean) * sign <= 0 else float(two_sided(np.array(mean), len(counted)))

    gone: list[int] = []
    while len(gone) < max(1, window.n // 2):
        options: list[tuple[int | None, int, int, int]] = [(opener, low, high - 1, high - 1) if sign > 0 else (opener, low + 1, high, low)]
        if opener is not None:
            options.append((low, low + 1, high, opener))
        p, (opener, low, high, lost) = max(((p_of(o, a, b), (o, a, b, i)) for o, a, b, i in options), key=lambda x: x[0])
        gone.append(lost)
        if p >= LEVEL:
            return gone
    return None


CHECK = Check("leave_out", "Does one list, category, epoch or milestone carry the trend?", "three counted milestones", run)
