# SPDX-License-Identifier: Apache-2.0
"""Each kind of chart in numbers: what it draws is what the record and the fits say."""

from __future__ import annotations

import json
import math
from pathlib import Path

import numpy as np
import pytest

from chart_records import log_uniform, several_lists
from chronos_acc.bias.check import Context
from chronos_acc.bias.grid import run_grid
from chronos_acc.bias.grid.choices import choices_of
from chronos_acc.errors import ChronosError, RecordRefused, WrongUse
from chronos_acc.record import Record
from chronos_acc.report import charts
from chronos_acc.report.charts import CHARTS, chart, to_terminal
from chronos_acc.report.charts.bands import interval_band
from chronos_acc.trend.nulls import LOG_UNIFORM

FROM_RECORD = ("interval_age", "cumulative", "recall", "completeness", "lists", "support")


def _series(data, name):
    return next(s for s in data.series if s.name.startswith(name))


def test_family_lists_its_members():
    folder = Path(charts.__file__).parent
    with_chart = {p.stem for p in folder.glob("*.py") if "\nCHART = Chart(" in p.read_text(encoding="utf-8")}
    assert with_chart == {c.name for c in CHARTS} and len(CHARTS) == len(with_chart)
    assert all(c.question.endswith("?") and c.needs for c in CHARTS)


def test_unknown_kind_names_the_nearest():
    with pytest.raises(WrongUse, match="did you mean 'recall'"):
        chart("recal", record=log_uniform())


@pytest.mark.parametrize("kind", FROM_RECORD)
def test_every_kind_is_a_document_and_the_same_twice(kind):
    record = several_lists()
    data, again = chart(kind, record=record, draws=200), chart(kind, record=record, draws=200)
    assert data == again or data.to_dict() == again.to_dict()
    json.dumps(data.to_dict(), allow_nan=False)
    assert data.kind == kind and data.question and data.reading and len(data.to_frame()) == sum(map(len, data.series))


def test_interval_age_draws_the_intervals_of_the_window():
    record = log_uniform()
    data = chart("interval_age", record=record, draws=300)
    window = record.window
    points = _series(data, "milestone")
    assert points.x == pytest.approx(window.ages[:-1]) and points.y == pytest.approx(window.intervals)
    still = _series(data, "open")
    assert still.role == "open" and still.x == still.y == pytest.approx((window.ages[-1],))
    line = _series(data, "least squares")
    slope, level = np.polyfit(np.log10(points.x), np.log10(points.y), 1)
    assert np.log10(line.y) == pytest.approx(level + slope * np.log10(line.x))
    assert data.x.backward and data.x.scale == "log" and data.panels[0].y.scale == "log"
    assert len([s for s in data.series if s.mark == "band"]) == 2


def test_interval_age_leaves_out_joined_milestones_and_says_so():
    record = Record.from_dates([1900.0, 1950.0, 1950.0, 1980.0, 2000.0], present=2020.0, unit=1.0)
    data = chart("interval_age", record=record, draws=100)
    assert len(_series(data, "milestone")) == 3
    assert any("share their date" in note for note in data.notes)


def test_band_of_a_null_holds_most_of_its_own_points():
    """Fresh log-uniform records lie inside the band of log_uniform in about 95 of 100 points."""
    record = log_uniform(n=40)
    window = record.window
    age, low, high = interval_band(record, window, LOG_UNIFORM, seed=1, floor=2.5, stream=0)
    times = LOG_UNIFORM.make(window, np.random.default_rng(99), 60)
    ages, gaps = (window.present - times[:, :-1]).ravel(), np.diff(times, axis=1).ravel()
    inner = (ages > age.min()) & (ages < age.max())
    at = np.log(ages[inner])
    gap, bottom, top = np.log(gaps[inner]), np.interp(at, np.log(age), np.log(low)), np.interp(at, np.log(age), np.log(high))
    inside = (gap >= bottom) & (gap <= top)
    assert 0.90 < inside.mean() < 0.98


@pytest.mark.parametrize(
    "record", [several_lists(), log_uniform(), Record.from_dates([0.0, 500.0, 900.0, 1000.0], present=1100.0, start=-100.0)]
)
def test_cumulative_counts_and_laws_end_at_the_count(record):
    data = chart("cumulative", record=record)
    count = _series(data, "milestones")
    n = record.window.n
    assert count.y[0] == 0 and count.y[-1] == n and list(count.y) == sorted(count.y)
    for law in (s for s in data.series if s.role == "law"):
        assert law.y[0] == pytest.approx(0.0, abs=1e-9) and law.y[-1] == pytest.approx(n, rel=0.05)
        assert np.all(np.diff(law.y) >= -1e-9)
    steady = _series(data, "steady")
    if not data.x.backward:  # on a linear axis a steady rate is straight
        assert np.diff(steady.y) == pytest.approx(np.diff(steady.y)[0])


def test_power_law_is_drawn_only_from_a_given_start():
    names = [s.name for s in chart("cumulative", record=log_uniform()).series]
    assert "power law" not in names
    given = Record.from_dates(np.linspace(1900.0, 2000.0, 20) ** 1.0, present=2010.0, start=1850.0)
    assert "power law" in [s.name for s in chart("cumulative", record=given).series]


def test_recall_passes_one_half_at_the_tipping_point():
    data = chart("recall", record=several_lists())
    mark, curve = _series(data, "tipping point"), _series(data, "half forgotten every")
    at = np.interp(np.log(mark.x[0]), np.log(curve.x), curve.y)
    assert mark.y == (0.5,) and at == pytest.approx(0.5, abs=0.01)
    assert mark.x_low[0] < mark.x[0] < mark.x_high[0]
    assert curve.y[0] == pytest.approx(1.0, abs=0.05) and np.all(np.diff(curve.y) <= 0)


def test_recall_of_a_slowing_record_needs_no_forgetting():
    record = Record.from_dates([0.0, 10.0, 20.0, 35.0, 50.0, 80.0, 130.0, 200.0], present=2000.0)
    data = chart("recall", record=record)
    assert not [s for s in data.series if s.role == "law"] and any("no forgetting is needed" in n for n in data.notes)
    assert to_terminal(data)


def test_completeness_lies_between_none_and_all():
    data = chart("completeness", record=several_lists())
    for s in data.series:
        finite = [v for v in (*s.y, *s.y_low, *s.y_high) if math.isfinite(v)]
        assert all(-1e-9 <= v <= 1 + 1e-9 for v in finite)
    curve = _series(data, "named by any list")
    assert curve.y[0] > curve.y[-1]  # from young to old: these lists forget


def test_completeness_of_one_list_is_refused_with_the_reason():
    with pytest.raises(RecordRefused, match="one list"):
        chart("completeness", record=log_uniform())


def test_lists_have_a_row_each_and_the_pooled_mean():
    record = several_lists()
    data = chart("lists", record=record)
    assert data.panels[0].y.names == (*record.lists, "pooled")
    whole = _series(data, "the whole list")
    for name, slope in zip(whole.label, whole.x, strict=True):
        window = record.only(sources=[name]).window
        good = window.intervals > 0
        expected = np.polyfit(np.log10(window.ages[:-1][good]), np.log10(window.intervals[good]), 1)[0]
        assert slope == pytest.approx(expected, rel=1e-6)


def test_support_counts_every_milestone_once_and_every_mention():
    record = several_lists()
    data = chart("support", record=record)
    assert sum(len(s) for s in data.panels[0].series) == len(record.window.times)
    assert sum(len(s) for s in data.panels[1].series) == int(record.mentions[record.window.index].sum())
    assert data.panels[0].y.names[-1] == "1 list"


SMALL = {
    "none": Record.from_dates([], present=2000.0),
    "one": Record.from_dates([1900.0], present=2000.0),
    "two": Record.from_dates([1900.0, 1950.0], present=2000.0),
    "three": Record.from_dates([1900.0, 1950.0, 1990.0], present=2000.0),
    "one instant": Record.from_dates([1900.0] * 5, present=2000.0),
    "at the present": Record.from_dates([2000.0] * 5, present=2000.0),
    "closing": Record.from_dates([1900.0, 1950.0, 1990.0, 2000.0], present=2000.0),
    "deep": Record.from_dates(2000.0 - np.geomspace(1e10, 1e6, 12), present=2000.0),
    "crowded": Record.from_dates([-1e10, *np.linspace(-1e6, 1990.0, 50)], present=2000.0),
    "after": Record.from_dates([2010.0, 2020.0, 2030.0], present=2000.0),
}


@pytest.mark.parametrize("kind", FROM_RECORD)
@pytest.mark.parametrize("name", SMALL)
def test_small_and_odd_records_are_drawn_or_refused_in_one_line(kind, name):
    try:
        data = chart(kind, record=SMALL[name], draws=50)
    except ChronosError as error:
        assert "\n" not in str(error) and str(error)
    else:
        assert all(len(line) <= 80 for line in to_terminal(data).splitlines())
        json.dumps(data.to_dict(), allow_nan=False)


@pytest.fixture(scope="module")
def small_grid():
    arbitrary = {"predictor": ["log10_age", "order"], "young_end": ["open", "last"]}
    choices = choices_of({"arbitrary": arbitrary, "question": {"response": ["log10_interval", "rate"]}}, "t", "0")
    return run_grid(Context(record=several_lists(), draws=20), choices, joint=60, workers=1)


def test_grid_sorts_every_combination_and_shows_its_options(small_grid):
    data = chart("grid", record=several_lists(), grid=small_grid)
    points = _series(data, "combination")
    valid = [line for line in small_grid.lines if line.z is not None]
    assert list(points.y) == sorted(line.z for line in valid) and len(points) == len(valid)
    strips = data.panels[1]
    for row, name in enumerate(strips.y.names):
        choice, option = name.split(": ")
        used = sum(str(line.options[choice.replace(" ", "_")]) == option for line in valid)
        assert sum(len(s) for s in strips.series if s.y and s.y[0] == row) == used
    own = _series(data, "your own")
    assert own.y == tuple(line.z for line in valid if line.own)
    band = _series(data, "steady records")
    assert all(low <= high for low, high in zip(band.y_low, band.y_high, strict=True))
    assert all(len(line) <= 80 for line in to_terminal(data).splitlines())
    assert data.to_dict() == chart("grid", record=several_lists(), grid=small_grid).to_dict()


def test_grid_is_not_guessed():
    with pytest.raises(WrongUse, match="run_grid"):
        chart("grid", record=several_lists())
