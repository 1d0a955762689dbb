# SPDX-License-Identifier: Apache-2.0
"""How often a true null is rejected, and how often the slope's interval holds one; nominal 5 %.

python -m tests.simulate.nulls [records]
"""

from __future__ import annotations

import sys

import numpy as np

from chronos_acc.record import Record
from chronos_acc.trend.forgetting import tipping
from chronos_acc.trend.null_model import Null
from chronos_acc.trend.null_statistics import STATISTICS
from chronos_acc.trend.null_table import null_distribution, null_table
from chronos_acc.trend.nulls import LOG_UNIFORM, SHUFFLED, STEADY
from chronos_acc.trend.rate_laws import fit_laws
from chronos_acc.trend.regressions import regress

SIZES = (10, 30, 100)
BY_NAME = {s.name: s for s in STATISTICS}


def steady(n: int, count: int, seed: int) -> dict[str, float]:
    """Shares rejected at 5 % among steady records with a given start, all against one simulated null (it is the same for all)."""
    rng = np.random.default_rng(seed)
    record = Record.from_dates(np.sort(rng.random(n)), present=1, start=0)
    fresh = np.sort(rng.random((count, n)), axis=1)
    out = {}
    for s in STATISTICS:
        null = np.sort(null_distribution(record, STEADY, s.compute, seed=seed, replicates=9999))
        values = s.compute(fresh, record.window)
        above = (1 + len(null) - np.searchsorted(null, values, side="left")) / (len(null) + 1)
        below = (1 + np.searchsorted(null, values, side="right")) / (len(null) + 1)
        p = above if s.tail == "upper" else np.minimum(1, 2 * np.minimum(above, below))
        out[s.name] = float((p < 0.05).mean())
    return out


def rejected(records: list[tuple[Record, Null]], names: tuple[str, ...], replicates: int = 399) -> dict[str, float]:
    """Shares rejected at 5 %, a fresh null for each record."""
    hits = dict.fromkeys(names, 0)
    made = dict.fromkeys(names, 0)
    for i, (record, null) in enumerate(records):
        for row in null_table(record, (null,), [BY_NAME[k] for k in names], seed=i, replicates=replicates).rows:
            if row.p_value is not None:
                made[row.statistic] += 1
                hits[row.statistic] += row.p_value < 0.05
    return {k: hits[k] / made[k] if made[k] else float("nan") for k in names}


def log_uniform(n: int, count: int, rng: np.random.Generator, figures: int | None = None, known: bool = True) -> list[tuple[Record, Null]]:
    """Ages evenly over seven decades, exact or rounded to so many significant figures, the rounding known to the null or not."""
    out = []
    for _ in range(count):
        age = 10 ** rng.uniform(2, 9, n)
        unit = np.zeros(n)
        if figures is not None:
            unit = 10.0 ** (np.floor(np.log10(age)) - figures + 1)
            age = np.round(age / unit) * unit
        out.append((Record.from_dates(2000 - age, present=2000, unit=unit if known else 0.0), LOG_UNIFORM))
    return out


def shuffled(n: int, count: int, rng: np.random.Generator, spacing: str) -> list[tuple[Record, Null]]:
    """Renewal records of a spacing, opened by their first milestone."""
    out = []
    for _ in range(count):
        gaps = {"exponential": rng.exponential(1, n), "regular": rng.gamma(4, 0.25, n), "clustered": rng.gamma(0.4, 2.5, n)}[spacing]
        times = np.cumsum(gaps)
        out.append((Record.from_dates(np.concatenate([[0.0], times]), present=float(times[-1] + rng.exponential(1))), SHUFFLED))
    return out


def decay(n: int, count: int, rng: np.random.Generator, form: str) -> list[tuple[Record, Null]]:
    """Steady records forgotten with half-life or scale a fifth of the window, against the null fitted to each."""
    out = []
    while len(out) < count:
        u = rng.random(n)
        age = -np.log1p(u * np.expm1(-5 * np.log(2))) / (5 * np.log(2)) if form == "exponential" else 0.2 * np.expm1(u * np.log1p(5))
        record = Record.from_dates(-age, present=0, start=-1)
        null = tipping(record.window, laws=fit_laws(record.window, seed=1, replicates=0)).form(form).null()
        if null is not None:
            out.append((record, null))
    return out


def slope_coverage(n: int, count: int, rng: np.random.Generator) -> float:
    """Share of HC3 intervals of the slope that hold 1 on log-uniform records."""
    hits = 0
    for _ in range(count):
        row = regress(
            Record.from_dates(-(10 ** rng.uniform(0, 9, n)), present=0).window, predictors=("log10_age",), estimators=("ols_hc3",)
        ).rows[0]
        assert row.low is not None and row.high is not None
        hits += row.low <= 1 <= row.high
    return hits / count


def percent(value: float) -> str:
    """A share as a person reads it."""
    return "–" if not np.isfinite(value) else f"{100 * value:.1f}"


def main(count: int) -> None:
    """All tables."""
    print(f"Steady null on steady records, start given, {20 * count} each, % rejected\n")
    print("| statistic | n = 10 | n = 30 | n = 100 |\n|---|---|---|---|")
    sizes = [steady(n, 20 * count, n) for n in SIZES]
    for name in sizes[0]:
        print(f"| {name} | " + " | ".join(percent(s[name]) for s in sizes) + " |")
    rng = np.random.default_rng(61)
    print(f"\nA fresh null of 399 for each of {count} records, % rejected\n")
    print("| null | records | statistic | n = 10 | n = 30 | n = 100 |\n|---|---|---|---|---|---|")
    rows = [
        ("log_uniform", "log-uniform, exact", ("slope", "r_squared"), lambda n: log_uniform(n, count, rng)),
        ("log_uniform", "two significant digits", ("slope", "r_squared"), lambda n: log_uniform(n, count, rng, 2)),
        ("log_uniform", "two digits, unknown to the null", ("slope", "r_squared"), lambda n: log_uniform(n, count, rng, 2, False)),
        ("shuffled", "exponential", ("lewis_robinson", "reverse_arrangements", "slope"), lambda n: shuffled(n, count, rng, "exponential")),
        ("shuffled", "regular", ("lewis_robinson", "reverse_arrangements", "slope"), lambda n: shuffled(n, count, rng, "regular")),
        ("shuffled", "clustered", ("lewis_robinson", "reverse_arrangements", "slope"), lambda n: shuffled(n, count, rng, "clustered")),
        ("recall_decay fitted", "half-life T/5", ("slope", "r_squared"), lambda n: decay(n, count, rng, "exponential")),
        ("recall_decay fitted", "scale T/5", ("slope", "r_squared"), lambda n: decay(n, count, rng, "power")),
    ]
    for null, kind, names, make in rows:
        found = [rejected(make(n), names) for n in SIZES]
        for name in names:
            print(f"| {null} | {kind} | {name} | " + " | ".join(percent(f[name]) for f in found) + " |", flush=True)
    print(f"\nHC3 interval of the slope holds 1, log-uniform records over nine decades, {2 * count} each, %\n")
    print("| n = 10 | n = 30 | n = 100 |\n|---|---|---|")
    print("| " + " | ".join(percent(slope_coverage(n, 2 * count, rng)) for n in SIZES) + " |")


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 1000)
