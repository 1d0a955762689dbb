# SPDX-License-Identifier: Apache-2.0
"""Size and power of the grid's joint test, and its time: ``python -m tests.simulate.grid [records]`` prints Markdown tables."""

from __future__ import annotations

import resource
import sys
import time
from collections.abc import Iterator

import numpy as np

from chronos_acc.bias import Context
from chronos_acc.bias.grid import Choices, choices_of, default_choices, run_grid
from chronos_acc.record import Record
from chronos_acc.trend.kernels import log_log

from .bias import lists


def small() -> Choices:
    """Choices that keep a study short: all arbitrary ones, no subset."""
    plain = default_choices().options
    arbitrary = {k: list(plain[k]) for k in ("dates", "young_end", "short_intervals", "predictor", "estimator")}
    return choices_of({"arbitrary": arbitrary, "question": {"response": ["log10_interval", "rate"], "min_support": [1, 2]}}, "study", "")


def joint(records: int, replicates: int = 199) -> Iterator[str]:
    """How often the joint test rejects at 5 %."""
    yield "\n| truth | n | share, log interval | median z, log interval | median z, rate | largest z over the grid alone |"
    yield "| --- | --- | --- | --- | --- | --- |"
    for truth, doublings in (("steady", 0.0), ("two doublings", 2.0), ("four doublings", 4.0)):
        for n in (30, 100):
            hits = np.zeros(4)
            for i in range(records):
                record = lists(np.random.default_rng([11, int(doublings), n, i]), n, doublings)
                grid = run_grid(Context(record, seed=i, draws=0), small(), joint=replicates)
                rows = {r["response"]: r for r in grid.rows("summary") if r["min_support"] == 1.0}
                slope, rate = rows["log10_interval"], rows["rate"]
                best = max(
                    abs(r["z"])
                    for r in grid.rows("combinations")
                    if r["z"] is not None and r["response"] == "log10_interval" and r["min_support"] == 1.0
                )
                hits += [slope["p_share"] < 0.05, slope["p_median_z"] < 0.05, rate["p_median_z"] < 0.05, best > 1.96]
            yield f"| {truth} | {n} | " + " | ".join(f"{100 * h / records:.0f} %" for h in hits) + " |"


def speed(draws: int = 1000) -> Iterator[str]:
    """The default grid on four lists and about a hundred milestones, against as many plain regressions of drawn dates."""
    record: Record = lists(np.random.default_rng(1), 100)
    dates = np.sort(record.all_draws(draws, 1), axis=1)
    age, interval = record.present - dates[:, :-1], np.maximum(np.diff(dates, axis=1), 0.5)
    yield "\n| what | seconds | of the processor |\n| --- | --- | --- |"
    run_grid(Context(record, draws=10), joint=9)
    wall, used = time.perf_counter(), time.process_time()
    grid = run_grid(Context(record, draws=draws))
    both = time.perf_counter() - wall, time.process_time() - used
    wall, used = time.perf_counter(), time.process_time()
    for _ in range(100):
        log_log(age, interval)
    times = len(grid.lines) / 100
    bare = (time.perf_counter() - wall) * times, (time.process_time() - used) * times
    what = f"grid, {len(grid.lines):,} combinations, {draws:,} draws, {len(record)} milestones, joint test of 499"
    yield f"| {what} | {both[0]:.2f} | {both[1]:.2f} |"
    yield f"| as many plain regressions | {bare[0]:.2f} | {bare[1]:.2f} |"
    yield f"| ratio | {both[0] / bare[0]:.2f} | {both[1] / bare[1]:.2f} |"
    yield f"\nPeak memory {resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024:.0f} MB"


def main() -> None:
    records = int(sys.argv[1]) if len(sys.argv) > 1 else 200
    for lines in (speed(), joint(records)):
        for line in lines:
            print(line, flush=True)


if __name__ == "__main__":
    main()
