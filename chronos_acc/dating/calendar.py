# SPDX-License-Identifier: Apache-2.0
"""Days to decimal years and back to eras. Proleptic Gregorian and astronomical throughout: 1 BCE is year 0, year Y covers [Y, Y + 1)."""

from __future__ import annotations

import math
from typing import Literal

Calendar = Literal["gregorian", "julian"]

_BEFORE = (0, 0, 31, 59, 90, 120, 151, 181, 212, 243, 273, 304, 334, 365)  # days of a common year before month m


def is_leap(year: int, calendar: Calendar = "gregorian") -> bool:
    """Whether a year has 366 days: every fourth, and in the Gregorian calendar not the hundreds unless divisible by 400."""
    return year % 4 == 0 and (calendar == "julian" or year % 100 != 0 or year % 400 == 0)


def days_in_month(year: int, month: int, calendar: Calendar = "gregorian") -> int:
    """The number of days in a month."""
    return 29 if month == 2 and is_leap(year, calendar) else _BEFORE[month + 1] - _BEFORE[month]


def day_of_year(year: int, month: int, day: int, calendar: Calendar = "gregorian") -> int:
    """1 for 1 January; the day is taken to exist."""
    return _BEFORE[month] + day + (1 if month > 2 and is_leap(year, calendar) else 0)


def exists(year: int, month: int, day: int, calendar: Calendar = "gregorian") -> bool:
    """Whether the calendar has such a day."""
    return 1 <= month <= 12 and 1 <= day <= days_in_month(year, month, calendar)


def julian_day(year: int, month: int, day: int, calendar: Calendar = "gregorian") -> int:
    """The Julian day number at noon of a day. Whole-number form of the rule in Meeus, Astronomical Algorithms, chapter 7."""
    y, m = (year, month) if month > 2 else (year - 1, month + 12)
    correction = 2 - y // 100 + y // 400 if calendar == "gregorian" else 0
    return (1461 * (y + 4716)) // 4 + (306001 * (m + 1)) // 10000 + day + correction - 1524


def from_julian_day(number: int) -> tuple[int, int, int]:
    """The proleptic Gregorian (year, month, day) of a Julian day number; any size, either sign."""
    days = number - 1721120  # days since 1 March of year 0
    era, within = divmod(days, 146097)
    year_of_era = (within - within // 1460 + within // 36524 - within // 146096) // 365
    day = within - (365 * year_of_era + year_of_era // 4 - year_of_era // 100)
    month = (5 * day + 2) // 153
    year = 400 * era + year_of_era + (1 if month >= 10 else 0)
    return year, month + 3 if month < 10 else month - 9, day - (153 * month + 2) // 5 + 1


def decimal_year(year: int, month: int = 1, day: int = 1, calendar: Calendar = "gregorian") -> float:
    """The start of a day as a decimal year: year + (day of year − 1) / days in the year."""
    if calendar == "julian":
        year, month, day = from_julian_day(julian_day(year, month, day, "julian"))
    return year + (day_of_year(year, month, day) - 1) / (366 if is_leap(year) else 365)


def day_bounds(year: int, month: int, day: int, calendar: Calendar = "gregorian") -> tuple[float, float]:
    """Start and end of a day, in decimal years."""
    if calendar == "julian":
        year, month, day = from_julian_day(julian_day(year, month, day, "julian"))
    number, days = day_of_year(year, month, day), 366 if is_leap(year) else 365
    return year + (number - 1) / days, year + number / days


def month_bounds(year: int, month: int, calendar: Calendar = "gregorian") -> tuple[float, float]:
    """Start and end of a month, in decimal years."""
    start = decimal_year(year, month, 1, calendar)
    return start, decimal_year(year, month + 1, 1, calendar) if month < 12 else decimal_year(year + 1, 1, 1, calendar)


def to_era(year: float) -> str:
    """The era's name of a decimal year: floor first, then 1 − y, so 0.5 is 1 BCE and −43.2 is 45 BCE."""
    whole = math.floor(year)
    return f"{whole} CE" if whole > 0 else f"{1 - whole} BCE"
