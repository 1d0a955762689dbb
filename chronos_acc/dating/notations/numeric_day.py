# SPDX-License-Identifier: Apache-2.0
"""Days in numbers with slashes, points or hyphens: 03/04/1848 by the list's day_order, 13.4.1848, 1848/4/3, 04/1848."""

from __future__ import annotations

import re

from ...errors import DateRefused
from ..calendar import exists, month_bounds
from ..settings import Settings
from ..span import Span, flat
from .named_day import day_span
from .notation import Notation, Part

_THREE = re.compile(r"([0-9]{1,4})([/.-]) ?([0-9]{1,2})\2 ?([0-9]{1,4})\Z")
_MONTH = re.compile(r"([0-9]{1,2})/([0-9]{4})\Z")
_SPLIT = re.compile(r"([0-9]{3,4})/([0-9]{1,2})\Z")
_ORDERS = {"dmy": (2, 1, 0), "mdy": (2, 0, 1), "ymd": (0, 1, 2)}


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """Three numbers, or a month and a year; refused when several orders are possible and the list names none."""
    split = _SPLIT.match(text)
    if split:
        _refuse_split(split[1], split[2])
    month = _MONTH.match(text)
    if month:
        if not 1 <= int(month[1]) <= 12:
            raise DateRefused(f"has no month {month[1]}; months are 1 to 12 (or give a range with a dash)")
        return flat("month", *month_bounds(int(month[2]), int(month[1]), settings.calendar), f"month {int(month[1])} of {int(month[2])}")
    found = _THREE.match(text)
    if not found:
        return None
    numbers, long = (found[1], found[3], found[4]), [len(number) > 2 for number in (found[1], found[3], found[4])]
    if found[2] == "-" and (long[0] or not long[2]):
        return None  # a year first with hyphens is ISO 8601's alone
    if not any(long):
        raise DateRefused(
            f"has a year of two digits and no certain order: {_list(_two_digit(numbers))}; write the year in full and the month by name"
        )
    readings = _readings(numbers, long, settings)
    if settings.day_order and settings.day_order in readings:
        readings = {settings.day_order: readings[settings.day_order]}
    elif settings.day_order and not long[0]:
        raise DateRefused(f"is no day in the list's order {settings.day_order}; check the date and day_order")
    if not readings:
        raise DateRefused("is no day of the calendar in any order of day, month and year; check the numbers")
    if len(set(readings.values())) > 1:
        names = [f"{_iso(day)} ({order})" for order, day in readings.items()]
        raise DateRefused(f"is ambiguous: {' or '.join(names)}; set day_order in the list's sheet, or write the month by name")
    year, month_number, day = next(iter(readings.values()))
    return day_span(year, month_number, day, settings.calendar, ("calendar",) if year < 1583 else ())


def _readings(numbers: tuple[str, ...], long: list[bool], settings: Settings) -> dict[str, tuple[int, int, int]]:
    """The orders that give a day of the calendar, with the year where the long number stands."""
    readings: dict[str, tuple[int, int, int]] = {}
    for order, (y, m, d) in _ORDERS.items():
        if long[y] and not long[m] and not long[d]:
            day = int(numbers[y]), int(numbers[m]), int(numbers[d])
            if exists(*day, settings.calendar):
                readings[order] = day
    return readings


def _two_digit(numbers: tuple[str, ...]) -> list[str]:
    return [
        f"day {numbers[d]}, month {numbers[m]}, year ..{numbers[y].zfill(2)} ({order})"
        for order, (y, m, d) in _ORDERS.items()
        if 1 <= int(numbers[m]) <= 12 and 1 <= int(numbers[d]) <= 31
    ]


def _list(readings: list[str]) -> str:
    return "; or ".join(readings) if readings else "no order gives a day"


def _iso(day: tuple[int, int, int]) -> str:
    return f"{day[0]:04d}-{day[1]:02d}-{day[2]:02d}"


def _refuse_split(year: str, tail: str) -> None:
    full = year[: -len(tail)] + tail
    month = f", or month {int(tail)} of {int(year)} ({int(year):04d}-{int(tail):02d})" if 1 <= int(tail) <= 12 else ""
    dual = f", or {int(year)} Old Style, which is {full} New Style" if int(full) == int(year) + 1 else ""
    if not month and not dual:
        raise DateRefused(
            f"has a slash, which joins whole dates in ISO 8601; write the years {int(year)} to {int(full)} as {int(year)}–{full}"
        )
    raise DateRefused(f"is ambiguous: the years {int(year)} to {int(full)} ({int(year)}–{full}){month}{dual}; write one of them out")


NOTATION = Notation("numeric day", "13/04/1848", "a day in numbers, in the list's order", read, marks=frozenset("/.-"))
