# SPDX-License-Identifier: Apache-2.0
"""Axes, ticks, limits and the plain data of a chart."""

from __future__ import annotations

import json
import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chronos_acc.errors import WrongUse
from chronos_acc.report.charts import Axis, ChartData, Panel, Series
from chronos_acc.report.charts.data import floats, limits
from chronos_acc.report.charts.ticks import text, ticks


def test_axis_places_values_between_its_limits():
    log = Axis("age", "years", 1.0, 1e4, "log", backward=True)
    assert [log.place(v) for v in (1e4, 1e2, 1.0)] == pytest.approx([0.0, 0.5, 1.0])
    assert math.isnan(log.place(0.0)) and math.isnan(log.place(math.nan)) and math.isnan(log.place(math.inf))
    assert Axis("n", "", 0.0, 10.0).place(2.5) == 0.25
    assert Axis("age", "years", 1.0, 2.0).title == "age (years)" and Axis("list", "", 0.0, 1.0).title == "list"


@pytest.mark.parametrize(
    "low, high, scale",
    [(1.0, 1.0, "linear"), (2.0, 1.0, "linear"), (0.0, 1.0, "log"), (math.nan, 1.0, "linear"), (0.0, math.inf, "linear")]
)
def test_axis_refuses_limits_it_cannot_draw(low, high, scale):
    with pytest.raises(WrongUse, match="axis 'x'"):
        Axis("x", "", low, high, scale)


def test_series_refuses_columns_of_unequal_length():
    with pytest.raises(WrongUse, match="2 points but 1 values of y"):
        Series("a", "dots", "data", (1.0, 2.0), (1.0,))


@given(
    st.floats(-1e10, 1e10, allow_nan=False), st.floats(1e-6, 1e10, allow_nan=False), st.integers(2, 14),
    st.sampled_from(["number", "year", "share", "length"]),
)  # fmt: skip
def test_linear_ticks_are_round_inside_and_few(low, width, most, style):
    high = low + width
    if width < 1e-6 * abs(low):  # float64 has no round values there
        return
    axis = Axis("x", "", low, high, style=style)
    marks = ticks(axis, most)
    assert len(marks) <= most + 2
    room = 1e-6 * width + 1e-12 * max(abs(low), abs(high))
    assert all(low - room <= v <= high + room for v, _ in marks)
    assert [v for v, _ in marks] == sorted(v for v, _ in marks)


@given(st.floats(-9, 9), st.floats(0.2, 14), st.integers(2, 14))
def test_log_ticks_are_inside_and_few(start, decades, most):
    axis = Axis("age", "years", 10.0**start, 10.0 ** (start + decades), "log", style="age")
    marks = ticks(axis, most)
    assert len(marks) <= most + 2
    assert all(axis.low * (1 - 1e-6) <= v <= axis.high * (1 + 1e-6) for v, _ in marks)


def test_tick_texts_carry_units_of_their_size():
    age = Axis("age", "years", 0.1, 1e10, "log", style="age")
    assert [text(age, v) for v in (1e9, 2e8, 1e3, 100.0, 0.5)] == ["1 Ga", "200 Ma", "1 ka", "100", "0.5"]
    length = Axis("interval", "years", 0.1, 1e10, "log", style="length")
    assert text(length, 1e6) == "1 Myr"
    year = Axis("year", "", -600.0, 2000.0, style="year")
    assert [text(year, v) for v in (-499.0, 0.0, 1850.0)] == ["500 BCE", "1 BCE", "1850"]
    assert text(Axis("share", "", 0.0, 1.0, style="share"), 0.25) == "25 %"


def test_limits_hold_all_values_with_a_margin():
    assert limits([1.0, 3.0, math.nan]) == pytest.approx((0.92, 3.08))
    low, high = limits([10.0, 1000.0, 0.0], "log")
    assert low < 10.0 and high > 1000.0 and low > 0
    for scale in ("linear", "log"):
        low, high = limits([5.0], scale)
        assert low < 5.0 < high
        low, high = limits([], scale)
        assert low < high
    assert limits([0.0])[0] < 0.0


def test_frame_and_document_hold_the_same_numbers():
    band = Series("band", "band", "null", (1.0, 2.0), y_low=(0.0, 0.5), y_high=(1.0, math.nan))
    dots = Series("dots", "dots", "data", (1.0,), (2.0,), label=("first",))
    axis = Axis("x", "years", 0.0, 3.0)
    data = ChartData("test", "Is it so?", axis, (Panel(axis, (band, dots)),), "Read it.", ("a remark",))
    frame = data.to_frame()
    assert list(frame["series"]) == ["band", "band", "dots"] and frame["label"].iloc[2] == "first"
    assert frame["y_high"].isna().tolist() == [False, True, True] and frame["y"].isna().tolist() == [True, True, False]
    document = json.loads(json.dumps(data.to_dict(), allow_nan=False))
    assert document["panels"][0]["series"][0]["y_high"] == [1.0, None]
    assert document["x"]["unit"] == "years" and document["notes"] == ["a remark"]
    assert floats([1, None])[0] == 1.0 and math.isnan(floats([None])[0])
