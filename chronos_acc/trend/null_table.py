# SPDX-License-Identifier: Apache-2.0
"""Statistics beside what each null gives: the table, the distribution of any statistic, and whole null records."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from ..errors import WrongUse
from ..progress import Tell, silent
from ..mixture import NORMAL, UNIFORM
from ..record import Record, Window
from .null_model import Null
from .null_statistics import STATISTICS, Statistic
from .nulls import NAMES, NULLS
from .precision import Kernel, null_times

if TYPE_CHECKING:
    import pandas as pd

Floats = npt.NDArray[np.float64]

MOST_CELLS = 2_000_000  # simulated dates a null: above it fewer null records are made, never under FEWEST_RECORDS
FEWEST_RECORDS = 199
HELD_CELLS = 400_000  # simulated dates held at once: small enough to stay near the cache
PAIRS_LIMIT = 400  # reversals compare every pair of intervals in every null record
FITTED_TO = ("laplace", "growth", "gain")
JUDGED_WHEN_FITTED = ("slope", "r_squared")


@dataclass(frozen=True)
class NullRow:
    """A statistic beside one null: its 2.5, 50 and 97.5 % points there, and p = (1 + count)/(B + 1). ``difference`` is observed minus
    median."""

    null: str
    statistic: str
    observed: float | None
    low: float | None
    median: float | None
    high: float | None
    p_value: float | None
    difference: float | None = None
    tail: str = ""
    setting: str = ""
    remark: str = ""
    records: int | None = None  # null records behind the band

@dataclass(frozen=True)
class NullTable:
    """Rows in the order of nulls and statistics, the number of null records behind each, and remarks."""

    rows: tuple[NullRow, ...]
    replicates: int
    notes: tuple[str, ...] = field(default=())

    def row(self, null: str, statistic: str) -> NullRow | None:
        """The first row of a null and a statistic, or None."""
        return next((r for r in self.rows if (r.null, r.statistic) == (null, statistic)), None)

    def to_frame(self) -> pd.DataFrame:
        """One row a null and statistic, unrounded."""
        from .frames import frame

        return frame(self.rows, NullRow)


def records_for(window: Window, replicates: int) -> int:
    """How many null records a window of this size is given, of ``replicates`` asked for."""
    return min(replicates, max(FEWEST_RECORDS, MOST_CELLS // max(len(window.times), 1)))


def p_value(null: Floats, observed: float, tail: str) -> float:
    """(1 + #{null at least as extreme})/(B + 1) for tail "upper", "lower", or "two-sided" (twice the smaller). Equal within rounding counts
    as equal."""
    scale = 1e-10 * max(abs(observed), float(np.abs(null).max(initial=0.0)))
    upper = (1 + int((null >= observed - scale).sum())) / (len(null) + 1)
    lower = (1 + int((null <= observed + scale).sum())) / (len(null) + 1)
    return {"upper": upper, "lower": lower}.get(tail, min(1.0, 2 * min(upper, lower)))


def null_times_in_chunks(record: Record, null: Null, *, seed: int, replicates: int, window: Window | None = None) -> Iterator[Floats]:
    """Times (chunk, w) of ``replicates`` null records, memory bounded. Same seed, same numbers."""
    window = record.window if window is None else window
    kernel = Kernel.of(record, window)
    rng = np.random.default_rng([seed, 6100 + NAMES.index(null.name)])
    rows = max(1, HELD_CELLS // max(len(window.times), 1))
    for done in range(0, replicates, rows):
        yield null_times(record, window, null, rng, min(rows, replicates - done), kernel)


def null_distribution(
    record: Record,
    null: Null,
    statistic: Callable[[Floats, Window], Floats],
    *,
    seed: int,
    replicates: int = 1999,
    window: Window | None = None,
) -> Floats:
    """(replicates,) values of any statistic of a times matrix under a null. Identical to the rows of the table for the same seed."""
    window = record.window if window is None else window
    parts = [statistic(times, window) for times in null_times_in_chunks(record, null, seed=seed, replicates=replicates, window=window)]
    return np.concatenate(parts)


def null_records(record: Record, null: Null, *, seed: int, replicates: int, window: Window | None = None) -> Iterator[Record]:
    """Whole null records, one at a time, for anything that takes a Record.

    The k-th oldest null milestone carries the lists, category, importance, level and parent of the observed k-th oldest, and the dating of
    the observed milestone nearest in log age. Milestones outside the window stay as they are; known orders are dropped (they hold between
    the true dates).
    """
    window = record.window if window is None else window
    kernel = Kernel.of(record, window)
    for times in null_times_in_chunks(record, null, seed=seed, replicates=replicates, window=window):
        for row in times:
            yield dated(record, window, row, kernel)


def dated(record: Record, window: Window, times: Floats, kernel: Kernel) -> Record:
    """The record with its window's milestones at ``times`` (w,), each dated like its donor."""
    donor = window.index[kernel.donors(times, window.present)]
    at = window.index
    best, earliest, latest, unit, sd = (a.copy() for a in (record.best, record.earliest, record.latest, record.unit, record.sd))
    best[at] = times
    earliest[at] = times - (record.best[donor] - record.earliest[donor])
    latest[at] = np.maximum(np.minimum(times + (record.latest[donor] - record.best[donor]), max(window.present, float(times[-1]))), times)
    unit[at], sd[at] = record.unit[donor], record.sd[donor]
    moved = np.zeros(len(record), bool)
    moved[at] = True
    part = moved[record.owner]
    owner = record.owner
    kind = np.where(part, np.where(sd[owner] > 0, NORMAL, UNIFORM), record.kind).astype(np.int8)
    return replace(
        record,
        best=best,
        earliest=earliest,
        latest=latest,
        unit=unit,
        sd=sd,
        kind=kind,
        low=np.where(part, earliest[owner], record.low),
        mode=np.where(part, best[owner], record.mode),
        high=np.where(part, latest[owner], record.high),
        orders=(),
    )


def null_table(
    record: Record,
    nulls: Sequence[Null] = NULLS,
    statistics: Sequence[Statistic] = STATISTICS,
    *,
    seed: int,
    replicates: int = 1999,
    window: Window | None = None,
    tell: Tell = silent,
) -> NullTable:
    """Every statistic beside every null. Statistics the record cannot give (too few events or intervals) have no band and no p."""
    if replicates < 1:
        raise WrongUse(f"{replicates} null records were asked for; at least 1, better 999")
    window = record.window if window is None else window
    notes: list[str] = []
    chosen = list(statistics)
    if len(window.times) > PAIRS_LIMIT and any(s.name == "reverse_arrangements" for s in chosen):
        chosen = [s for s in chosen if s.name != "reverse_arrangements"]
        notes.append(
            f"reverse_arrangements stands among the tests only: above {PAIRS_LIMIT} milestones it is not simulated under every null"
        )
    if window.n < 1 or not window.span > 0 or len(window.times) < 3:
        return NullTable((), replicates, ("too few milestones inside the window for null models",))
    fewer = records_for(window, replicates)
    if fewer < replicates:
        notes.append(f"{fewer} null records instead of {replicates:,}, for {len(window.times):,} milestones each")
        replicates = fewer
    seen = {s.name: _observed(s, window) for s in chosen}
    rows: list[NullRow] = []
    for done, null in enumerate(nulls):
        values: dict[str, list[Floats]] = {s.name: [] for s in chosen}
        for times in null_times_in_chunks(record, null, seed=seed, replicates=replicates, window=window):
            for s in chosen:
                values[s.name].append(s.compute(times, window))
        rows.extend(
            null_row(null, s.name, s.tail, seen[s.name], np.concatenate(values[s.name]), judged=s.name in JUDGED_WHEN_FITTED)
            for s in chosen
        )
        tell(f"null {null.name}", (done + 1) / len(nulls))
    return NullTable(tuple(rows), replicates, tuple(notes))


def _observed(statistic: Statistic, window: Window) -> float:
    with np.errstate(all="ignore"):
        return float(statistic.compute(window.times[None, :], window)[0])


def null_row(null: Null, statistic: str, tail: str, observed: float, values: Floats, *, judged: bool) -> NullRow:
    """A statistic, observed and in null records (B,), as a row; ``judged``: whether a fitted null judges it. No band where half of the null
    records do not give it."""
    good = values[np.isfinite(values)]
    if not np.isfinite(observed) or len(good) < 0.5 * len(values):
        return NullRow(
            null.name,
            statistic,
            observed if np.isfinite(observed) else None,
            None,
            None,
            None,
            None,
            None,
            tail,
            null.setting,
            "not computed: the record is too small or too even for it",
        )
    low, median, high = (float(v) for v in np.quantile(good, [0.025, 0.5, 0.975]))
    p: float | None = p_value(good, observed, tail)
    remark = ""
    if null.fitted and not judged:
        p = None
        remark = "fitted to this" if statistic in FITTED_TO else "under a fitted null only slope and R² are judged"
    return NullRow(null.name, statistic, observed, low, median, high, p, observed - median, tail, null.setting, remark, len(good))
