# SPDX-License-Identifier: Apache-2.0
"""Every statistic of the grid over many records of one set of milestones at once: rows are draws or null records, columns
milestones in order of date.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.special import ndtri

from ...trend.kernels import growth_of_mean_age
from ..growth import mean_cdf

Floats = npt.NDArray[np.float64]
Bools = npt.NDArray[np.bool_]
FURTHEST = 7.0  # z beyond which the exact law is not told apart from 0
_GRID = 257
_PAIR_CELLS = 4_000_000


@dataclass(frozen=True)
class Frame:
    """How rows are read. start: given, or None where the first milestone opens the window; opening and closing: how many stand at
    the start and at the present; present: None where the last milestone is the present; floor: half the finest dating unit.
    """

    start: float | None
    present: float | None
    opening: int
    closing: int
    floor: float


@dataclass(frozen=True)
class Spec:
    """One regression: whether the interval up to the present counts, short intervals joined (else floored), predictor, estimator."""

    counted: bool
    joined: bool
    predictor: str
    estimator: str


def growth_and_z(times: Floats, frame: Frame) -> tuple[Floats, Floats, int]:
    """Growth per year, exact z under a steady rate, and counted events, for sorted rows (R, w)."""
    w = times.shape[1]
    present = times[:, -1] if frame.present is None else np.full(len(times), frame.present)
    start = times[:, 0] if frame.start is None else np.full(len(times), frame.start)
    first = max(frame.opening, 1) if frame.start is None else frame.opening
    last = w - (max(frame.closing, 1) if frame.present is None else frame.closing)
    n = last - first
    if n < 1:
        return np.full(len(times), np.nan), np.full(len(times), np.nan), max(n, 0)
    span = present - start
    with np.errstate(invalid="ignore", divide="ignore"):
        mean = (present - times[:, first:last].mean(axis=1)) / span
    good = (span > 0) & np.isfinite(mean)
    mean = np.where(good, np.clip(mean, 1e-15, 1 - 1e-15), 0.5)
    z = _exact_z(mean, n)
    with np.errstate(invalid="ignore", divide="ignore"):
        growth = growth_of_mean_age(mean) / span
    return np.where(good, growth, np.nan), np.where(good, z, np.nan), n


def _exact_z(mean: Floats, n: int) -> Floats:
    """z of mean age fractions under a steady rate; for many of them read off a fine grid, on which it is all but a straight line."""
    if len(mean) <= _GRID:
        return np.asarray(np.clip(-ndtri(np.clip(mean_cdf(mean, n), 1e-13, 1 - 1e-13)), -FURTHEST, FURTHEST))
    reach = min(0.5, FURTHEST / np.sqrt(12.0 * n))
    at = np.linspace(0.5 - reach, 0.5 + reach, _GRID)
    return np.asarray(np.interp(mean, at, _exact_z(at, n)))


def slopes(times: Floats, frame: Frame, specs: Sequence[Spec]) -> tuple[list[Floats], dict[tuple[bool, bool], Floats]]:
    """Slope of each spec (R,), NaN where there is none, and intervals kept per row for (counted, joined); logs are taken once for
    all specs.

    Logs are natural inside; slopes on log predictors are the same, that on order is scaled to log10.
    """
    out: list[Floats] = [np.empty(0)] * len(specs)
    kept: dict[tuple[bool, bool], Floats] = {}
    for counted in dict.fromkeys(s.counted for s in specs):
        grid = _intervals(times, frame, counted)
        for joined in dict.fromkeys(s.joined for s in specs if s.counted == counted):
            wanted = [(i, s) for i, s in enumerate(specs) if (s.counted, s.joined) == (counted, joined)]
            keep = grid.long if joined else None
            kept[counted, joined] = (grid.long if joined else np.ones_like(grid.long)).sum(axis=1)
            if keep is not None and keep.all():
                keep = None
            for predictor in dict.fromkeys(s.predictor for _, s in wanted):
                x = _predictor(grid, predictor, keep)
                for i, s in wanted:
                    if s.predictor == predictor:
                        slope = _ESTIMATORS[s.estimator](x, grid.log_interval, keep)
                        out[i] = slope / np.log(10.0) if predictor == "order" else slope
    return out, kept


@dataclass(frozen=True)
class _Intervals:
    log_interval: Floats
    log_age: Floats
    elapsed: Floats
    long: Bools


def _intervals(times: Floats, frame: Frame, counted: bool) -> _Intervals:
    """Intervals (R, r), oldest first; the one up to the present last where it is counted."""
    present = times[:, -1:] if frame.present is None else np.full((len(times), 1), frame.present)
    start = times[:, :1] if frame.start is None else np.full((len(times), 1), frame.start)
    ends = np.concatenate([times, present], axis=1) if counted and frame.present is not None else times
    interval = ends[:, 1:] - ends[:, :-1]
    age = present - ends[:, :-1]
    return _Intervals(
        log_interval=np.log(np.maximum(interval, frame.floor)),
        log_age=np.log(np.maximum(age, frame.floor)),
        elapsed=ends[:, 1:] - start,
        long=interval >= frame.floor,
    )


def _predictor(grid: _Intervals, name: str, keep: Bools | None) -> Floats:
    if name == "log10_age":
        return grid.log_age
    if name == "log10_time":
        return np.asarray(-np.log(np.maximum(grid.elapsed, 1e-300)))
    r = grid.log_age.shape[1]
    if keep is None:
        return np.broadcast_to(np.arange(r, 0, -1, dtype=float), grid.log_age.shape)
    return np.asarray(np.cumsum(keep[:, ::-1], axis=1)[:, ::-1].astype(float))  # counted back among the intervals that stay


def ols(x: Floats, y: Floats, keep: Bools | None) -> Floats:
    """Least-squares slope per row."""
    if keep is None:
        x = x - x.mean(axis=1, keepdims=True)
        sxx, sxy = np.einsum("ij,ij->i", x, x), np.einsum("ij,ij->i", x, y)
    else:
        w = keep.astype(float)
        with np.errstate(invalid="ignore", divide="ignore"):
            x = w * (x - np.einsum("ij,ij->i", w, x)[:, None] / w.sum(axis=1, keepdims=True))
        sxx, sxy = np.einsum("ij,ij->i", x, x), np.einsum("ij,ij->i", x, y)
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.asarray(np.where(sxx > 1e-12, sxy / sxx, np.nan))


def theil_pairs(x: Floats, y: Floats, keep: Bools | None) -> Floats:
    """Theil's incomplete method: the median of slopes between each interval of the older half and its partner in the younger half."""
    r = x.shape[1]
    h = (r + 1) // 2
    if h >= r:
        return np.full(len(x), np.nan)
    with np.errstate(invalid="ignore", divide="ignore"):
        slope = (y[:, h:] - y[:, : r - h]) / (x[:, h:] - x[:, : r - h])
    if keep is not None:
        slope = np.where(keep[:, h:] & keep[:, : r - h], slope, np.nan)
    return _row_median(slope)


def theil_sen(x: Floats, y: Floats, keep: Bools | None) -> Floats:
    """The median of the slopes of all pairs."""
    r = x.shape[1]
    i, j = np.triu_indices(r, 1)
    out = np.empty(len(x))
    step = max(1, _PAIR_CELLS // max(len(i), 1))
    for a in range(0, len(x), step):
        part = slice(a, a + step)
        with np.errstate(invalid="ignore", divide="ignore"):
            slope = (y[part, :][:, j] - y[part, :][:, i]) / (x[part, :][:, j] - x[part, :][:, i])
        if keep is not None:
            slope = np.where(keep[part][:, i] & keep[part][:, j], slope, np.nan)
        out[part] = _row_median(slope)
    return out


def _row_median(values: Floats) -> Floats:
    """Median of the finite values of each row; NaN where there is none."""
    values = np.where(np.isfinite(values), values, np.nan)
    ordered = np.sort(values, axis=1)  # NaN last
    count = np.isfinite(ordered).sum(axis=1)
    row = np.arange(len(values))
    some = np.maximum(count, 1)
    middle = 0.5 * (ordered[row, (some - 1) // 2] + ordered[row, some // 2])
    return np.asarray(np.where(count > 0, middle, np.nan))


_ESTIMATORS = {"ols": ols, "theil_pairs": theil_pairs, "theil_sen": theil_sen}


def mid_rank_z(values: Floats, null: Floats) -> Floats:
    """z of values: the normal quantile of their mid-rank among null values."""
    null = np.sort(null[np.isfinite(null)])
    if not len(null):
        return np.full(np.shape(values), np.nan)
    below, upto = np.searchsorted(null, values, side="left"), np.searchsorted(null, values, side="right")
    share = ((below + upto) / 2 + 0.5) / (len(null) + 1)
    return np.asarray(np.where(np.isfinite(values), ndtri(share), np.nan))
