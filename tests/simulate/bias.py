# SPDX-License-Identifier: Apache-2.0
"""What the checks conclude on records of known truth, at full size: ``python -m tests.simulate.bias [records]`` prints Markdown tables."""

from __future__ import annotations

import sys
from collections import Counter
from collections.abc import Callable, Iterator
from dataclasses import replace

import numpy as np

from chronos_acc.bias import Context, run_checks
from chronos_acc.bias.growth import mean_cdf
from chronos_acc.record import Record

SPAN = 1000.0
WORDS = ("yes", "too few", "weaker", "no")


def ages(rng: np.random.Generator, n: int, doublings: float) -> np.ndarray:
    """Ages of n events whose rate doubles so often over the window."""
    k = doublings * np.log(2.0)
    x = rng.random(n)
    return SPAN * (1.0 - (np.log1p(x * np.expm1(k)) / k if k else x))


def lists(
    rng: np.random.Generator, about: int, doublings: float = 0.0, half_life: float | None = None, chance: float = 0.45, number: int = 4
) -> Record:
    """Independent lists; about so many milestones named by any."""

    def named_of(a: np.ndarray) -> np.ndarray:
        p = chance * (np.exp2(-a / half_life) if half_life else np.ones(len(a)))
        return rng.random((len(a), number)) < p[:, None]

    share = named_of(ages(rng, 4000, doublings)).any(axis=1).mean()
    a = ages(rng, round(about / share), doublings)
    named = named_of(a)
    seen = named.any(axis=1)
    return Record.from_dates(2000.0 - a[seen], present=2000.0, start=2000.0 - SPAN, unit=1.0, mentions=named[seen])


def with_importance(rng: np.random.Generator, record: Record) -> Record:
    """Importance that has nothing to do with age."""
    return replace(record, importance=rng.exponential(1.0, len(record)))


def notable(rng: np.random.Generator, about: int) -> Record:
    """A steady rate; listed where importance exceeds a threshold that falls to zero towards the present."""
    truth = about * 3
    a, importance = SPAN * rng.random(truth), rng.exponential(1.0, truth)
    seen = importance > 3.0 * a / SPAN
    return Record.from_dates(2000.0 - a[seen], present=2000.0, start=2000.0 - SPAN, unit=1.0, importance=importance[seen])


def split(rng: np.random.Generator, about: int) -> Record:
    """A steady rate, one list complete, three that speak of the youngest third, whose pairs are missed at 20 %: every missed pair is a
    milestone more.
    """
    a = SPAN * rng.random(about)
    named = rng.random((about, 4)) < (0.1 + 0.85 * (a < SPAN / 3))[:, None]
    named[:, 0] = True  # nothing is missing, so splits are all that makes a trend
    dates, mentions = [], []
    for age, row in zip(a, named, strict=True):
        rest = np.nonzero(row)[0]
        apart = [j for i, j in enumerate(rest) if i and rng.random() < 0.2]
        for j in apart:
            dates.append(2000.0 - age)
            mentions.append(np.arange(4) == j)
        if len(rest):
            dates.append(2000.0 - age)
            mentions.append(np.isin(np.arange(4), [j for j in rest if j not in apart]))
    return Record.from_dates(dates, present=2000.0, start=2000.0 - SPAN, unit=1.0, mentions=np.array(mentions))


CASES: dict[str, Callable[[np.random.Generator, int], Record]] = {
    "steady": lambda r, n: with_importance(r, lists(r, n)),
    "two doublings": lambda r, n: with_importance(r, lists(r, n, 2.0)),
    "four doublings": lambda r, n: with_importance(r, lists(r, n, 4.0)),
    "steady, forgotten every 300 years": lambda r, n: with_importance(r, lists(r, n, half_life=300.0, chance=0.6)),
    "two doublings, forgotten every 300 years": lambda r, n: lists(r, n, 2.0, half_life=300.0, chance=0.6),
    "steady, threshold of notability": notable,
    "steady, pairs missed": split,
}
# conclusions that are right for each truth; a check that is blind to it is not judged
STANDS, FALLS = {"yes"}, {"too few", "weaker", "no"}
UNHARMED = {"yes", "too few"}  # where a check keeps only a part of the milestones, and its power is that of the part
RIGHT: dict[tuple[str, str], set[str]] = {}
for grown in ("two doublings", "four doublings"):
    for check in ("completeness", "support", "importance", "leave_out", "recent_end", "dating", "equal_effort", "lists"):
        RIGHT[grown, check] = UNHARMED if check in ("support", "lists", "equal_effort") else STANDS
for check in ("completeness", "support", "equal_effort", "recall_decay"):
    RIGHT["steady, forgotten every 300 years", check] = FALLS
RIGHT["steady, threshold of notability", "importance"] = FALLS


def study(records: int, n: int, replicates: int) -> Iterator[str]:
    """Per truth and check: how often each conclusion on the summary page comes, and how often it is right."""
    yield f"\nn about {n}, {records} records a truth\n"
    yield "| truth | check | " + " | ".join(WORDS) + " | right |"
    yield "| --- | --- | --- | --- | --- | --- | --- |"
    for number, (truth, make) in enumerate(CASES.items()):
        counts: dict[str, Counter[str]] = {}
        for i in range(records):
            rng = np.random.default_rng([42, number, i])
            record = make(rng, n)
            for row in run_checks(Context(record, seed=i, draws=50, replicates=replicates)).rows("summary"):
                counts.setdefault(row["check"], Counter())[row["stands"]] += 1
        for check, found in counts.items():
            total = sum(found.values())
            right = RIGHT.get((truth, check))
            share = "" if right is None else f"{100 * sum(found[w] for w in right) / total:.0f} %"
            yield f"| {truth} | {check} | " + " | ".join(f"{100 * found[w] / total:.0f} %" for w in WORDS) + f" | {share} |"


def exact(records: int = 20_000) -> Iterator[str]:
    """Size of the exact rows under a steady rate."""
    yield "\n| n | p < .05, steady |\n| --- | --- |"
    rng = np.random.default_rng(1)
    for n in (3, 5, 8, 10, 30, 100):
        below = mean_cdf(rng.random((records, n)).mean(axis=1), n)
        yield f"| {n} | {100 * (2 * np.minimum(below, 1 - below) < 0.05).mean():.2f} % |"


def support_size(records: int, replicates: int = 399) -> Iterator[str]:
    """How often support 2 is called speeding: steady lists that forget, and growth."""
    from chronos_acc.bias import support

    yield "\n| truth | milestones | speeding at 1, own null | at 2, own null | at 2, beside a steady rate |"
    yield "| --- | --- | --- | --- | --- |"
    makers: dict[str, Callable[[np.random.Generator], Record]] = {
        "steady": lambda r: lists(r, 100),
        "steady, forgotten every 300 years": lambda r: lists(r, 100, half_life=300.0, chance=0.6),
        "steady, forgotten every 150 years": lambda r: lists(r, 100, half_life=150.0, chance=0.6),
        "two doublings": lambda r: lists(r, 100, 2.0),
        "four doublings": lambda r: lists(r, 100, 4.0),
    }
    for number, (truth, make) in enumerate(makers.items()):
        one = two = plain = size = 0
        for i in range(records):
            record = make(np.random.default_rng([7, number, i]))
            rows = support.run(Context(record, seed=i, replicates=replicates)).rows
            speeding = [r.p_value is not None and r.p_value < 0.05 and r.more["excess"] > 0 for r in rows[:2]]
            one, two = one + speeding[0], two + speeding[1]
            plain += rows[1].more["p_steady"] < 0.05 and (rows[1].estimate or 0) > 0
            size += rows[0].n
        shares = " | ".join(f"{100 * x / records:.0f} %" for x in (one, two, plain))
        yield f"| {truth} | {size / records:.0f} | {shares} |"


def main() -> None:
    records = int(sys.argv[1]) if len(sys.argv) > 1 else 200
    for lines in (exact(), support_size(records), study(records, 100, 199), study(records // 2, 30, 199)):
        for line in lines:
            print(line, flush=True)


if __name__ == "__main__":
    main()
