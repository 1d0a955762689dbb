# SPDX-License-Identifier: Apache-2.0
"""Reader of ISO 8601-2:2019 dates (EDTF), levels 0 to 2 complete, by the specification of the Library of Congress of 4 February 2019.

Qualifiers (? ~ %) qualify and do not move bounds; `..` is an open end, an empty end of an interval is unknown; both come back as
±inf. Years are astronomical and proleptic Gregorian unless the list says Julian. Times of day and time zones are checked, and the date
is kept to its day.
"""

from __future__ import annotations

import re
from math import inf
from typing import NamedTuple

from .calendar import Calendar, day_bounds, days_in_month, is_leap, month_bounds
from .span import Kind

_MONTH = "(0[1-9]|1[0-2])"
_DAY = re.compile(rf"(-?[0-9]{{4}})-{_MONTH}-([0-9]{{2}})(T.*)?\Z", re.DOTALL)
_MONTH_ONLY = re.compile(rf"(-?[0-9]{{4}})-{_MONTH}\Z")
_YEAR = re.compile(r"-?[0-9]{4}\Z")
_TIME = re.compile(r"T(?:[01][0-9]|2[0-3]):[0-5][0-9]:(?:[0-5][0-9]|60)(?:Z|[+-](?:[01][0-9]|2[0-3])(?::[0-5][0-9])?)?\Z")
_LONG = re.compile(r"Y(-?)([1-9][0-9]*)(?:E([1-9][0-9]?))?(?:S([1-9][0-9]*))?([?~%]?)\Z")
_ROUNDED = re.compile(r"(-?)([0-9]{4})S([1-9][0-9]*)([?~%]?)\Z")
_GENERAL = re.compile(r"([?~%]?)(-?)([0-9X]{4})([?~%]?)(?:-([?~%]?)([0-9X]{2})([?~%]?)(?:-([?~%]?)([0-9X]{2})([?~%]?))?)?\Z")
_SHAPED = re.compile(r"[-0-9XYTZSE:.,/\[\]{}?~%+]+\Z")
# months of each season code; a start after its end runs over the new year. 21-24 have no place and follow the list's hemisphere
_SEASONS = {
    25: (3, 5),
    26: (6, 8),
    27: (9, 11),
    28: (12, 2),
    29: (9, 11),
    30: (12, 2),
    31: (3, 5),
    32: (6, 8),
    33: (1, 3),
    34: (4, 6),
    35: (7, 9),
    36: (10, 12),
    37: (1, 4),
    38: (5, 8),
    39: (9, 12),
    40: (1, 6),
    41: (7, 12),
}
_NAMES = {
    **dict(zip(range(21, 25), ("spring", "summer", "autumn", "winter"), strict=True)),
    **dict(
        zip(
            range(25, 33),
            [f"{season} ({half})" for half in ("north", "south") for season in ("spring", "summer", "autumn", "winter")],
            strict=True,
        )
    ),
    **{32 + quarter: f"quarter {quarter}" for quarter in range(1, 5)},
    **{36 + third: f"third {third}" for third in range(1, 4)},
    40: "first half",
    41: "second half",
}
FARTHEST_YEAR = 10**15


class Found(NamedTuple):
    """Bounds in decimal years (±inf: open or unknown), what they are, and whether seasons or days of the calendar took part."""

    earliest: float
    latest: float
    words: str
    kind: Kind
    seasons: bool = False


def season_bounds(year: int, code: int, hemisphere: str = "north", calendar: Calendar = "gregorian") -> tuple[float, float]:
    """Start and end of a season, quarter, third or half of a year, by its ISO 8601-2 code (21 to 41)."""
    if code <= 24:
        code += 4 if hemisphere == "north" else 8
    first, last = _SEASONS[code]
    return month_bounds(year, first, calendar)[0], month_bounds(year + (last < first), last, calendar)[1]


def edtf(text: str, calendar: Calendar = "gregorian", hemisphere: str = "north") -> Found | None:
    """The bounds of an EDTF text, or None when it is none. A backward interval is none either."""
    if _YEAR.match(text):
        year = int(text)
        return None if text == "-0000" else Found(float(year), year + 1.0, f"year {text}", "year")
    if not _SHAPED.match(text):
        return None
    if "/" in text:
        return _interval(text, calendar, hemisphere)
    if text[0] in "[{":
        return _set(text, calendar, hemisphere)
    return _date(text, calendar, hemisphere)


def _date(text: str, calendar: Calendar, hemisphere: str) -> Found | None:
    exact = _DAY.match(text)
    if exact:
        year, month, day = int(exact[1]), int(exact[2]), int(exact[3])
        if exact[1] == "-0000" or not 1 <= day <= days_in_month(year, month, calendar) or (exact[4] and not _TIME.match(exact[4])):
            return None
        return Found(
            *day_bounds(year, month, day, calendar),
            f"the day {text[: text.find('T')] if exact[4] else text}" + (", without its time" if exact[4] else ""),
            "day",
        )
    whole = _MONTH_ONLY.match(text)
    if whole:
        return None if whole[1] == "-0000" else Found(*month_bounds(int(whole[1]), int(whole[2]), calendar), f"the month {text}", "month")
    if _YEAR.match(text):
        return None if text == "-0000" else Found(float(text), float(text) + 1.0, f"year {text}", "year")
    if text[0] == "Y":
        return _long_year(text)
    rounded = _ROUNDED.match(text)
    if rounded:
        return None if text.startswith("-0000") else _significant(int(rounded[1] + rounded[2]), len(rounded[2]), int(rounded[3]), text)
    parts = _GENERAL.match(text)
    return _general(text, parts, calendar, hemisphere) if parts else None


def _long_year(text: str) -> Found | None:
    """Years beyond four digits, with an exponent and significant digits where they are given."""
    found = _LONG.match(text)
    if not found:
        return None
    size = len(found[2]) + int(found[3] or 0)
    if not 4 < size <= 16:
        return None
    year = int(found[1] + found[2] + "0" * int(found[3] or 0))
    if abs(year) > FARTHEST_YEAR:
        return None
    if found[4]:
        return _significant(year, size, int(found[4]), text)
    return Found(float(year), year + 1.0, f"year {year}", "year")


def _significant(year: int, size: int, digits: int, text: str) -> Found | None:
    """S: the leading digits are kept, the others may be any."""
    if digits > size:
        return None
    step = 10 ** (size - digits)
    low = abs(year) // step * step
    first, last = (low, low + step - 1) if year >= 0 else (-(low + step - 1), -low)
    return Found(float(first), last + 1.0, f"years {first} to {last} ({text}: {digits} significant digits)", "year")


def _general(text: str, found: re.Match[str], calendar: Calendar, hemisphere: str) -> Found | None:
    """Qualifiers at parts of a date, and unspecified digits (X) anywhere."""
    before_year, sign, year, after_year, before_month, month, after_month, before_day, day, after_day = found.groups()
    if (before_year and after_year) or (before_month and after_month) or (before_day and after_day) or (before_year and month is None):
        return None  # one qualifier a part; "~1985" is circa, not EDTF
    years, negative = _choices(year), sign == "-"
    if negative and "X" not in year and int(year) == 0:
        return None
    qualified = any((before_year, after_year, before_month, after_month, before_day, after_day))
    words = ("uncertain or approximate, bounds unmoved: " if qualified else "") + text
    if month is None:
        first, last = years[0], years[1]
        if negative:
            first, last = -last, -max(first, 1)  # there is no year -0
        return Found(float(first), last + 1.0, f"years {first} to {last} ({words})" if first != last else f"year {first} ({words})", "year")
    if month.isdigit() and int(month) in _NAMES:
        if day is not None or "X" in year:
            return None
        number = -int(year) if negative else int(year)
        return Found(
            *season_bounds(number, int(month), hemisphere, calendar),
            f"{_NAMES[int(month)]} of {number} ({words})",
            "season",
            int(month) <= 24,
        )
    months = [number for number in range(1, 13) if _fits(number, month)]
    days = None if day is None else [number for number in range(1, 32) if _fits(number, day)]
    if not months or days == []:
        return None
    step = _step(year)
    numbers = range(years[0], years[1] + 1, step) if "X" in year else range(years[0], years[0] + 1)
    ordered = [-number for number in reversed(numbers)] if negative else list(numbers)
    if days is None:
        fitting = [number for number in ordered if _fits(abs(number), year)]
        return Found(month_bounds(fitting[0], months[0], calendar)[0], month_bounds(fitting[-1], months[-1], calendar)[1], words, "month")
    start = next(
        (
            bound
            for number in ordered
            if _fits(abs(number), year)
            for bound in [_edge(number, months, days, calendar, False)]
            if bound is not None
        ),
        None,
    )
    end = next(
        (
            bound
            for number in reversed(ordered)
            if _fits(abs(number), year)
            for bound in [_edge(number, months, days, calendar, True)]
            if bound is not None
        ),
        None,
    )
    return None if start is None or end is None else Found(start, end, words, "day")


def _choices(pattern: str) -> tuple[int, int]:
    return int(pattern.replace("X", "0")), int(pattern.replace("X", "9"))


def _step(pattern: str) -> int:
    """By how much neighbouring years of a pattern may differ at least: the place of its last X."""
    return 10 ** (len(pattern) - 1 - pattern.rindex("X")) if "X" in pattern else 1


def _fits(number: int, pattern: str) -> bool:
    digits = str(number).zfill(len(pattern))
    return all(mark in ("X", digit) for mark, digit in zip(pattern, digits, strict=True))


def _edge(year: int, months: list[int], days: list[int], calendar: Calendar, last: bool) -> float | None:
    """The first (or last) existing day of a year among months and days, as its start (or end)."""
    longest = 29 if is_leap(year, calendar) else 28
    for month in reversed(months) if last else months:
        length = longest if month == 2 else days_in_month(year, month, calendar)
        for day in reversed(days) if last else days:
            if day <= length:
                return day_bounds(year, month, day, calendar)[1 if last else 0]
    return None


def _interval(text: str, calendar: Calendar, hemisphere: str) -> Found | None:
    ends = text.split("/")
    if len(ends) != 2:
        return None
    left, right = ends
    if left in ("", "..") and right in ("", ".."):
        return None
    start = None if left in ("", "..") else _date(left, calendar, hemisphere)
    end = None if right in ("", "..") else _date(right, calendar, hemisphere)
    if (start is None and left not in ("", "..")) or (end is None and right not in ("", "..")):
        return None
    earliest, latest = start.earliest if start else -inf, end.latest if end else inf
    names = {"": "an unknown end", "..": "an open end"}
    seasons = bool((start and start.seasons) or (end and end.seasons))
    if earliest >= latest:
        return None
    return Found(
        earliest, latest, f"from {start.words if start else names[left]} to {end.words if end else names[right]}", "range", seasons
    )


def _set(text: str, calendar: Calendar, hemisphere: str) -> Found | None:
    one = text[0] == "["
    if text[-1] != ("]" if one else "}"):
        return None
    members = text[1:-1].split(",")
    earliest, latest, seasons = inf, -inf, False
    for place, member in enumerate(members):
        left, dots, right = member.partition("..")
        if dots and ((not left and place > 0) or (not right and place < len(members) - 1) or (not left and not right)):
            return None
        first = _date(left, calendar, hemisphere) if left else None
        final = _date(right, calendar, hemisphere) if right else None
        if (left and first is None) or (right and final is None) or not (left or right):
            return None
        if first and final and first.earliest >= final.latest:
            return None
        if not dots:
            final = first
        earliest = min(earliest, first.earliest if first else -inf)
        latest = max(latest, final.latest if final else inf)
        seasons = seasons or bool((first and first.seasons) or (final and final.seasons))
    words = ("one of " if one else "all of ") + text + ", from the first to the last"
    return Found(earliest, latest, words, "set", seasons)
