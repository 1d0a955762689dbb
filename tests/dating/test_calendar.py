# SPDX-License-Identifier: Apache-2.0
"""Calendar facts: leap years, day numbers, the Julian calendar, decimal years, eras, reference years, centuries."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from chronos_acc.dating import Settings, decimal_year, read, to_era
from chronos_acc.dating.calendar import day_bounds, exists, from_julian_day, is_leap, julian_day, month_bounds
from chronos_acc.errors import DateRefused


@pytest.mark.parametrize(
    ("year", "leap"),
    [(1900, False), (2000, True), (1600, True), (1700, False), (0, True), (-4, True), (-3, False), (-100, False), (-400, True)],
)
def test_leap_years(year: int, leap: bool) -> None:
    """ISO 8601-1, proleptic Gregorian; 0000-02-29 and -0004-02-29 exist."""
    assert is_leap(year) is leap
    assert exists(year, 2, 29) is leap


# Meeus, Astronomical Algorithms; Explanatory Supplement (from memory)
@pytest.mark.parametrize(
    ("number", "gregorian", "julian"),
    [
        (2451545, (2000, 1, 1), None),
        (2299161, (1582, 10, 15), None),
        (2299160, (1582, 10, 14), (1582, 10, 4)),
        (0, (-4713, 11, 24), (-4712, 1, 1)),
        (2440588, (1970, 1, 1), None),
    ],
)
def test_julian_day_numbers(number: int, gregorian: tuple[int, int, int], julian: tuple[int, int, int] | None) -> None:
    assert julian_day(*gregorian) == number
    assert from_julian_day(number) == gregorian
    if julian:
        assert julian_day(*julian, calendar="julian") == number


@pytest.mark.parametrize(
    ("year", "days"), [(1582, 10), (1699, 10), (1752, 11), (1850, 12), (1918, 13), (2026, 13), (250, 0), (1, -2), (-43, -2)]
)
def test_the_two_calendars_part_by(year: int, days: int) -> None:
    """Meeus; Explanatory Supplement (from memory); on 1 June."""
    assert julian_day(year, 6, 1, "julian") - julian_day(year, 6, 1) == days


@pytest.mark.parametrize(
    ("text", "gregorian"),
    [
        ("-0043-03-15", (-43, 3, 13)),
        ("1917-10-25", (1917, 11, 7)),
        ("1752-09-03", (1752, 9, 14)),
        ("15 March 44 BCE", (-43, 3, 13)),
        ("October 25, 1917", (1917, 11, 7)),
        ("1700-02-29", (1700, 3, 11)),
    ],
)
def test_a_list_in_the_julian_calendar(text: str, gregorian: tuple[int, int, int]) -> None:
    dating = read(text, Settings(calendar="julian")).dating
    assert (dating.earliest, dating.latest) == day_bounds(*gregorian)


def test_years_by_themselves_are_not_moved() -> None:
    assert read("1066", Settings(calendar="julian")) == read("1066")
    assert read("25 October 1917 (Old Style)").dating.earliest == day_bounds(1917, 11, 7)[0]
    assert read("7 November 1917 N.S.", Settings(calendar="julian")).dating.earliest == day_bounds(1917, 11, 7)[0]
    with pytest.raises(DateRefused, match="no day of the calendar"):
        read("1700-02-29")


def test_decimal_years() -> None:
    """year + (day of year - 1) / days in the year; the last figure stands in the data of a published set of dated events."""
    assert decimal_year(1851, 3, 15) == 1851.2
    assert decimal_year(1962, 3, 22) == pytest.approx(1962.2191781, abs=5e-8)
    assert decimal_year(2000, 7, 1) == pytest.approx(2000.4972678, abs=5e-8)
    assert read("2001-07-02").dating.best == pytest.approx(2001.5, abs=1e-12)
    assert decimal_year(1945, 7, 16) == pytest.approx(1945.536986, abs=5e-7)


def test_the_end_of_a_day_is_the_start_of_the_next() -> None:
    assert day_bounds(1999, 12, 31)[1] == 2000.0
    assert month_bounds(1999, 12) == (decimal_year(1999, 12, 1), 2000.0)
    assert day_bounds(2000, 2, 28)[1] == day_bounds(2000, 2, 29)[0]


@pytest.mark.parametrize(("bce", "year"), [(1, 0), (44, -43), (753, -752), (9999, -9998)])
def test_bce_to_astronomical(bce: int, year: int) -> None:
    """ISO 8601: year 0 is 1 BCE."""
    assert read(f"{bce} BCE").dating.earliest == year
    assert to_era(year) == to_era(year + 0.99) == f"{bce} BCE"


def test_eras() -> None:
    assert to_era(1.0) == "1 CE"
    assert to_era(0.5) == "1 BCE"
    assert to_era(-43.2) == "45 BCE"
    assert read("-0044").dating == read("45 BCE").dating
    assert read("-0099").dating.best == read("100 BCE").dating.best
    assert read("100 CE").dating.best - read("100 BCE").dating.best == 199.0
    assert read("10000 BCE").dating.best == -9998.5


@pytest.mark.parametrize(
    ("text", "best"), [("0 BP", 1950), ("1949 BP", 1), ("1950 BP", 0), ("11650 BP", -9700), ("11700 b2k", -9700), ("11650 cal BP", -9700)]
)
def test_reference_years(text: str, best: float) -> None:
    """BP: Stuiver & Polach 1977, Radiocarbon 19:355-363. b2k: Rasmussen et al. 2006; Walker et al. 2009 (base of the Holocene, from memory)."""
    assert read(text).dating.best == best


# the nth century runs from 100(n - 1) + 1 to 100n, as there is no year 0 in the eras (convention)
@pytest.mark.parametrize(
    ("text", "first", "last"),
    [
        ("1st century", 1, 100),
        ("19th century", 1801, 1900),
        ("20th century", 1901, 2000),
        ("21st century CE", 2001, 2100),
        ("18XX", 1800, 1899),
        ("1st century BCE", -99, 0),
        ("5th century BCE", -499, -400),
        ("1st millennium", 1, 1000),
        ("2nd millennium", 1001, 2000),
        ("3rd millennium CE", 2001, 3000),
        ("1st millennium BCE", -999, 0),
        ("3rd millennium BCE", -2999, -2000),
        ("4th millennium BC", -3999, -3000),
        ("10th millennium BCE", -9999, -9000),
        ("early 19th century", 1801, 1833),
        ("mid-19th century", 1834, 1867),
        ("late 19th century", 1868, 1900),  # by thirds, one convention among several
    ],
)
def test_centuries_and_millennia(text: str, first: int, last: int) -> None:
    dating = read(text).dating
    assert (dating.earliest, dating.latest) == (first, last + 1)


def test_annus() -> None:
    """1 ka, Ma and Ga are 10^3, 10^6 and 10^9 a: Holden et al. 2011, Pure Appl. Chem. 83:1159-1162 (from memory)."""
    for unit, years in (("ka", 1e3), ("Ma", 1e6), ("Ga", 1e9)):
        assert read(f"4.5 {unit}", Settings(compiled=2000)).dating.best == 2000 - 4.5 * years


def test_a_boundary_with_its_error() -> None:
    """66.0 ± 0.05 Ma: one unit as stated is 65.95 to 66.05 Ma; at one sigma the 95 % bounds are ± 0.098 Ma."""
    dating = read("66.0 ± 0.05 Ma", Settings(compiled=2000)).dating
    assert dating.shape == "normal"
    assert 2000 - dating.earliest == pytest.approx(66.098e6, abs=100)
    assert 2000 - dating.latest == pytest.approx(65.902e6, abs=100)
    assert dating.best == 2000 - 66e6
    two = read("66.0 ± 0.05 Ma", Settings(compiled=2000, sigma=2.0)).dating
    assert two.best - two.earliest == pytest.approx(1.959963984540054 * 25_000, rel=1e-9)


# with their errors, from the 2013 edition of the chronostratigraphic chart (Cohen et al. 2013, Episodes 36:199-204)
@pytest.mark.parametrize(
    ("age", "error"),
    [
        ("298.9", "0.15"),
        ("358.9", "0.4"),
        ("419.2", "3.2"),
        ("443.4", "1.5"),
        ("485.4", "1.9"),
        ("541.0", "1.0"),
        ("252.17", "0.06"),
        ("201.3", "0.2"),
        ("445.2", "1.4"),
        ("72.1", "0.2"),
    ],
)
def test_boundaries_of_the_2013_chart(age: str, error: str) -> None:
    dating = read(f"{age} ± {error} Ma", Settings(compiled=2013)).dating
    assert 2013 - dating.best == pytest.approx(float(age) * 1e6, rel=1e-12)
    assert dating.half_width == pytest.approx(float(error) * 1e6 * 1.959963984540054, rel=1e-9)


@settings(max_examples=500, deadline=None)
@given(st.integers(-3_000_000, 4_000_000))
def test_day_numbers_turn_back(number: int) -> None:
    year, month, day = from_julian_day(number)
    assert exists(year, month, day)
    assert julian_day(year, month, day) == number
    assert day_bounds(year, month, day)[1] == pytest.approx(decimal_year(*from_julian_day(number + 1)), abs=1e-12)
