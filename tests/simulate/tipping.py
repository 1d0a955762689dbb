# SPDX-License-Identifier: Apache-2.0
"""Does the tipping point's interval hold the truth? Steady records that are forgotten; nominal 95 %.

python -m tests.simulate.tipping [records]
"""

from __future__ import annotations

import sys

import numpy as np

from chronos_acc.record import Record
from chronos_acc.trend.forgetting import tipping
from chronos_acc.trend.rate_laws import fit_laws

SIZES = (10, 30, 100)


def forgotten(n: int, form: str, share: float, rng: np.random.Generator) -> Record:
    """n listed events of a steady rate in a unit window, half-life or scale ``share`` of it."""
    u = rng.random(n)
    k = np.log(2) / share
    age = -np.log1p(u * np.expm1(-k)) / k if form == "exponential" else share * np.expm1(u * np.log1p(1 / share))
    return Record.from_dates(-age, present=0, start=-1)


def coverage(n: int, form: str, share: float, count: int, rng: np.random.Generator) -> tuple[float, float, float]:
    """Shares of intervals that hold the truth, of unbounded ends ("not needed" among them), and of intervals of the total that hold it."""
    hits = unbounded = totals = 0
    truth = n / (-np.expm1(-np.log(2) / share) / (np.log(2) / share) if form == "exponential" else share * np.log1p(1 / share))
    for _ in range(count):
        window = forgotten(n, form, share, rng).window
        f = tipping(window, laws=fit_laws(window, seed=1, replicates=0)).form(form)
        if f.estimate is None:
            # no forgetting needed: the interval is that of a growth at or below zero, from its upper end on
            row = fit_laws(window, seed=1, replicates=0).row("log_linear" if form == "exponential" else "hyperbolic")
            name = "growth" if form == "exponential" else "t_star"
            ends = [
                v[name]
                for v in ((row.high, row.high_robust) if form == "exponential" else (row.low, row.low_robust))
                if v.get(name) is not None
            ]
            low = 0.0
            if ends:
                low = np.log(2) / max(ends) if form == "exponential" and max(ends) > 0 else np.inf if form == "exponential" else min(ends)
            hits += low <= share
            unbounded += 1
            totals += low <= share
            continue
        assert f.low is not None and f.total_low is not None
        hits += f.low <= share and (f.high is None or share <= f.high)
        unbounded += f.high is None
        totals += f.total_low <= truth and (f.total_high is None or truth <= f.total_high)
    return hits / count, unbounded / count, totals / count


def adequate(n: int, form: str, share: float, count: int, rng: np.random.Generator) -> tuple[float, float]:
    """Shares of records in which the true form, and the other one, suffices."""
    right = other = 0
    for i in range(count):
        found = tipping(forgotten(n, form, share, rng).window, seed=i, replicates=199)
        right += bool(found.form(form).suffices)
        other += bool(found.form("power" if form == "exponential" else "exponential").suffices)
    return right / count, other / count


def main(count: int) -> None:
    """Both tables."""
    rng = np.random.default_rng(62)
    print(f"Intervals that hold the truth, {count} records each, %: estimate (unbounded end) [total]\n")
    print("| form | of the window | n = 10 | n = 30 | n = 100 |\n|---|---|---|---|---|")
    for form, share in (("exponential", 0.5), ("exponential", 0.2), ("exponential", 0.05), ("power", 0.2), ("power", 0.02)):
        cells = [coverage(n, form, share, count, rng) for n in SIZES]
        print(
            f"| {form} | {share:g} | " + " | ".join(f"{100 * a:.1f} ({100 * b:.0f}) [{100 * c:.1f}]" for a, b, c in cells) + " |",
            flush=True,
        )
    few = max(count // 5, 50)
    print(f"\nForm suffices, {few} records each, %: the true form / the other one\n")
    print("| true form | of the window | n = 10 | n = 30 | n = 100 |\n|---|---|---|---|---|")
    for form, share in (("exponential", 0.2), ("power", 0.02)):
        cells2 = [adequate(n, form, share, few, rng) for n in SIZES]
        print(f"| {form} | {share:g} | " + " | ".join(f"{100 * a:.0f} / {100 * b:.0f}" for a, b in cells2) + " |", flush=True)


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 1000)
