# SPDX-License-Identifier: Apache-2.0
"""Operational time: cumulated exposure, invariances, and what it does to tests and laws."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from scipy import integrate

from chronos_acc.errors import ListRefused, RecordRefused, WrongUse
from chronos_acc.record import Record
from chronos_acc.trend.exposure import Exposure, exposure_of, operational, read_exposure
from chronos_acc.trend.rate_laws import fit_laws
from chronos_acc.trend.trend_tests import run_tests


def test_sparse_rows_are_instants_joined_by_straight_lines() -> None:
    exposure = Exposure.of([1900, 1800, 2000], [20, 10, 80])
    at = np.array([1800, 1825, 1900, 1960, 2000, 2010.0])
    known = [integrate.quad(lambda t: np.interp(t, [1800, 1900, 2000], [10, 20, 80]), 1800, t, points=[1900])[0] for t in at]
    assert exposure.cumulated(at) == pytest.approx(known)
    assert not exposure.yearly and exposure.covers == (1800, 2100)


def test_a_row_a_year_is_the_calendar_year() -> None:
    exposure = Exposure.of([2000, 2001, 2002], [1, 3, 5])
    assert exposure.yearly and exposure.covers == (2000, 2003)
    assert exposure.cumulated([2000, 2000.5, 2001, 2002, 2003]) == pytest.approx([0, 0.5, 1, 4, 9])


def test_constant_exposure_changes_nothing() -> None:
    dates = 1500 + 500 * np.random.default_rng(1).random(30)
    record = Record.from_dates(dates, present=2025, start=1500, unit=1.0)
    again = operational(record, ([1500, 2025], [7.0, 7.0]))
    assert again.best == pytest.approx(record.best, abs=1e-9) and again.unit == pytest.approx(record.unit)
    assert (again.present, again.start) == (2025, 1500) and again.window.n == 30


def test_events_in_step_with_exposure_are_steady_in_operational_time() -> None:
    """Dates drawn in proportion to a population that grows twentyfold: speeding by the calendar, steady by exposure, law by law."""
    years = np.arange(1000, 2001, 50.0)
    population = np.exp(np.linspace(0, 3, len(years)))
    exposure = Exposure.of(years, population)
    shares = np.linspace(0.01, 0.99, 60)
    grid = np.linspace(1000, 2000, 200_001)
    dates = np.interp(shares * exposure.cumulated(2000), exposure.cumulated(grid), grid)
    record = Record.from_dates(dates, present=2000, start=1000)
    plain, turned = run_tests(record.window, seed=1), run_tests(operational(record, exposure).window, seed=1)
    assert plain.row("laplace").direction == "speeding" and plain.row("laplace").p_exact < 0.001
    assert turned.row("laplace").p_exact > 0.9 and turned.row("anderson_darling").p_exact > 0.9
    laws = fit_laws(operational(record, {"year": years, "exposure": population}).window, seed=1, replicates=0)
    assert laws.row("log_linear").parameters["growth"] * 1000 == pytest.approx(0, abs=0.01)
    assert max((r for r in laws.rows if r.weight is not None), key=lambda r: r.weight).law == "steady"


def test_the_opener_and_its_ties_still_open_the_window_and_datings_go_along() -> None:
    record = Record.from_dates([1000, 1000, 1500, 1800, 2000], present=2000, unit=10.0)
    turned = operational(record, ([900, 2000], [1.0, 9.0]))
    window = turned.window
    assert (window.opening, window.n, window.closing) == (2, 2, 1) and window.start == 1000 and window.span == 1000
    assert (turned.earliest < turned.best).all() and (turned.best < turned.latest).all()
    assert turned.unit[4] > turned.unit[0]  # more happens in ten recent years
    assert any("exposure" in note for note in turned.notes)
    draws = turned.all_draws(50, seed=1)
    assert (draws <= 2000).all()


def test_refusals_name_what_is_covered() -> None:
    record = Record.from_dates([1000.0, 1500, 1800], present=2000)
    with pytest.raises(RecordRefused, match="covers 1400 to 1700, the window 1000 to 2000"):
        operational(record, ([1400, 1550], [1, 1]))
    with pytest.raises(RecordRefused, match="no length"):
        operational(Record.from_dates([5.0], present=5), ([0, 10], [1, 1]))
    for years, values in (([1], [1]), ([1, 2], [1, 0]), ([1, 1], [1, 2]), ([1, np.nan], [1, 1]), ([1, 2], [1, 2, 3])):
        with pytest.raises(WrongUse):
            Exposure.of(years, values)
    with pytest.raises(WrongUse, match="two columns"):
        operational(record, {"when": [1, 2]})


def test_reading_a_file(tmp_path: Path) -> None:
    file = tmp_path / "people.csv"
    file.write_text("year,exposure\n1000,5\n2000,50\n", encoding="utf-8")
    assert read_exposure(file).values.tolist() == [5, 50]
    for text, match in (
        ("a,b\n1,2\n", "no columns"),
        ("year,exposure\n1,x\n2,3\n", "line 2"),
        ("year,exposure\n1,1\n", "two or more"),
        ("", "no columns"),
    ):
        file.write_text(text, encoding="utf-8")
        with pytest.raises(ListRefused, match=match):
            read_exposure(file)
    with pytest.raises(ListRefused, match="readable"):
        read_exposure(tmp_path / "missing.csv")


def test_every_way_to_give_an_exposure_is_read_alike() -> None:
    years, values = np.array([1900.0, 1950.0, 2000.0]), np.array([1.0, 2.0, 5.0])
    for given in (
        Exposure.of(years, values),
        (years, values),
        {"year": years, "exposure": values},
        pd.DataFrame({"year": years, "exposure": values}),
        np.column_stack([years, values]),
        np.vstack([years, values]),
        [[1900, 1], [1950, 2], [2000, 5]],
    ):
        found = exposure_of(given)
        assert found.years.tolist() == years.tolist() and found.values.tolist() == values.tolist()
    assert exposure_of([[1900, 1], [2000, 5]]).years.tolist() == [1900, 2000]  # two by two: a row is a year
    for wrong in (3.0, "people.csv", {"when": [1, 2]}, np.ones((3, 3)), [["a", "b"], ["c", "d"]], None):
        with pytest.raises(WrongUse, match="two columns, year and exposure"):
            exposure_of(wrong)
