# SPDX-License-Identifier: Apache-2.0
"""Lists as studies: does each independent list say the same, on one window that all of them cover?

Lists share milestones, so their estimates are not independent and Cochran's test hardly ever rejects. Equal slopes are tested by exchanging
the labels of lists within milestones instead: two lists trade the milestones that only one of them names, keeping their sizes and each
milestone's support.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from itertools import combinations
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from ..errors import Refused
from ..progress import Tell, silent
from ..record import Bools, Record, Window
from . import kernels
from .age_exponent import age_exponent
from .capture import families, grouped
from .meta import Pooled, pooled
from .null_model import youngest_floor
from .rate_laws import growth_interval
from .regressions import regress
from .trend_tests import laplace_p

if TYPE_CHECKING:
    import pandas as pd

Floats = npt.NDArray[np.float64]

FEWEST = 8  # counted milestones from which a list takes part in the common window and in the pooling
STATISTICS = ("growth", "slope", "age_exponent")
HELD_CELLS = 400_000  # mentions whose statistics are computed at once


@dataclass(frozen=True)
class StudyRow:
    """One independent list on the common window. growth per year, p_value: laplace exact, two-sided; ``pooled`` whether it takes part in
    the pooling."""

    list: str
    n: int = 0
    slope: float | None = None
    slope_low: float | None = None
    slope_high: float | None = None
    age_exponent: float | None = None
    age_exponent_low: float | None = None
    age_exponent_high: float | None = None
    growth: float | None = None
    growth_low: float | None = None
    growth_high: float | None = None
    p_value: float | None = None
    pooled: bool = False


@dataclass(frozen=True)
class PooledRow:
    """One statistic pooled over the lists (Hartung–Knapp), and p_equal of the test that all lists are alike, by exchanging labels within
    milestones."""

    statistic: str
    k: int
    mean: float
    low: float
    high: float
    tau2: float
    i2: float
    q: float
    q_p: float
    p_equal: float | None
    prediction_low: float | None
    prediction_high: float | None
    funnel_p: float | None


@dataclass(frozen=True)
class Studies:
    """Rows a list, pooled rows, the common window in decimal years, and remarks. Empty with fewer than two independent lists."""

    rows: tuple[StudyRow, ...] = ()
    pooled: tuple[PooledRow, ...] = ()
    start: float | None = None
    present: float | None = None
    notes: tuple[str, ...] = field(default=())

    def to_frame(self) -> pd.DataFrame:
        """One row a list."""
        from .frames import frame

        return frame(self.rows, StudyRow)

    def pooled_frame(self) -> pd.DataFrame:
        """One row a statistic."""
        from .frames import frame

        return frame(self.pooled, PooledRow)


def lists_as_studies(record: Record, *, seed: int, replicates: int = 499, tell: Tell = silent) -> Studies:
    """Growth, slope and age exponent of each independent list on the window that all lists of eight milestones and more cover."""
    names, mentions = grouped(record)
    if len(names) < 2:
        return Studies()
    inside = np.zeros(len(record), bool)
    inside[record.window.index] = True
    large = [j for j in range(len(names)) if int((mentions[:, j] & inside).sum()) > FEWEST]
    if len(large) < 2:
        return Studies(notes=(f"lists as studies: fewer than two independent lists have more than {FEWEST} milestones in the window",))
    start, present = _common(record, mentions, large, inside)
    if not start < present:
        return Studies(notes=("lists as studies: no stretch of time is covered by all lists",))
    rows, numbers = [], []
    for j, name in enumerate(names):
        tell("lists as studies", j / len(names))
        members = [record.lists[i] for i in families(record)[j]]
        row, values = _study(record, members, name, start, present, seed)
        rows.append(row)
        numbers.append(values)
    notes = [
        f"lists as studies: one window for all, from {start:.6g} to {present:.6g}, which every list of more than {FEWEST} milestones covers"
    ]
    chosen = [j for j, row in enumerate(rows) if row.pooled]
    if len(chosen) < 2:
        notes.append(f"fewer than two lists have {FEWEST} counted milestones in it: nothing is pooled")
        return Studies(tuple(rows), (), start, present, tuple(notes))
    equal = _equal(record.only(start=start, present=present).window, mentions[:, chosen], seed, replicates)
    out = []
    for name in STATISTICS:
        pairs = [(v[name][0], v[name][1]) for v in (numbers[j] for j in chosen) if v[name][1] > 0 and np.isfinite(v[name]).all()]
        if len(pairs) >= 2:
            value = pooled(np.array([a for a, _ in pairs]), np.array([b for _, b in pairs]))
            out.append(_pooled_row(name, value, equal.get(name)))
    return Studies(tuple(rows), tuple(out), start, present, tuple(notes))


def _pooled_row(name: str, p: Pooled, equal: float | None) -> PooledRow:
    return PooledRow(name, p.k, p.mean, p.low, p.high, p.tau2, p.i2, p.q, p.q_p, equal, p.prediction_low, p.prediction_high, p.funnel_p)


def _common(record: Record, mentions: Bools, large: list[int], inside: Bools) -> tuple[float, float]:
    """From the latest first milestone of a list to the earliest end of a compile year, inside the record's own window."""
    window = record.window
    start = max(float(record.best[mentions[:, j] & inside].min()) for j in large)
    ends = []
    for j in large:
        compiled = record.compiled[list(families(record)[j])]
        if np.isfinite(compiled).any():
            ends.append(float(np.nanmax(compiled)) + 1.0)
    return max(start, window.start), min([window.present, *ends])


def _study(
    record: Record, members: list[str], name: str, start: float, present: float, seed: int
) -> tuple[StudyRow, dict[str, tuple[float, float]]]:
    """A list's row, and estimate with standard error of each statistic (NaN where not computed)."""
    nothing = dict.fromkeys(STATISTICS, (float("nan"), float("nan")))
    try:
        window = record.only(sources=members, start=start, present=present).window
    except Refused:
        return StudyRow(name), nothing
    if not window.n:
        return StudyRow(name), nothing
    growth, low, high, low_robust, high_robust = growth_interval(window)
    low = min([x for x in (low, low_robust) if x is not None], default=None)
    high = max([x for x in (high, high_robust) if x is not None], default=None)
    line = regress(window, predictors=("log10_age",), estimators=("ols_hc3",)).row()
    slope, slope_low, slope_high, error = (None, None, None, None) if line is None else (line.slope, line.low, line.high, line.std_error)
    exponent = age_exponent(window, eras=())[0]
    fraction = (window.present - window.counted) / window.span
    p = float(laplace_p(-kernels.laplace(fraction), window.n, seed))
    row = StudyRow(
        name,
        window.n,
        slope,
        slope_low,
        slope_high,
        exponent.estimate,
        exponent.low,
        exponent.high,
        growth,
        low,
        high,
        p,
        window.n >= FEWEST,
    )
    return row, {
        "growth": _with_error(growth, low, high),
        "slope": (slope, error) if slope is not None and error is not None else nothing["slope"],
        "age_exponent": _with_error(exponent.estimate, exponent.low, exponent.high),
    }


def _with_error(value: float | None, low: float | None, high: float | None) -> tuple[float, float]:
    if value is None or low is None or high is None:
        return float("nan"), float("nan")
    return value, (high - low) / (2 * 1.959963984540054)


# ---------------------------------------------------------------------------------------- equal slopes, by exchanging labels


def _equal(window: Window, mentions: Bools, seed: int, replicates: int) -> dict[str, float]:
    """p that all lists are alike in each statistic, on the pooled best dates of the common window."""
    named = mentions[window.index]
    counted = slice(window.opening, len(window.times) - window.closing)
    named = named[counted]
    times = window.counted
    if (named.sum(axis=0) < FEWEST).any():
        return {}
    observed = _spread(times, named[None], window)
    rng = np.random.default_rng([seed, 6400])
    replicates = min(replicates, max(199, 4_000_000 // named.size))
    mixed = exchanged(named, rng, replicates)
    rows = max(1, HELD_CELLS // named.size)
    parts = [_spread(times, mixed[first : first + rows], window) for first in range(0, replicates, rows)]
    null = {name: np.concatenate([part[name] for part in parts]) for name in STATISTICS}
    out = {}
    for name in STATISTICS:
        seen, values = float(observed[name][0]), null[name][np.isfinite(null[name])]
        if np.isfinite(seen) and len(values):
            out[name] = float((1 + (values >= seen * (1 - 1e-12)).sum()) / (len(values) + 1))
    return out


def exchanged(named: Bools, rng: np.random.Generator, size: int) -> Bools:
    """(size, m, t) tables with the margins of named (m, t), by trades between pairs of lists (Strona et al. 2014)."""
    m, t = named.shape
    state = np.broadcast_to(named, (size, m, t)).copy()
    pairs = list(combinations(range(t), 2))
    rounds = 1 if t == 2 else max(2, min(8, 60 // len(pairs)))
    for _ in range(rounds):
        for at in rng.permutation(len(pairs)):
            i, j = pairs[at]
            only_i, only_j = state[:, :, i] & ~state[:, :, j], state[:, :, j] & ~state[:, :, i]
            apart = only_i | only_j
            key = np.where(apart, rng.random((size, m)), 2.0)
            rank = np.argsort(np.argsort(key, axis=1), axis=1)
            to_i = rank < only_i.sum(axis=1, keepdims=True)
            state[:, :, i] = np.where(apart, to_i, state[:, :, i])
            state[:, :, j] = np.where(apart, ~to_i, state[:, :, j])
    return state


def _spread(times: Floats, named: Bools, window: Window) -> dict[str, Floats]:
    """Cochran's Q of each statistic over the lists, for tables (size, m, t); times (m,) in order."""
    mask = np.moveaxis(named, 2, 1)  # (size, t, m)
    ages = window.present - times
    n = mask.sum(axis=-1).astype(float)
    out = {}
    with np.errstate(divide="ignore", invalid="ignore"):
        k = kernels.growth_of_mean_age((mask * (ages / window.span)).sum(axis=-1) / n)
        out["growth"] = _q(k, 1.0 / (n * _variance(k)))
        following = np.where(mask, times, np.inf)
        following = np.minimum.accumulate(following[..., ::-1], axis=-1)[..., ::-1]
        following = np.concatenate([following[..., 1:], np.full((*mask.shape[:-1], 1), np.inf)], axis=-1)
        keep = mask & np.isfinite(following) & (following > times)
        gaps = np.where(keep, following, times + 1.0) - times
        slope, _, r2 = kernels.log_log(np.broadcast_to(ages, gaps.shape), gaps, keep & (ages > 0))
        out["slope"] = _q(slope, slope**2 * (1.0 / r2 - 1.0) / np.maximum(keep.sum(axis=-1) - 2.0, 1.0))
        logs = np.log(np.maximum(ages, youngest_floor(window)))
        oldest = np.where(mask, logs, -np.inf).max(axis=-1)
        youngest = np.where(mask, logs, np.inf).min(axis=-1)
        length = oldest - youngest
        inner = ((mask * logs).sum(axis=-1) - oldest - youngest) / (n - 2.0)
        position = (oldest - inner) / length
        k = kernels.growth_of_mean_age(np.clip(position, 1e-9, 1 - 1e-9))
        out["age_exponent"] = _q(k / length, 1.0 / ((n - 2.0) * _variance(k) * length**2))
    return out


def _variance(k: Floats) -> Floats:
    """Variance of a position with density proportional to exp(k x) on (0, 1)."""
    small = np.abs(k) < 1e-3
    safe = np.where(small, 1.0, np.minimum(np.abs(k), 500.0))
    return np.asarray(np.where(small, 1.0 / 12.0, 1.0 / safe**2 - 1.0 / (4.0 * np.sinh(safe / 2.0) ** 2)))


def _q(value: Floats, variance: Floats) -> Floats:
    w = 1.0 / variance
    mean = (w * value).sum(axis=-1, keepdims=True) / w.sum(axis=-1, keepdims=True)
    return np.asarray((w * (value - mean) ** 2).sum(axis=-1))
