# SPDX-License-Identifier: Apache-2.0
"""A dating as a text that reads back to the same bounds, and a reading in words."""

from __future__ import annotations

import re

from .calendar import day_bounds, from_julian_day, julian_day
from .dating import Dating, Reading
from .settings import DEFAULTS

_LIKE_A_MONTH = re.compile(r"(?:[1-9]|1[0-2])\.[0-9]{4}\Z")  # 4.1985 is refused, as it may be April 1985


def write(dating: Dating) -> str:
    """A text that `read` reads to the same earliest and latest (with default settings and no compile year).

    A calendar year or a day where the dating is one, else the bounds in full: "1840.5 to 1860.5", or "1850.5 (95 %: 1840.5 to 1860.5)"
    when it is normal or has no width.
    """
    low, best, high = dating.earliest, dating.best, dating.latest
    if dating.shape == "uniform" and low < high:
        if low.is_integer() and high == low + 1 and abs(low) < 1e7:
            return f"{low:.0f}"
        day = _day(low, high)
        return day if day else f"{_plain(low)} to {_plain(high)}"
    return f"{_plain(best)} (95 %: {_plain(low)} to {_plain(high)})"


def _plain(year: float) -> str:
    """The shortest digits that give a float64 back, with a point or an exponent, so that it is read as written and not as a whole year."""
    text = repr(year + 0.0)
    return f"{text}0" if _LIKE_A_MONTH.match(text) else text


def _day(low: float, high: float) -> str | None:
    """The ISO day with exactly these bounds, if there is one in the years that ISO writes with four digits."""
    if not -9999 <= low < 9999 or not 0.002 < high - low < 0.003:
        return None
    year = int(low // 1)
    number = julian_day(year, 1, 1) + round((low - year) / (high - low))
    y, m, d = from_julian_day(number)
    if day_bounds(y, m, d) != (low, high):
        return None
    return f"{'-' if y < 0 else ''}{abs(y):04d}-{m:02d}-{d:02d}"


def explain(reading: Reading) -> str:
    """How a text was read, in sentences: the words, the defaults it rests on, the remarks."""
    sentences = [f"{reading.notation}: {reading.words}"]
    if reading.defaults:
        sentences.append("rests on the default " + ", ".join(f"{name} = {_value(DEFAULTS[name])}" for name in reading.defaults))
    return "; ".join([*sentences, *reading.remarks])


def _value(value: object) -> str:
    return f'"{value}"' if isinstance(value, str) else "(none)" if value is None else str(value)
