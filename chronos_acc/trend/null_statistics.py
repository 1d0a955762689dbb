# SPDX-License-Identifier: Apache-2.0
"""The statistics that stand beside the nulls: each on whole times matrices (records, w), observed and null alike through the same lines."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ..record import Window
from . import kernels
from .null_model import youngest_floor
from .positions import rounding

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True)
class Statistic:
    """``compute(times (s, w) sorted, window)`` gives (s,), NaN where undefined; ``tail`` is "upper" or "two-sided"."""

    name: str
    tail: str
    compute: Callable[[Floats, Window], Floats]


def age_fractions(times: Floats, window: Window) -> Floats:
    """(s, n) ages over the window's length of the counted events, oldest first: exact near the present, where positions lose digits."""
    counted = times[..., window.opening : times.shape[-1] - window.closing]
    # a null event rounded or permuted onto an end of the window stands half a dating unit inside it, so that logarithms exist
    edge = max(youngest_floor(window) / window.span, 1e-15)
    fraction = (window.present - counted) / window.span
    return np.asarray(np.where(fraction <= 0, edge, np.where(fraction >= 1, 1.0 - edge, fraction)))


def _spread_ages(times: Floats, window: Window) -> Floats:
    """(s, n) the same with equal dates at fixed mid-ranks within their dating, as the tests and laws place them (``positions``)."""
    ages = age_fractions(times, window)
    counted = times[..., window.opening : times.shape[-1] - window.closing]
    equal = counted[..., 1:] == counted[..., :-1]
    rows = np.nonzero(equal.any(axis=-1))[0]
    if not len(rows) or not window.unit.any():
        return ages
    equal, v = equal[rows], ages[rows]
    place = np.arange(v.shape[-1])
    edge = np.zeros((len(rows), 1), bool)
    first = np.maximum.accumulate(np.where(np.concatenate([edge, equal], axis=-1), 0, place), axis=-1)
    last = np.minimum.accumulate(np.where(np.concatenate([equal, edge], axis=-1), place[-1], place)[:, ::-1], axis=-1)[:, ::-1]
    size = last - first + 1
    width = np.minimum(_units(counted[rows], window) / window.span, 2.0 * np.minimum(v, 1.0 - v))
    out = ages.copy()
    out[rows] = np.sort(v - width * (place - first + 0.5 - size / 2.0) / size, axis=-1)[:, ::-1]
    return out


def _units(times: Floats, window: Window) -> Floats:
    """(s, n) the width to which each date is dated: that of the window's milestone nearest to it in log age, the narrowest of equal ones."""
    dates, group = np.unique(window.times, return_inverse=True)
    narrow = np.full(len(dates), np.inf)
    np.minimum.at(narrow, group, np.where(window.unit > 0, window.unit, np.inf))
    unit = np.where(np.isfinite(narrow), narrow, 0.0)[::-1]
    floor = youngest_floor(window)
    logs = np.log(np.maximum(window.present - dates, floor))[::-1]
    return np.asarray(unit[np.searchsorted(0.5 * (logs[1:] + logs[:-1]), np.log(np.maximum(window.present - times, floor)))])


def _closed(times: Floats, window: Window) -> Floats:
    """(s, r) closed intervals, milestones in one instant with an end of the window standing for one."""
    return np.diff(times[..., max(window.opening - 1, 0) : times.shape[-1] - max(window.closing - 1, 0)], axis=-1)


def _slope(times: Floats, window: Window) -> Floats:
    return kernels.log_log(window.present - times[..., :-1], np.diff(times, axis=-1))[0]


def _r_squared(times: Floats, window: Window) -> Floats:
    return kernels.log_log(window.present - times[..., :-1], np.diff(times, axis=-1))[2]


def _laplace(times: Floats, window: Window) -> Floats:
    return -kernels.laplace(age_fractions(times, window))


def _mil_hdbk(times: Floats, window: Window) -> Floats:
    return np.asarray(-2.0 * np.log1p(-_spread_ages(times, window)).sum(axis=-1))


def _anderson_darling(times: Floats, window: Window) -> Floats:
    # symmetrical under u -> 1 - u, so age fractions in rising order serve, with full digits near the present
    return kernels.anderson_darling(_spread_ages(times, window)[..., ::-1])


def _reversals(times: Floats, window: Window) -> Floats:
    # on dense ranks in small integers, which compare faster and keep ties, also those that only rounding parts
    intervals = _closed(times, window)
    order = np.argsort(intervals, axis=-1)
    ordered = np.take_along_axis(intervals, order, axis=-1)
    dense = np.zeros(intervals.shape, np.int16)
    dense[..., 1:] = np.cumsum(np.diff(ordered, axis=-1) > rounding(window), axis=-1)
    rank = np.empty_like(dense)
    np.put_along_axis(rank, order, dense, axis=-1)
    return kernels.reversals(rank)  # type: ignore[arg-type]


def _lewis_robinson(times: Floats, window: Window) -> Floats:
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(_laplace(times, window) / kernels.variation(_closed(times, window)))


def growth_times_window(times: Floats, window: Window) -> Floats:
    """(s,) growth of the log-linear rate over the whole window, k."""
    return kernels.growth_of_mean_age(age_fractions(times, window).mean(axis=-1))


def _growth(times: Floats, window: Window) -> Floats:
    return np.asarray(growth_times_window(times, window) / window.span)


def _gain(times: Floats, window: Window) -> Floats:
    """Log-likelihood of the log-linear law over that of the steady one."""
    mean = age_fractions(times, window).mean(axis=-1)
    k = kernels.growth_of_mean_age(mean)
    size = np.abs(k)
    tail = np.where(k < 0, 1.0 - mean, mean)
    with np.errstate(divide="ignore", invalid="ignore"):
        log_scale = np.where(size < 1e-6, size / 2, np.log(size) - np.log(-np.expm1(-size)))
    return np.asarray(window.n * (log_scale - size * tail))


def _age_exponent(times: Floats, window: Window) -> Floats:
    """s of the age density a^(-s) between the oldest and the youngest milestone."""
    ages = np.maximum(window.present - times, youngest_floor(window))
    logs = np.log(ages)
    old, young = logs[..., :1], logs[..., -1:]
    with np.errstate(divide="ignore", invalid="ignore"):
        length = (old - young)[..., 0]
        position = ((old - logs) / (old - young))[..., 1:-1].mean(axis=-1)  # 0 at the oldest: mean of a fraction like an age's
        out = 1.0 - kernels.growth_of_mean_age(np.clip(np.nan_to_num(position, nan=0.5), 1e-12, 1 - 1e-12)) / length
    return np.asarray(np.where((length > 0) & (position > 0) & (position < 1), out, np.nan))


STATISTICS = (
    Statistic("slope", "upper", _slope),
    Statistic("r_squared", "upper", _r_squared),
    Statistic("laplace", "two-sided", _laplace),
    Statistic("mil_hdbk_189", "two-sided", _mil_hdbk),
    Statistic("anderson_darling", "upper", _anderson_darling),
    Statistic("reverse_arrangements", "two-sided", _reversals),
    Statistic("lewis_robinson", "two-sided", _lewis_robinson),
    Statistic("growth", "two-sided", _growth),
    Statistic("gain", "upper", _gain),
    Statistic("age_exponent", "two-sided", _age_exponent),
)
