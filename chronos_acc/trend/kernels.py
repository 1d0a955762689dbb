# SPDX-License-Identifier: Apache-2.0
"""The statistics of trend over many records at once: arrays whose last axis is the events of one record.

Everything here is plain NumPy, vectorised over leading axes, and used alike for the observed record (one row) and for null records.
Positions u are (t - start)/(present - start), in (0, 1), n counted events.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]


def laplace(u: Floats) -> Floats:
    """Laplace's U = sqrt(12 n)(mean(u) - 1/2): positive when events crowd towards the present. u (..., n) in any order."""
    n = u.shape[-1]
    return np.asarray(np.sqrt(12.0 * n) * (u.mean(axis=-1) - 0.5))


def mil_hdbk_189(u: Floats) -> Floats:
    """2 sum ln(1/u), chi-square on 2n degrees of freedom under a steady rate; small when speeding (MIL-HDBK-189)."""
    return np.asarray(-2.0 * np.log(u).sum(axis=-1))


def anderson_darling(u: Floats, rest: Floats | None = None) -> Floats:
    """A² of positions against the uniform law on (0, 1). u (..., n) sorted along the last axis; ``rest`` is 1 - u where it is known
    more exactly than the subtraction gives (events in the last instant of a long window)."""
    n = u.shape[-1]
    k = 2.0 * np.arange(1, n + 1) - 1.0
    upper = np.log1p(-u[..., ::-1]) if rest is None else np.log(rest[..., ::-1])
    return np.asarray(-n - ((np.log(u) + upper) * k).sum(axis=-1) / n)


def kolmogorov_smirnov(u: Floats) -> Floats:
    """D of positions against the uniform law on (0, 1). u (..., n) sorted along the last axis."""
    n = u.shape[-1]
    steps = np.arange(n + 1.0) / n
    return np.asarray(np.maximum((steps[1:] - u).max(axis=-1), (u - steps[:-1]).max(axis=-1)))


def reversals(intervals: Floats, ties: float = 0.5) -> Floats:
    """Pairs i < j with interval j longer than interval i, equal pairs counting ``ties``. intervals (..., r) in time order."""
    r = intervals.shape[-1]
    if intervals.ndim == 1 and r > 2000:
        return np.asarray(_reversals_of_long_row(intervals, ties))
    total = np.zeros(intervals.shape[:-1])
    for i in range(r - 1):
        later, here = intervals[..., i + 1 :], intervals[..., i : i + 1]
        total += (later > here).sum(axis=-1) + ties * (later == here).sum(axis=-1)
    return np.asarray(total)


def _reversals_of_long_row(intervals: Floats, ties: float, block: int = 256) -> float:
    """The same for one long row, by merging sorted blocks."""
    total = 0.0
    parts = []
    for first in range(0, len(intervals), block):
        piece = intervals[first : first + block]
        total += float(reversals(piece, ties))
        parts.append(np.sort(piece))
    while len(parts) > 1:
        merged = []
        for left, right in zip(parts[::2], parts[1::2], strict=False):
            smaller = int(np.searchsorted(left, right, side="left").sum())
            total += smaller + ties * (int(np.searchsorted(left, right, side="right").sum()) - smaller)
            merged.append(np.sort(np.concatenate([left, right])))
        if len(parts) % 2:
            merged.append(parts[-1])
        parts = merged
    return total


def variation(intervals: Floats) -> Floats:
    """Coefficient of variation of intervals (..., r), sd with r - 1."""
    return np.asarray(intervals.std(axis=-1, ddof=1) / intervals.mean(axis=-1))


def log_log(ages: Floats, intervals: Floats, keep: npt.NDArray[np.bool_] | None = None) -> tuple[Floats, Floats, Floats]:
    """Least-squares slope, intercept and R² of log10 interval on log10 age at its older end, per row.

    ages, intervals (..., r); ``keep`` masks what takes part (zero intervals of joined milestones do not). NaN where the
    fit does not exist.
    """
    keep = (intervals > 0) & (ages > 0) if keep is None else keep
    if keep.all():  # the common case, without masks
        x, y = np.log10(ages), np.log10(intervals)
        xm, ym = x.mean(axis=-1, keepdims=True), y.mean(axis=-1, keepdims=True)
        dx, dy = x - xm, y - ym
        sxx, sxy, syy = ((dx * dx).sum(axis=-1), (dx * dy).sum(axis=-1), (dy * dy).sum(axis=-1))
    else:
        w = keep.astype(float)
        x, y = np.log10(np.where(keep, ages, 1.0)), np.log10(np.where(keep, intervals, 1.0))
        with np.errstate(invalid="ignore", divide="ignore"):
            count = w.sum(axis=-1, keepdims=True)
            xm, ym = (w * x).sum(axis=-1, keepdims=True) / count, (w * y).sum(axis=-1, keepdims=True) / count
        dx, dy = w * (x - xm), w * (y - ym)
        sxx, sxy, syy = ((dx * dx).sum(axis=-1), (dx * dy).sum(axis=-1), (dy * dy).sum(axis=-1))
    with np.errstate(invalid="ignore", divide="ignore"):
        slope = sxy / sxx
        r2 = sxy * sxy / (sxx * syy)
    return np.asarray(slope), np.asarray(ym[..., 0] - slope * xm[..., 0]), np.asarray(r2)


def growth_of_mean_age(mean: Floats) -> Floats:
    """Growth times window, k, of the log-linear rate's maximum likelihood: the k that solves 1/k - 1/(exp(k) - 1) = mean.

    mean (...) of age fractions (present - t)/(present - start), in (0, 1); above one half k is negative. Ages rather than
    positions, so that nothing is lost when every event lies in the last millionth of the window. Newton from a closed-form start.
    """
    m = np.asarray(mean, dtype=float)
    flip = m > 0.5
    tail = np.where(flip, 1.0 - m, m)
    centred = 0.5 - tail
    k = np.where(tail > 0.2, 12.0 * centred / (1.0 - 2.4 * centred * centred), 1.0 / np.maximum(tail, 1e-300))
    for _ in range(60):
        small = k < 1e-2
        safe = np.where(small, 1.0, k)
        decay = np.exp(-safe)
        value = np.where(small, 0.5 - k / 12.0 + k**3 / 720.0, 1.0 / safe + decay / np.expm1(-safe))
        slope = np.where(small, -1.0 / 12.0 + k * k / 240.0, -1.0 / safe**2 + decay / np.expm1(-safe) ** 2)
        step = np.clip((tail - value) / slope, -0.5 * k, 2.0 * k + 1.0)
        k = k + step
        if np.all(np.abs(step) <= 1e-14 * k + 1e-300):
            break
    return np.asarray(np.where(flip, -k, k))
