# SPDX-License-Identifier: Apache-2.0
"""Slopes of many records at once, by the estimators of the regressions: arrays (s, r), a record a row, whole and without gaps.

Each agrees with the estimator of one record: that of least absolute deviations is the estimator of one record.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]

PAIR_CELLS = 1_000_000  # slopes of pairs held at a time
CELLS = 200_000  # cells of a batch of lines: small enough to stay in the cache
STEPS = 200
TOLERANCE = 1e-13
NEWTON = 1e-9  # a step so small was the last but one that matters: the next would be its square


def ols_slopes(x: Floats, y: Floats) -> tuple[Floats, Floats]:
    """(s,) slopes and R² of least squares. NaN where the line does not exist."""
    dx, dy = x - x.mean(axis=1, keepdims=True), y - y.mean(axis=1, keepdims=True)
    sxx, sxy, syy = (np.einsum("ij,ij->i", a, b) for a, b in ((dx, dx), (dx, dy), (dy, dy)))
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.asarray(sxy / sxx), np.asarray(sxy * sxy / (sxx * syy))


def theil_sen_slopes(x: Floats, y: Floats) -> Floats:
    """(s,) medians of the slopes of all pairs at different x (Theil 1950)."""
    s, r = x.shape
    pairs = r * (r - 1) // 2
    out = np.empty(s)
    rows = max(1, PAIR_CELLS // pairs)
    for first in range(0, s, rows):
        a, b = x[first : first + rows], y[first : first + rows]
        slopes = np.empty((len(a), pairs))
        done = 0
        tied = False
        with np.errstate(divide="ignore", invalid="ignore"):
            for lag in range(1, r):  # all pairs so far apart in order at once
                run = a[:, lag:] - a[:, :-lag]
                here = slopes[:, done : done + r - lag]
                np.divide(b[:, lag:] - b[:, :-lag], run, out=here)
                if not run.all():
                    tied = True
                    here[run == 0] = np.nan
                done += r - lag
        out[first : first + rows] = _known_medians(slopes) if tied else _medians(slopes)
    return out


def _medians(values: Floats) -> Floats:
    """(s,) medians of rows, which are put out of order: one partition and a maximum, several times as fast as NumPy's median."""
    half = values.shape[1] // 2
    values.partition(half, axis=1)
    upper = values[:, half]
    return np.asarray(upper if values.shape[1] % 2 else 0.5 * (upper + values[:, :half].max(axis=1)))


def _known_medians(values: Floats) -> Floats:
    """(s,) medians of the values of each row that are not NaN."""
    known = [row[~np.isnan(row)] for row in values]
    return np.array([float(np.median(row)) if len(row) else np.nan for row in known])


def exponential_slopes(x: Floats, y: Floats) -> Floats:
    """(s,) slopes b of ln mean t on x, y = ln t, t exponential: the intercept profiled out, b solves sum(x w) = mean(x), w the share
    of t exp(-b x) in their sum. A convex problem in one unknown, by Newton steps kept in their bracket."""
    z = x - x.mean(axis=1, keepdims=True)
    reach = np.abs(z).max(axis=1)
    slope, _ = ols_slopes(x, y)
    b = np.where(np.isfinite(slope), slope, 0.0)
    low, high = np.full(len(b), -np.inf), np.full(len(b), np.inf)
    live = np.nonzero(reach > 0)[0]
    for _ in range(STEPS):
        if not len(live):
            break
        zl = z[live]
        eta = y[live] - b[live, None] * zl
        eta -= eta.max(axis=1, keepdims=True)
        w = np.exp(eta, out=eta)
        w /= w.sum(axis=1, keepdims=True)
        pull = np.einsum("ij,ij->i", w, zl)  # falls as b grows
        bend = np.einsum("ij,ij,ij->i", w, zl, zl) - pull * pull
        here = b[live]
        low[live], high[live] = np.where(pull > 0, here, low[live]), np.where(pull <= 0, here, high[live])
        with np.errstate(divide="ignore", invalid="ignore"):
            step = np.where(bend > 0, pull / bend, np.sign(pull) * np.inf)
        longest = 4.0 / reach[live] * (1.0 + np.abs(here) * reach[live])
        there = here + np.clip(step, -longest, longest)
        outside = (there <= low[live]) | (there >= high[live])
        middle = np.where(np.isfinite(low[live]) & np.isfinite(high[live]), 0.5 * (low[live] + high[live]), there)
        there = np.where(outside, middle, there)
        b[live] = there
        live = live[np.abs(there - here) > NEWTON * (np.abs(there) + 1.0 / reach[live])]
    b[reach == 0] = np.nan
    return b


def median_lines(x: Floats, y: Floats) -> tuple[Floats, Floats, Floats]:
    """(s,) slopes, intercepts, and shares of absolute deviation explained (Koenker & Machado 1999), of least absolute deviations (Koenker &
    Bassett 1978).

    With the intercept profiled out the sum of absolute deviations is convex and piecewise linear in the slope b: the sum of y - b x over
    its upper half less that over its lower half. Its minimum is bracketed and met by the tangents of both ends. Where several slopes are
    best, the middle of them all, so that turning the order round turns the sign. NaN where all x of a record are equal.
    """
    s, r = x.shape
    slope, intercept, share = np.full(s, np.nan), np.full(s, np.nan), np.full(s, np.nan)
    rows = max(1, CELLS // r)
    for first in range(0, s, rows):
        part = slice(first, first + rows)
        slope[part], intercept[part], share[part] = _median_lines(x[part], y[part])
    return slope, intercept, share


def _median_lines(x: Floats, y: Floats) -> tuple[Floats, Floats, Floats]:
    centre = x.mean(axis=1, keepdims=True)
    size = np.abs(x - centre).mean(axis=1, keepdims=True)
    apart = size[:, 0] > 0
    z = (x - centre) / np.where(size > 0, size, 1.0)
    first = np.where(apart, np.einsum("ij,ij->i", z, y) / np.maximum(np.einsum("ij,ij->i", z, z), 1e-300), 0.0)
    left = y - first[:, None] * z  # from here b is counted from the least-squares slope
    left -= np.median(left, axis=1, keepdims=True)
    b = np.zeros(len(x))
    some = np.nonzero(apart)[0]
    b[some] = _least(z[some], left[some])
    slope = np.where(apart, (first + b) / np.where(apart, size[:, 0], 1.0), np.nan)
    off = y - slope[:, None] * (x - centre)
    middle = np.median(off, axis=1)
    total = np.abs(y - np.median(y, axis=1, keepdims=True)).sum(axis=1)
    with np.errstate(invalid="ignore", divide="ignore"):
        share = np.where(total > 0, 1.0 - np.abs(off - middle[:, None]).sum(axis=1) / total, np.nan)
    return slope, middle - slope * centre[:, 0], share


def _cost(z: Floats, y: Floats, b: Floats) -> tuple[Floats, Floats]:
    """(s,) sum of absolute deviations from the median of y - b z, and a slope of it in b."""
    left = y - b[:, None] * z
    half = z.shape[1] // 2
    order = np.argpartition(left, half, axis=1)
    left, x = np.take_along_axis(left, order, axis=1), np.take_along_axis(z, order, axis=1)
    top = z.shape[1] - half
    cost = left[:, top:].sum(axis=1) - left[:, :half].sum(axis=1)
    return cost, x[:, :half].sum(axis=1) - x[:, top:].sum(axis=1)


def _least(z: Floats, y: Floats) -> Floats:
    """The b of least cost, the middle of them where several are. Rows of z centred, mean absolute value 1."""
    s, r = z.shape
    spread = np.abs(y).mean(axis=1)
    flat = 1e-11 * r
    unit = np.where(spread > 0, spread, 1.0)
    out = np.zeros(s)
    ends = [_end(z, y, unit, side, flat) for side in (-1.0, 1.0)]
    (low, cost_low, pull_low), (high, cost_high, pull_high) = ends
    live = np.arange(s)
    tied: list[npt.NDArray[np.int64]] = []
    for turn in range(STEPS):
        if not len(live):
            break
        cross = (cost_high[live] - cost_low[live] + pull_low[live] * low[live] - pull_high[live] * high[live]) / (
            pull_low[live] - pull_high[live]
        )
        b = np.clip(cross, low[live], high[live]) if turn % 3 < 2 else 0.5 * (low[live] + high[live])
        cost, pull = _cost(z[live], y[live], b)
        bound = cost_low[live] + pull_low[live] * (cross - low[live])
        slack = TOLERANCE * (cost + spread[live] * r)
        level = np.abs(pull) <= flat
        met = ~level & ((cost <= bound + slack) | (high[live] - low[live] <= TOLERANCE * (unit[live] + np.abs(b))))
        out[live] = b
        tied.append(live[level])
        below = pull < 0
        for ours, (place, height, steepness) in ((below, (low, cost_low, pull_low)), (~below, (high, cost_high, pull_high))):
            at = ours & ~level
            place[live[at]], height[live[at]], steepness[live[at]] = b[at], cost[at], pull[at]
        live = live[~level & ~met]
    several = np.concatenate(tied) if tied else np.empty(0, np.int64)
    if len(several):
        floor, _ = _cost(z[several], y[several], out[several])
        edges = [
            _edge(z[several], y[several], floor, *(v[several] for v in end))
            for end in ((low, cost_low, pull_low), (high, cost_high, pull_high))
        ]
        out[several] = 0.5 * (edges[0] + edges[1])
    return out


def _end(z: Floats, y: Floats, unit: Floats, side: float, flat: float) -> tuple[Floats, Floats, Floats]:
    """A place on one side of the minimum, from which the cost falls towards it: place, cost, slope (s,) each."""
    place = side * unit
    cost, pull = _cost(z, y, place)
    for _ in range(STEPS):
        short = np.nonzero(side * pull <= flat)[0]
        if not len(short):
            break
        place[short] *= 2.0
        cost[short], pull[short] = _cost(z[short], y[short], place[short])
    return place, cost, pull


def _edge(z: Floats, y: Floats, floor: Floats, place: Floats, cost: Floats, pull: Floats) -> Floats:
    """Where the cost first reaches its floor, from a place beside it: Newton steps, exact for a convex polygon."""
    at = place.copy()
    live = np.arange(len(at))
    cost, pull = cost.copy(), pull.copy()
    flat = 1e-11 * z.shape[1]
    for _ in range(STEPS):
        at[live] = at[live] - (cost[live] - floor[live]) / pull[live]
        cost[live], pull[live] = _cost(z[live], y[live], at[live])
        slack = 1e-12 * (floor[live] + np.abs(y[live]).sum(axis=1))
        live = live[(cost[live] > floor[live] + slack) & (np.abs(pull[live]) > flat)]
        if not len(live):
            break
    return at
