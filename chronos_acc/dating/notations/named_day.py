# SPDX-License-Identifier: Apache-2.0
"""Days, months, seasons and quarters by name: 12 April 1961, April 12th, 1961, Apr. 1961, 15 March 44 BCE, spring of 1848, Q3 1969."""

from __future__ import annotations

import re
from typing import Literal

from ...errors import DateRefused
from ..calendar import Calendar, day_bounds, exists, julian_day, month_bounds
from ..edtf import season_bounds
from ..settings import Settings
from ..span import Span, flat
from ..units import find_unit
from .notation import Notation, Part

_FULL = ("january", "february", "march", "april", "may", "june", "july", "august", "september", "october", "november", "december")
MONTHS = {**{name: place + 1 for place, name in enumerate(_FULL)}, **{name[:3]: place + 1 for place, name in enumerate(_FULL)}, "sept": 9}
SEASONS = {"spring": 21, "summer": 22, "autumn": 23, "fall": 23, "winter": 24}
_WEEKDAYS = ("monday", "tuesday", "wednesday", "thursday", "friday", "saturday", "sunday")
_NAME = r"(?P<month>" + "|".join(sorted(MONTHS, key=len, reverse=True)) + r")\b\.?"
_DAY = r"(?P<day>[0-9]{1,2})(?:st|nd|rd|th)?"
_YEAR = r"(?:(?P<before>a\.?d\.?|c\.?e\.?) )?(?P<year>-?[0-9]{1,7})(?: ?(?P<era>ce|ad|bce|bc|c\.e\.|a\.d\.|b\.c\.e\.|b\.c\.))?"
_STYLE = r"(?:,? ?\(?(?P<style>o\. ?s\.|os|old style|julian(?: calendar)?|n\. ?s\.|ns|new style|gregorian(?: calendar)?)\)?)?"
_WEEKDAY = r"(?:(?P<weekday>" + "|".join(_WEEKDAYS) + r"|mon|tues?|wed|thu(?:rs)?|fri|sat|sun)\b\.?,? )?"
_FORMS = tuple(
    re.compile(form + _STYLE + r"\Z", re.IGNORECASE)
    for form in (
        rf"{_WEEKDAY}(?:the )?{_DAY}[ -]?(?:day )?(?:of )?{_NAME},?[ -]?(?:in )?{_YEAR}",
        rf"{_WEEKDAY}{_NAME} ?(?:the )?{_DAY}(?:, ?| ){_YEAR}",
        rf"{_YEAR},?[ -]{_NAME}[ -]?{_DAY}",
        rf"{_NAME},?[ -]?(?:of )?{_YEAR}",
        rf"{_YEAR},?[ -]{_NAME}",
    )
)
_SEASON = re.compile(rf"(?:the )?(?P<season>{'|'.join(SEASONS)}),?(?: of)?(?: the year)? {_YEAR}\Z", re.IGNORECASE)
_QUARTER = re.compile(r"q(?P<number>[1-4])[ /-]?(?P<year>[0-9]{4})\Z|(?P<first>[0-9]{4})[ -]?q(?P<last>[1-4])\Z", re.IGNORECASE)
_HAS_NAME = re.compile(rf"(?:\b|(?<=[0-9]))q[1-4]|\b(?:{'|'.join(sorted([*MONTHS, *SEASONS], key=len, reverse=True))})", re.IGNORECASE)
_GREGORIAN_STARTS = 1582 + 287 / 365


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """A month or season by its name, with a year and perhaps a day."""
    if not _HAS_NAME.search(text):
        return None
    season = _season(text, settings)
    if season is not None:
        return season
    for form in _FORMS:
        found = form.match(text)
        if found:
            return _dated(found, settings)
    return None


def _season(text: str, settings: Settings) -> Span | None:
    quarter = _QUARTER.match(text)
    if quarter:
        year, number = int(quarter["year"] or quarter["first"]), int(quarter["number"] or quarter["last"])
        return flat("season", *season_bounds(year, 32 + number, "north", settings.calendar), f"quarter {number} of {year}")
    season = _SEASON.match(text)
    if season is None:
        return None
    year, name = _year(season), season["season"].lower()
    low, high = season_bounds(year, SEASONS[name], settings.seasons, settings.calendar)
    return flat("season", low, high, f"{name} of {year} in the {settings.seasons}", ("seasons",))


def _year(found: re.Match[str]) -> int:
    """The astronomical year of a match."""
    year = int(found["year"])
    era = find_unit(found["era"] or found["before"] or "") if found["era"] or found["before"] else None
    if era is None:
        if len(found["year"]) <= 2:
            raise DateRefused(
                f"has no certain year: {found['year']} may be a day or a year without its century; write the year in full, or with its era"
            )
        return year
    if year <= 0 or found["year"].startswith("-") or (found["era"] and found["before"]):
        raise DateRefused(f"gives a year {found['year']} with an era; eras count from 1 up, without a sign")
    return 1 - year if era.zero == "bce" else year


def _dated(found: re.Match[str], settings: Settings) -> Span:
    year, month = _year(found), MONTHS[found["month"].lower()]
    style = (found["style"] or "").lower()
    calendar: Calendar = settings.calendar if not style else "julian" if style[0] in "oj" else "gregorian"
    if "day" not in found.groupdict():
        low, high = month_bounds(year, month, calendar)
        return flat("month", low, high, f"{_FULL[month - 1].capitalize()} {year}" + _in(calendar), _uses(high, style))
    return day_span(year, month, int(found["day"]), calendar, _uses(year, style), found.groupdict().get("weekday"))


def _in(calendar: Calendar) -> str:
    return " of the Julian calendar" if calendar == "julian" else ""


def _uses(year: float, style: str) -> tuple[str, ...]:
    return ("calendar",) if year < _GREGORIAN_STARTS and not style else ()


def day_span(
    year: int, month: int, day: int, calendar: Literal["gregorian", "julian"], uses: tuple[str, ...] = (), weekday: str | None = None
) -> Span:
    """The span of a day that must exist in the calendar, and fall on its weekday if one is named."""
    name = f"{day} {_FULL[month - 1].capitalize()} {year}" if 1 <= month <= 12 else f"day {day} of month {month}"
    if not exists(year, month, day, calendar):
        raise DateRefused(f"is no day of the {calendar.capitalize()} calendar: there is no {name}; check day, month and year")
    if weekday:
        really = _WEEKDAYS[julian_day(year, month, day, calendar) % 7]
        if not really.startswith(weekday[:3].lower()):
            raise DateRefused(
                f"names a weekday that does not fit: {name}{_in(calendar)} was a {really.capitalize()}; "
                "check the date or leave the weekday out"
            )
    return flat("day", *day_bounds(year, month, day, calendar), f"the day {name}{_in(calendar)}", uses)


NOTATION = Notation("named day", "12 April 1961", "a day, month or season by name", read, marks=frozenset("aeiouAEIOUqQ"))
