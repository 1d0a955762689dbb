# SPDX-License-Identifier: Apache-2.0
"""What the verdict says of records whose making is known: `python -m tests.simulate.verdict [records]`. Prints one Markdown table."""

from __future__ import annotations

import sys
from collections import Counter
from collections.abc import Callable

import numpy as np

from chronos_acc.record import Record
from chronos_acc.trend.age_exponent import age_exponent
from chronos_acc.trend.analysis import evidence_of
from chronos_acc.trend.capture import corrected_growth
from chronos_acc.trend.forgetting import tipping
from chronos_acc.trend.null_statistics import STATISTICS
from chronos_acc.trend.null_table import null_table
from chronos_acc.trend.nulls import LOG_UNIFORM
from chronos_acc.trend.rate_laws import fit_laws
from chronos_acc.trend.trend_tests import run_tests
from chronos_acc.trend.verdict import Verdict, judge

CODES = ("no_trend", "uneven", "slowing", "forgetting", "shape")
SLOPE = tuple(s for s in STATISTICS if s.name == "slope")
Maker = Callable[[int, np.random.Generator], Record]


def verdict(record: Record, seed: int) -> Verdict:
    """The verdict's parts alone, with smaller simulations than the default."""
    window = record.window
    tests = run_tests(window, seed=seed, replicates=399)
    laws = fit_laws(window, seed=seed, replicates=199)
    nulls = null_table(record, (LOG_UNIFORM,), SLOPE, seed=seed, replicates=199)
    tip = tipping(window, laws=laws)
    return judge(evidence_of(window, tests, laws, tuple(age_exponent(window, eras=())), nulls, tip, corrected_growth(record, window), seed))


def growing(doublings: float) -> Maker:
    """Log-linear growth by so many doublings."""

    def make(n: int, rng: np.random.Generator) -> Record:
        u, k = rng.random(n), abs(doublings) * np.log(2)
        age = u if k == 0 else -np.log1p(u * np.expm1(-k)) / k
        return Record.from_dates(-age if doublings >= 0 else age - 1, present=0, start=-1)

    return make


def year_dated(n: int, rng: np.random.Generator) -> Record:
    """Steady, dated to the year, 100 years."""
    return Record.from_dates(np.floor(rng.uniform(1900, 2000, n)) + 0.5, present=2000, unit=1.0)


def recalled(n: int, rng: np.random.Generator) -> Record:
    """Steady over 3,000 years, remembered with 1/(1 + age/40)."""
    return Record.from_dates(-40 * np.expm1(rng.random(n) * np.log1p(75)), present=0, start=-3000)


def log_uniform(n: int, rng: np.random.Generator) -> Record:
    """Picked evenly per unit of log age over nine decades."""
    return Record.from_dates(-(10 ** rng.uniform(0, 9, n)), present=0)


def steep(n: int, rng: np.random.Generator) -> Record:
    """Age density a^-1.5 over six decades."""
    return Record.from_dates(-((1 + rng.random(n) * (1e6**-0.5 - 1)) ** -2), present=0)


def clustered(n: int, rng: np.random.Generator) -> Record:
    """Renewal with a coefficient of variation of about 2."""
    times = np.cumsum(rng.gamma(0.25, 4.0, n))
    return Record.from_dates(times, present=float(times[-1] + rng.exponential(1)))


def both(n: int, rng: np.random.Generator) -> Record:
    """Growth by two doublings of which half is forgotten twice over the window: thinned from a larger record, n kept."""
    ages: list[float] = []
    while len(ages) < n:
        age = -np.log1p(rng.random(4 * n) * np.expm1(-2 * np.log(2))) / (2 * np.log(2))
        ages.extend(age[rng.random(4 * n) < np.exp2(-2 * age)])
    return Record.from_dates(-np.array(ages[:n]), present=0, start=-1)


def late_step(n: int, rng: np.random.Generator) -> Record:
    """A rate that is eight times as high in one late fifth of the window, and low again after it."""
    u = rng.random(n)
    edges, rates = np.array([0, 0.7, 0.9, 1.0]), np.array([1.0, 8.0, 2.0])
    mass = np.concatenate([[0], np.cumsum(rates * np.diff(edges))])
    return Record.from_dates(np.interp(u, mass / mass[-1], edges) - 1, present=0, start=-1)


WORLDS: tuple[tuple[str, Maker], ...] = (
    ("steady", growing(0)),
    ("steady, dated to the year", year_dated),
    ("steady, clustered", clustered),
    ("growth of 1 doubling", growing(1)),
    ("growth of 2 doublings", growing(2)),
    ("growth of 4 doublings", growing(4)),
    ("growth and forgetting, 2 + 2", both),
    ("slowing, 3 halvings", growing(-3)),
    ("recall 1/(1 + age/40), 3,000 years", recalled),
    ("log-uniform, nine decades", log_uniform),
    ("age density a^-1.5, six decades", steep),
    ("burst late in the window", late_step),
)


def main(count: int) -> None:
    """One table: shares of each code, of the clause, and of the null named weakest."""
    print(
        f"Verdicts, {count} records each, %, n = 30 / 100\n\n| records | "
        + " | ".join(CODES)
        + " | clause log_uniform |\n|---|"
        + "---|" * (len(CODES) + 1)
    )
    rng = np.random.default_rng(64)
    for name, make in WORLDS:
        cells = []
        for n in (30, 100):
            codes: Counter[str] = Counter()
            for i in range(count):
                found = verdict(make(n, rng), i)
                codes[found.code] += 1
                codes["clause"] += "log_uniform" in found.clauses
            cells.append([100 * codes[c] / count for c in (*CODES, "clause")])
        print(f"| {name} | " + " | ".join(f"{a:.0f} / {b:.0f}" for a, b in zip(*cells, strict=True)) + " |", flush=True)


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 200)
