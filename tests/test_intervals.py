# SPDX-License-Identifier: Apache-2.0
"""The interval series."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import chronos_acc.intervals as module
from chronos_acc.errors import WrongUse
from chronos_acc.intervals import interval_series, interval_sets, intervals_of, joined_epochs
from chronos_acc.record import Record

COLUMNS = [
    "milestone", "title", "year", "age", "interval", "interval_low", "interval_median", "interval_high", "swap_chance", "next_milestone",
    "open", "support",
]  # fmt: skip


def test_best_dates_give_the_series_and_the_last_interval_is_open() -> None:
    record = Record.from_dates([1950.0, 1900.0, 1990.0], present=2000.0)
    series = interval_series(record, seed=1, draws=50)
    assert series.milestone.tolist() == [2, 1, 3]
    assert series.interval.tolist() == [50.0, 40.0, 10.0]
    assert series.open.tolist() == [False, False, True]
    assert series.next_milestone.tolist() == [1, 3, -1]
    assert series.age.tolist() == [100.0, 50.0, 10.0]
    assert np.array_equal(series.interval_low, series.interval)  # dated exactly: draws do not differ
    assert np.array_equal(series.interval_high, series.interval)
    assert series.from_start is None


def test_frame_has_the_columns_of_the_contract() -> None:
    frame = interval_series(Record.from_dates([1900.0, 1950.0], present=2000.0), draws=10).to_frame()
    assert list(frame.columns) == COLUMNS
    assert frame["next_milestone"].isna().tolist() == [False, True]
    assert frame["next_milestone"].iloc[0] == 2
    assert frame["swap_chance"].isna().tolist() == [False, True]


@pytest.mark.parametrize("dates, rows", [([], 0), ([1900.0], 1), ([1900.0, 1900.0, 1900.0], 3), ([2000.0], 1), ([2100.0], 0)])
def test_degenerate_records(dates: list[float], rows: int) -> None:
    series = interval_series(Record.from_dates(dates, present=2000.0, unit=1.0), draws=20)
    frame = series.to_frame()
    assert len(series) == len(frame) == rows
    assert frame["open"].sum() == min(rows, 1)
    assert (frame["interval"] >= 0).all() and (frame["interval_low"] >= 0).all()


def test_known_law_of_an_interval_between_two_uniform_datings() -> None:
    # two milestones uniform over [0, 1] and [10, 11]: the interval is triangular on [9, 11], its quantiles 9 + sqrt(2 p) below the middle
    record = Record.from_dates([0.5, 10.5], present=2000.0, unit=1.0)
    series = interval_series(record, seed=3, draws=40_000)
    assert series.interval_low[0] == pytest.approx(9 + np.sqrt(2 * 0.025), abs=0.02)
    assert series.interval_median[0] == pytest.approx(10.0, abs=0.02)
    assert series.swap_chance[0] == 0


def test_swap_chance_of_two_datings_that_overlap() -> None:
    # uniform on [0, 2] and [1, 3]: the second comes first with probability 1/8
    record = Record.from_dates([1.0, 2.0], present=100.0, unit=2.0)
    assert interval_series(record, seed=2, draws=40_000).swap_chance[0] == pytest.approx(0.125, abs=0.01)


def test_after_a_swap_the_interval_runs_to_what_comes_next_in_that_draw() -> None:
    dates = np.array([[3.0, 1.0, 2.0], [1.0, 2.0, 3.0]])
    assert intervals_of(dates, 10.0).tolist() == [[7.0, 1.0, 1.0], [1.0, 1.0, 7.0]]


@settings(max_examples=40, deadline=None)
@given(st.lists(st.floats(-1e6, 2000), min_size=0, max_size=12), st.floats(1e-3, 1e4) | st.just(0.0), st.integers(0, 10))
def test_never_negative_and_whole(dates: list[float], unit: float, seed: int) -> None:
    series = interval_series(Record.from_dates(dates, present=2000.0, unit=unit), seed=seed, draws=30)
    for values in (series.interval, series.interval_low, series.interval_median, series.interval_high):
        assert (values >= 0).all()
    assert (series.interval_low <= series.interval_median).all() and (series.interval_median <= series.interval_high).all()
    assert series.interval.sum() == pytest.approx(2000.0 - min(dates) if dates else 0.0, rel=1e-9, abs=1e-6)


def test_intervals_of_matches_a_plain_loop() -> None:
    rng = np.random.default_rng(5)
    dates = rng.integers(0, 20, size=(40, 7)).astype(float)
    fast = intervals_of(dates, 20.0)
    for row, found in zip(dates, fast, strict=True):
        ordered = sorted(range(7), key=lambda j: (row[j], j))
        for position, j in enumerate(ordered):
            after = row[ordered[position + 1]] if position < 6 else 20.0
            assert found[j] == after - row[j]


def test_same_seed_same_numbers_and_chunks_do_not_matter(monkeypatch: pytest.MonkeyPatch) -> None:
    record = Record.from_dates(np.linspace(0, 1900, 40), present=2000.0, unit=100.0)
    one = interval_series(record, seed=9, draws=101)
    monkeypatch.setattr("chronos_acc.record.CHUNK_CELLS", 400)
    two = interval_series(record, seed=9, draws=101)
    assert np.array_equal(one.interval_low, two.interval_low) and np.array_equal(one.swap_chance, two.swap_chance, equal_nan=True)


def test_large_records_get_fewer_draws_and_say_so(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(module, "HELD_CELLS", 1000)
    monkeypatch.setattr(module, "LEAST_DRAWS", 10)
    series = interval_series(Record.from_dates(np.arange(50.0), present=100.0, unit=1.0), draws=500)
    assert series.draws == 20 and "20 draws instead of 500" in series.notes[0]


def test_milestones_outside_the_window_are_left_out_and_counted() -> None:
    record = Record.from_dates([100.0, 1900.0, 1950.0, 2010.0], present=2000.0, start=1800.0)
    series = interval_series(record, draws=10)
    assert series.year.tolist() == [1900.0, 1950.0] and series.from_start == 100.0
    assert "2 milestones outside" in series.notes[0]


def test_change_of_unit_and_shift_of_origin() -> None:
    dates = np.array([10.0, 20.0, 45.0, 80.0])
    base = interval_series(Record.from_dates(dates, present=100.0, unit=4.0), draws=200)
    moved = interval_series(Record.from_dates(dates * 1000 - 5e4, present=1e5 - 5e4, unit=4000.0), draws=200)
    assert np.allclose(moved.interval_low, base.interval_low * 1000) and np.allclose(moved.interval_high, base.interval_high * 1000)


def test_sets_by_list_support_and_category() -> None:
    mentions = np.array([[1, 0], [1, 1], [0, 1], [1, 1]], dtype=bool)
    record = Record.from_dates([1.0, 2.0, 4.0, 8.0], present=10.0, mentions=mentions, lists=["north", "south"], category=["a", "b", "a",
    None])
    by_list = interval_sets(record, "list", draws=5)
    assert {k: v.year.tolist() for k, v in by_list.items()} == {"north": [1.0, 2.0, 8.0], "south": [2.0, 4.0, 8.0]}
    assert {k: len(v) for k, v in interval_sets(record, "support", draws=5).items()} == {"1": 4, "2": 2}
    assert {k: len(v) for k, v in interval_sets(record, "category", draws=5).items()} == {"a": 2, "b": 1}
    with pytest.raises(WrongUse, match="list, support or category"):
        interval_sets(record, "colour")  # type: ignore[arg-type]


def test_epochs_join_equal_best_dates() -> None:
    epochs = joined_epochs(Record.from_dates([1.0, 2.0, 2.0, 5.0], present=10.0).window)
    assert epochs.year.tolist() == [1.0, 2.0, 5.0] and epochs.count.tolist() == [1, 2, 1]
    assert epochs.interval.tolist() == [1.0, 3.0] and epochs.age.tolist() == [9.0, 8.0, 5.0] and epochs.index.tolist() == [0, 1, 3]
    assert len(joined_epochs(Record.from_dates([], present=10.0).window)) == 0


def test_a_negative_number_of_draws_is_refused() -> None:
    with pytest.raises(WrongUse, match="0 or more"):
        interval_series(Record.from_dates([1.0], present=2.0), draws=-1)
    series = interval_series(Record.from_dates([1.0], present=2.0), draws=0)
    assert np.isnan(series.interval_low).all()
