# SPDX-License-Identifier: Apache-2.0
"""The precision kernel: the nearest in log age gives its dating."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from chronos_acc.record import Record
from chronos_acc.trend.nulls import STEADY
from chronos_acc.trend.precision import Kernel, null_times


def test_donor_is_the_nearest_in_log_age() -> None:
    record = Record.from_dates([2000 - 1e6, 2000 - 1e4, 2000 - 100.0, 1999.0], present=2000, unit=[1e5, 1e3, 10, 1])
    kernel = Kernel.of(record, record.window)
    ages = np.array([9e5, 2e5, 9e4, 2000.0, 900, 11, 9, 0.0])
    assert kernel.donors(2000 - ages, 2000).tolist() == [0, 0, 1, 1, 2, 2, 3, 3]


def test_rounding_uses_the_donors_grid_and_stays_inside() -> None:
    record = Record.from_dates([1000.5, 1500.5, 1900.5, 1999.5], present=2000, unit=[100, 100, 1, 1])
    kernel = Kernel.of(record, record.window)
    rng = np.random.default_rng(1)
    times = np.sort(rng.uniform(1000.5, 2000, 5000))
    out = kernel.apply(times, 1000.5, 2000.0, 2000.0, rng)
    assert (out > 1000.5).all() and (out < 2000).all()
    old = times < 1400
    assert np.isin(np.round(out[old] % 100, 6), [0.5]).all()
    assert np.abs(out[old] - times[old]).max() <= 150  # half a unit, one more where the start would be met


def test_blur_is_reflected_at_both_ends() -> None:
    record = Record.from_dates(np.linspace(0.5, 99.5, 30), present=100, start=0)
    record = replace(record, sd=np.full(30, 5.0))
    rng = np.random.default_rng(2)
    times = np.sort(rng.uniform(0, 100, 20_000))
    out = Kernel.of(record, record.window).apply(times, 0.0, 100.0, 100.0, rng)
    assert (out > 0).all() and (out < 100).all()
    assert (out - times)[(times > 20) & (times < 80)].std() == pytest.approx(5, rel=0.05)
    assert np.histogram(out, 10, (0, 100))[0].std() < 80  # still uniform


def test_exact_dates_pass_through() -> None:
    record = Record.from_dates([1.0, 2.0, 5.0], present=6)
    kernel = Kernel.of(record, record.window)
    assert kernel.exact
    times = np.array([[1.0, 1.234, 5.678]])
    assert kernel.apply(times, 1, 6, 6, np.random.default_rng(1)) is times


def test_a_steady_list_dated_to_the_year_meets_nulls_dated_to_the_year() -> None:
    rng = np.random.default_rng(3)
    record = Record.from_dates(np.floor(rng.uniform(1900, 2000, 100)) + 0.5, present=2000, unit=1.0)
    times = null_times(record, record.window, STEADY, np.random.default_rng(4), 300)
    joined = (np.diff(times, axis=1) == 0).sum(axis=1)
    assert joined.min() > 15 and abs(joined.mean() - record.window.joined) < 15
