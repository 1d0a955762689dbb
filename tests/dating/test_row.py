# SPDX-License-Identifier: Apache-2.0
"""Rows: unit, sigma, plus_minus, earliest and latest in columns of their own."""

from __future__ import annotations

from typing import Any

import pytest

from chronos_acc.dating import Settings, mentions_radiocarbon, notations, read, read_row
from chronos_acc.errors import DateRefused

S = Settings(compiled=2024)
Z = 1.959963984540054


@pytest.mark.parametrize(
    ("row", "text"),
    [
        ({"date": "66.0", "unit": "Ma"}, "66.0 Ma"),
        ({"date": 66.5, "unit": "Ma"}, "66.5 Ma"),
        ({"date": 1985}, "1985"),
        ({"date": 1985.0}, "1985"),
        ({"date": "66.0 Ma", "unit": "Ma"}, "66.0 Ma"),
        ({"date": "66.0 Ma", "unit": "Myr"}, "66.0 Ma"),
        ({"date": "450–400", "unit": "BCE"}, "450–400 BCE"),
        ({"date": "c. 3000", "unit": "BC"}, "c. 3000 BCE"),
        ({"date": "66.0 ± 0.05", "unit": "Ma"}, "66.0 ± 0.05 Ma"),
        ({"date": "12–9", "unit": "cal ka BP"}, "12–9 ka BP"),
        ({"date": "66.0", "unit": "Ma", "plus_minus": "0.05"}, "66.0 ± 0.05 Ma"),
        ({"date": "66.0 Ma", "plus_minus": 0.05}, "66.0 ± 0.05 Ma"),
        ({"date": "66.0", "unit": "Ma", "plus_minus": "0.1", "sigma": "2"}, "66.0 ± 0.1 Ma (2σ)"),
        ({"date": "66.0 ± 0.1", "unit": "Ma", "sigma": 2}, "66.0 ± 0.1 Ma (2σ)"),
        ({"date": "1850", "plus_minus": "10"}, "1850 ± 10"),
        ({"date": "44 BCE", "plus_minus": "2"}, "44 ± 2 BCE"),
        ({"date": "66.0 ± 0.05 Ma", "plus_minus": "0.05"}, "66.0 ± 0.05 Ma"),
        ({"date": "1985-04-12", "unit": "CE"}, "1985-04-12"),
        ({"date": "April 1961", "unit": "CE"}, "April 1961"),
        ({"date": "1961", "unit": "CE"}, "1961 CE"),
        ({"date": "before 44", "unit": "BCE", "earliest": None}, None),
        ({"earliest": "450", "latest": "400", "unit": "BCE"}, "450–400 BCE"),
        ({"earliest": "66.3", "latest": "65.8", "unit": "Ma"}, "66.3–65.8 Ma"),
        ({"earliest": 1914, "latest": 1918}, "1914–1918"),
        ({"earliest": "500 BCE", "latest": "20 CE"}, "500 BCE–20 CE"),
        ({"earliest": "1961-04-12", "latest": "1961-04-14"}, "1961-04-12/1961-04-14"),
        ({"date": "", "earliest": "1850", "latest": "1860"}, "1850–1860"),
        ({"date": float("nan"), "earliest": "1850", "latest": "1860"}, "1850–1860"),
        ({"date": "1855", "earliest": "1850", "latest": "1860"}, "1850–1860"),
        ({"date": "1855", "earliest": "1850", "latest": "1860", "plus_minus": "30"}, "1850–1860"),
        ({"date": "1850–1855", "latest": "1853"}, "1850–1853"),
    ],
)
def test_a_row_reads_as_its_text_would(row: dict[str, Any], text: str | None) -> None:
    if text is None:
        return
    ours, whole = read_row(**{"date": None, **row}, settings=S), read(text, S)
    assert ours.dating == whole.dating


def test_bounds_around_a_date_off_their_middle() -> None:
    reading = read_row("66.0", unit="Ma", earliest="66.9", latest="65.9", settings=S)
    dating = reading.dating
    assert (dating.shape, dating.earliest, dating.best, dating.latest) == ("normal", 2024 - 66.9e6, 2024 - 66e6, 2024 - 65.9e6)
    assert reading.notation == "ago"
    assert "95 % points" in reading.words


def test_bounds_alone() -> None:
    reading = read_row(None, earliest="1850", latest="1860", settings=S)
    assert (reading.notation, reading.dating.best, reading.dating.shape) == ("columns", 1855.5, "uniform")
    assert reading.notation in notations()


@pytest.mark.parametrize(
    ("row", "says"),
    [
        ({"date": None}, "is empty"),
        ({"date": ""}, "is empty"),
        ({"date": "66 Ma", "unit": "ka"}, "the row's unit is ka"),
        ({"date": "44 BCE", "unit": "CE"}, "the row's unit is CE"),
        ({"date": "66", "unit": "furlong"}, "is not known"),
        ({"date": "66.0", "unit": "Ma", "plus_minus": "x"}, "is no amount"),
        ({"date": "66.0", "unit": "Ma", "plus_minus": "-1"}, "is no amount"),
        ({"date": "66.0", "unit": "Ma", "plus_minus": "0"}, "is no amount"),
        ({"date": "66.0", "sigma": "0"}, "is no amount"),
        ({"date": "66.0 ± 0.05 Ma", "plus_minus": "0.1"}, "states an error of its own"),
        ({"date": "1850–1860", "plus_minus": "5"}, "error at the end of a range"),
        ({"earliest": "1860", "latest": "1850"}, "lies after latest"),
        ({"earliest": "65.8", "latest": "66.3", "unit": "Ma"}, "larger number"),
        ({"date": "1900", "earliest": "1850", "latest": "1860"}, "outside the row's bounds"),
        ({"earliest": "1850"}, "stands alone"),
        ({"latest": "1850"}, "stands alone"),
        ({"date": "1855", "earliest": "soon"}, "earliest 'soon'"),
        ({"date": "-500", "unit": "BCE"}, "gives the era twice"),
        ({"date": "2030"}, "lies after the end of 2024"),
        ({"date": "4500", "unit": "14C BP"}, "radiocarbon"),
        ({"date": "4500", "unit": "14C BP", "plus_minus": "40"}, "radiocarbon"),
        ({"date": "12/03/04", "earliest": "1850", "latest": "1860"}, "two digits"),
    ],
)
def test_rows_that_contradict_themselves(row: dict[str, Any], says: str) -> None:
    with pytest.raises(DateRefused) as refusal:
        read_row(**{"date": None, **row}, settings=S)
    assert says in str(refusal.value)


def test_another_column_that_speaks_of_radiocarbon() -> None:
    assert "check that the date is calibrated" in read_row("4500 BP", settings=S, others=["wood", "14C, AMS"]).remarks[0]
    assert not read_row("4500 BP", settings=S, others=["wood", "AMC-14 rocket"]).remarks
    assert (
        mentions_radiocarbon("radiocarbon")
        and mentions_radiocarbon("14C")
        and mentions_radiocarbon("¹⁴C")
        and not mentions_radiocarbon("114Cd")
    )


def test_lists_that_count_ago() -> None:
    ago = Settings(compiled=2000, counted="ago")
    assert read("500", ago).dating == read("500 years ago", ago).dating
    assert read("12–9", Settings(compiled=2000, counted="ago", unit="ka")).dating == read("12–9 ka", ago).dating
    assert read("1985-04-12", ago).dating.best == pytest.approx(1985.278, abs=1e-3)
    assert read("44 BCE", ago).dating.earliest == -43
    with pytest.raises(DateRefused, match="counts back twice"):
        read("-500", ago)


def test_the_units_of_a_list() -> None:
    assert read("66.0", Settings(compiled=2024, unit="Ma")).dating == read("66.0 Ma", S).dating
    assert read("450–400", Settings(unit="BCE")).dating == read("450–400 BCE").dating
    assert read_row("66.0", unit="ka", settings=Settings(compiled=2024, unit="Ma")).dating == read("66.0 ka", S).dating
    assert read("Cretaceous", Settings(compiled=2024, unit="Ma")).dating == read("Cretaceous", S).dating


def test_comma_as_decimal_mark() -> None:
    comma = Settings(compiled=2024, decimal=",")
    assert read("66,04 Ma", comma).dating == read("66.04 Ma", S).dating
    assert read("10.000 BP", comma).dating == read("10,000 BP", S).dating
    assert read("66,04 ± 0,05 Ma", comma).dating == read("66.04 ± 0.05 Ma", S).dating
    assert read_row("66,04", unit="Ma", plus_minus="0,05", settings=comma).dating == read("66.04 ± 0.05 Ma", S).dating
    assert read("1.985", comma).dating == read("1985").dating


@pytest.mark.parametrize(
    ("given", "text", "bounds"),
    [
        ({"circa": 10.0}, "c. 1853", (1843.5, 1863.5)),
        ({"circa": 5.0}, "ca. 1610", (1605.5, 1615.5)),
        ({"circa": 10}, "c. 1850s", (1840, 1870)),
        ({"digits": "all"}, "500 BCE", (-499, -498)),
        ({"digits": 1}, "500 BCE", (-548.5, -448.5)),
        ({"digits": "all"}, "c. 1850", (1845.5, 1855.5)),
        ({"digits": 3}, "12000 BP", (-10100, -10000)),
        ({"hundreds": "century"}, "1500s", (1500, 1600)),
        ({"hundreds": "decade"}, "1500s", (1500, 1510)),
        ({"hundreds": "century"}, "1500s BCE", (-1598, -1498)),
        ({"parts": "halves"}, "early 19th century", (1801, 1851)),
        ({"parts": "halves"}, "mid 19th century", (1826, 1876)),
        ({"backwards": "swap"}, "400–450 BCE", (-449, -398)),
        ({"backwards": "swap"}, "9–12 BP", (1938, 1941)),
        ({"backwards": "swap"}, "2008/1964", (1964, 2009)),
        ({"reach": 100.0}, "before 1850", (1750, 1850)),
        ({"reach": 100.0}, "after 1850", (1851, 1951)),
        ({"earliest_limit": 1000.0}, "before 1850", (1000, 1850)),
        ({"earliest_limit": 1000}, "until 1850", (1000, 1851)),
        ({"latest_limit": 1900.0}, "after 1850", (1851, 1900)),
        ({"latest_limit": 1900.0}, "1850/..", (1850, 1900)),
        ({"earliest_limit": -1e9}, "> 40 ka BP", (-1e9, -38050)),
        ({"radiocarbon": "cal"}, "4500 14C BP", (-2600, -2500)),
        ({"radiocarbon": "cal"}, "4503 rcybp", (-2553.5, -2552.5)),
        ({"seasons": "south"}, "summer 1848", None),
        ({"day_order": "dmy"}, "03/04/1848", None),
        ({"day_order": "mdy"}, "03/04/1848", None),
    ],
)
def test_settings_change_the_bounds(given: dict[str, Any], text: str, bounds: tuple[float, float] | None) -> None:
    reading = read(text, Settings(**given))
    same = {"summer 1848": "2001-30", "03/04/1848": "3 April 1848" if given.get("day_order") == "dmy" else "March 4, 1848"}
    if bounds is None:
        other = read(same[text]).dating
        assert reading.dating.half_width == pytest.approx(other.half_width, rel=0.02)
        assert bounds is not None or text == "summer 1848" or reading.dating == other
    else:
        assert (reading.dating.earliest, reading.dating.latest) == pytest.approx(bounds, rel=1e-15)


def test_defaults_are_named_unless_they_were_given() -> None:
    assert read("c. 1850").defaults == ("circa", "digits")
    assert read("c. 1850", Settings(given=frozenset({"circa", "digits"}))).defaults == ()
    assert read("66.0 ± 0.05 Ma").defaults == ("sigma",)
    assert read("66.0 ± 0.05 Ma (1σ)").defaults == ()
    assert read("12,000 BP").defaults == ("digits",)
    assert read("11653 BP").defaults == ()
    assert read("early 19th century").defaults == ("parts",)
    assert read("15 March 44 BCE").defaults == ("calendar",)
    assert read("1066-10-14").defaults == ("calendar",)
    assert read("1961-04-12").defaults == ()
    assert read("spring 1848").defaults == ("seasons",)
    assert read("450–400 BCE").defaults == ()


def test_limits_that_contradict_a_date() -> None:
    with pytest.raises(DateRefused, match="check the limits"):
        read("before 1850", Settings(earliest_limit=1900.0))
    with pytest.raises(DateRefused, match="check the limits and the compile year"):
        read("after 2024", Settings(compiled=2024))
