# SPDX-License-Identifier: Apache-2.0
"""Does the growth corrected by overlap hold the truth? `python -m tests.simulate.capture [records]`. Nominal 95 %."""

from __future__ import annotations

import sys

import numpy as np

from chronos_acc.record import Record
from chronos_acc.trend.capture import corrected_growth

# name, growth over the window, fall of the logit, forgetting common to all lists (half-lives in the window), lists' logits at the present
WORLDS = (
    ("steady, three lists that forget", 0.0, 3.0, 0.0, (1.5, 1.0, 0.5)),
    ("two doublings, three lists that forget", 2 * np.log(2), 3.0, 0.0, (1.5, 1.0, 0.5)),
    ("two doublings, nothing forgotten", 2 * np.log(2), 0.0, 0.0, (0.5, 0.0, -0.5)),
    ("steady, two lists that forget", 0.0, 2.0, 0.0, (1.5, 1.0)),
    ("steady, logit falls with log age", 0.0, -1.0, 0.0, (2.0, 1.5, 1.0)),
    ("steady, forgetting common to all lists", 0.0, 0.0, 4.0, (1.0, 0.5, 0.0)),
)


def world(growth: float, beta: float, common: float, alpha: tuple[float, ...], size: int, rng: np.random.Generator) -> Record:
    """Lists of one world in 1,000 years; beta -1 stands for a fall by 4 in log(1 + age/10 years), scaled to the window."""
    u = rng.random(size)
    x = u if growth == 0 else np.log1p(u * np.expm1(growth)) / growth
    age = 1 - x
    fall = 4 * np.log1p(age * 100) / np.log1p(100) if beta < 0 else beta * age
    p = 1 / (1 + np.exp(-(np.array(alpha) - fall[:, None])))
    named = (rng.random(p.shape) < p) & (rng.random(size) < np.exp2(-common * age))[:, None]
    seen = named.any(axis=1)
    return Record.from_dates(1000 + 1000 * x[seen], present=2000, start=1000, mentions=named[seen])


def main(count: int) -> None:
    """One table."""
    print(f"95 % intervals that hold the true growth, {count} records each, %\n")
    print("| world | true events | n (mean) | shared (mean) | corrected | uncorrected | corrected above 0 | log age chosen |")
    print("|---|---|---|---|---|---|---|---|")
    rng = np.random.default_rng(63)
    for name, growth, beta, common, alpha in WORLDS:
        for size in (100, 250):
            sums = np.zeros(6)
            made = 0
            for _ in range(count):
                found = corrected_growth(world(growth, beta, common, alpha, size, rng))
                if not found.estimable:
                    continue
                made += 1
                true = growth / 1000
                inside = (found.low is None or found.low <= true) and (found.high is None or true <= found.high)
                assert found.uncorrected_low is not None and found.uncorrected_high is not None
                plain = found.uncorrected_low <= true <= found.uncorrected_high
                sums += [found.n, found.shared, inside, plain, found.survives, found.scale == "log_age"]
            n, shared, inside, plain, above, log_age = sums / max(made, 1)
            shares = " | ".join(f"{100 * share:.1f}" for share in (inside, plain, above, log_age))
            print(f"| {name} | {size} | {n:.0f} | {shared:.0f} | {shares} |", flush=True)


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 400)
