# SPDX-License-Identifier: Apache-2.0
"""Running a grid: every combination on the same uniforms, each record's combinations together, on all cores.

The common estimand is z, the normal quantile of the mid-rank of the statistic in the steady null of that combination: as many
events, uniform on its window and dated alike, read by the same analysis. The joint test redraws the record once per replicate,
and all combinations run on it; the k-th oldest null date carries the lists, category and importance of the k-th oldest milestone,
and its date moves between ways of dating in proportion to its age.
"""

from __future__ import annotations

import os
from collections.abc import Sequence
from concurrent.futures import Future, ThreadPoolExecutor, as_completed
from dataclasses import dataclass
from threading import Event
from typing import Any

import numpy as np
import numpy.typing as npt

from ...errors import RecordRefused, WrongUse
from ...progress import Tell
from ...record import Record, Window
from ...trend.null_model import Null
from ...trend.nulls import STEADY
from ...trend.precision import null_times
from ..check import Context
from .choices import Choices, default_choices
from .kernels import Spec, growth_and_z, mid_rank_z, slopes
from .result import Grid, Line
from .variants import FEWEST_INTERVALS, Combination, Variant, combinations, expanded, in_window, variant

Floats = npt.NDArray[np.float64]
NULL_RECORDS = 999  # of each combination's own steady null
JOINT = 499
CELLS = 120_000  # rows are taken in chunks of about this many dates, which stay in the cache
MOST_COMBINATIONS = 100_000
Z95 = 1.959963984540054


@dataclass(frozen=True)
class _Job:
    base: Record
    seed: int
    draws: int
    joint: Floats | None  # (B, w) null dates of the base window
    stop: Event


def run_grid(
    context: Context,
    choices: Choices | None = None,
    joint: int = JOINT,
    tell: Tell | None = None,
    *,
    null: Null = STEADY,
    workers: int | None = None,
) -> Grid:
    """Every combination of the choices on the context's record.

    ``joint`` null records make the joint test (0: left out), redrawn by ``null``. Drawn dates: ``context.draws``. Ctrl-C keeps
    what is done and says so. Raises RecordRefused below three milestones, WrongUse for choices the record cannot have.
    """
    tell = context.tell if tell is None else tell
    choices = default_choices() if choices is None else choices
    if joint < 0:
        raise WrongUse(f"the joint test takes 0 null records or more, not {joint}")
    if len(context.record.window.times) < 3:
        raise RecordRefused(
            f"{len(context.record.window.times)} milestones in the window; a grid needs three: widen the window or load more"
        )
    base = in_window(context.record)
    options, notes = expanded(choices, base)
    every = combinations(options, choices.own)
    if len(every) > MOST_COMBINATIONS:
        raise WrongUse(f"{len(every):,} combinations; at most {MOST_COMBINATIONS:,} are run: leave out options")
    groups: dict[tuple[Any, ...], list[Combination]] = {}
    for c in every:
        groups.setdefault(c.subset, []).append(c)
    redrawn = None
    if joint:
        redrawn = null_times(base, base.window, null, np.random.default_rng([context.seed, 8101]), joint)
    job = _Job(base, context.seed, context.draws, redrawn, Event())
    lines, columns, interrupted = _all(job, list(groups.values()), tell, workers or os.cpu_count() or 1)
    if interrupted:
        notes = (
            *notes,
            f"interrupted: {len(lines)} of {len(every)} combinations were run; shares, variance and joint test are of these alone",
        )
    if not any(c.own for c in every):
        notes = (*notes, "your own combination is not among those that the record allows; no place is given for it")
    order = sorted(range(len(lines)), key=lambda i: lines[i].number)
    z_joint = np.column_stack([columns[i] for i in order]) if redrawn is not None and lines else None
    return Grid(
        lines=tuple(lines[i] for i in order),
        z_joint=z_joint,
        null=f"{null.name}{f' ({null.setting})' if null.setting else ''}",
        joint=joint,
        options={k: tuple(v) for k, v in options.items()},
        choices=choices,
        declared=len(every),
        seed=context.seed,
        draws=context.draws,
        record_hash=context.record.hash,
        notes=notes,
    )


def _all(job: _Job, groups: Sequence[list[Combination]], tell: Tell, workers: int) -> tuple[list[Line], list[Floats], bool]:
    lines: list[Line] = []
    columns: list[Floats] = []
    total = sum(len(g) for g in groups)
    interrupted = False
    pool = ThreadPoolExecutor(max_workers=max(1, workers))
    futures: list[Future[tuple[list[Line], list[Floats]]]] = []
    try:
        futures = [pool.submit(_group, job, group) for group in groups]
        for future in as_completed(futures):
            done, z = future.result()
            lines += done
            columns += z
            tell("grid", len(lines) / total)
    except KeyboardInterrupt:
        interrupted = True
        job.stop.set()
    finally:
        pool.shutdown(wait=True, cancel_futures=True)
    if interrupted:  # what other threads finished meanwhile
        lines, columns = [], []
        for future in futures:
            if future.done() and not future.cancelled() and future.exception() is None:
                done, z = future.result()
                lines += done
                columns += z
    return lines, columns, interrupted


def _group(job: _Job, group: list[Combination]) -> tuple[list[Line], list[Floats]]:
    """All combinations of one record."""
    size = 0 if job.joint is None else len(job.joint)
    if job.stop.is_set():
        return [], []
    found, reason = variant(job.base, group[0].options)
    if found is None:
        return [Line.invalid(c, reason) for c in group], [np.full(size, np.nan) for _ in group]
    lines: list[Line] = []
    columns: list[Floats] = []
    drawn = _Rows(_drawn(job, found))
    nulls: dict[bool, Floats] = {}
    for end in dict.fromkeys(c.options["young_end"] for c in group):
        if job.stop.is_set():
            return [], []  # half a record is no result
        mine = [c for c in group if c.options["young_end"] == end]
        closed = end == "last"
        if closed not in nulls:
            nulls[closed] = _steady(job, found, closed)
        sets = {"best": _Rows(found.window.times[None, :]), "null": _Rows(nulls[closed]), "draws": drawn}
        if job.joint is not None:
            sets["joint"] = _Rows(_carried(job.joint, found))
        for part in (_rates(mine, found, end, sets), _regressions(mine, found, end, sets)):
            lines += part[0]
            columns += part[1] if job.joint is not None else [np.empty(0)] * len(part[0])
    return lines, columns


@dataclass(frozen=True)
class _Rows:
    times: Floats

    def chunks(self) -> list[Floats]:
        """Rows a few at a time."""
        step = max(1, CELLS // max(self.times.shape[1], 1))
        return [self.times[a : a + step] for a in range(0, len(self.times), step)]


def _drawn(job: _Job, v: Variant) -> Floats:
    """(draws, w) sorted drawn dates; what leaves the window is set at its edge."""
    w = v.window
    if not job.draws:
        return np.empty((0, len(w.times)))
    dates = v.record.all_draws(job.draws, job.seed)[:, w.index]
    np.minimum(dates, w.present, out=dates)
    if not w.opened_by_milestone:
        np.maximum(dates, w.start, out=dates)
    dates.sort(axis=1)
    return dates


def _steady(job: _Job, v: Variant, closed: bool) -> Floats:
    """(B, w) dates of the steady null of this record's own window, which the last milestone closes where ``closed``."""
    record, window = v.record, v.window
    if closed:
        record = record.only(present=float(window.times[-1]))
        window = record.window
    return null_times(record, window, STEADY, np.random.default_rng([job.seed, 8102]), NULL_RECORDS)


def _carried(joint: Floats, v: Variant) -> Floats:
    """(B, w) the null record's dates for this record's milestones."""
    w: Window = v.window
    times = w.present - (w.present - joint[:, v.rank]) * v.stretch
    np.minimum(times, w.present, out=times)
    if not w.opened_by_milestone:
        np.maximum(times, w.start, out=times)
    times.sort(axis=1)
    return times


def _rates(group: list[Combination], v: Variant, end: Any, sets: dict[str, _Rows]) -> tuple[list[Line], list[Floats]]:
    """Growth of the log-linear rate; its null law is exact, so no null record is needed for z."""
    mine = [c for c in group if c.options["response"] == "rate"]
    if not mine:
        return [], []
    frame = v.frame(end)
    growth, z, n = growth_and_z(sets["best"].times, frame)
    drawn = [growth_and_z(rows, frame)[:2] for rows in sets["draws"].chunks()]
    values, zs = (np.concatenate([d[i] for d in drawn]) if drawn else np.empty(0) for i in (0, 1))
    joint = np.concatenate([growth_and_z(rows, frame)[1] for rows in sets["joint"].chunks()]) if "joint" in sets else np.empty(0)
    return [Line.found(c, n, float(growth[0]), float(z[0]), values, zs) for c in mine], [joint for _ in mine]


def _regressions(group: list[Combination], v: Variant, end: Any, sets: dict[str, _Rows]) -> tuple[list[Line], list[Floats]]:
    mine = [c for c in group if c.options["response"] == "log10_interval"]
    if not mine:
        return [], []
    frame = v.frame(end)
    specs = [
        Spec(end == "counted", c.options["short_intervals"] == "joined", str(c.options["predictor"]), str(c.options["estimator"]))
        for c in mine
    ]
    best, kept = slopes(sets["best"].times, frame, specs)
    of = {name: _slopes(sets[name], frame, specs) for name in ("null", "draws", "joint") if name in sets}
    lines: list[Line] = []
    columns: list[Floats] = []
    for i, c in enumerate(mine):
        used = int(kept[specs[i].counted, specs[i].joined][0])
        joint = mid_rank_z(of["joint"][i], of["null"][i]) if "joint" in of else np.empty(0)
        if used < FEWEST_INTERVALS or not np.isfinite(best[i][0]):
            reason = (
                f"{used} intervals, {FEWEST_INTERVALS} are needed" if used < FEWEST_INTERVALS else "no slope: the predictor does not vary"
            )
            lines.append(Line.invalid(c, reason))
            columns.append(np.full(len(joint), np.nan))
            continue
        z = mid_rank_z(best[i], of["null"][i])
        lines.append(Line.found(c, used, float(best[i][0]), float(z[0]), of["draws"][i], mid_rank_z(of["draws"][i], of["null"][i])))
        columns.append(joint)
    return lines, columns


def _slopes(rows: _Rows, frame: Any, specs: Sequence[Spec]) -> list[Floats]:
    parts = [slopes(chunk, frame, specs)[0] for chunk in rows.chunks()]
    return [np.concatenate([p[i] for p in parts]) if parts else np.empty(0) for i in range(len(specs))]
