# SPDX-License-Identifier: Apache-2.0
"""A calendar year by itself: 1985, −500 (astronomical, as in ISO 8601), 1969.55, 12 000, −1.38×10^10."""

from __future__ import annotations

import re

from ...errors import DateRefused
from ..number import Number, split_number
from ..settings import Settings
from ..span import FARTHEST, Span
from .notation import Notation, Part

_BASIC_DAY = re.compile(r"[0-9]{4}(0[1-9]|1[0-2])(0[1-9]|[12][0-9]|3[01])\Z")
_MONTH_YEAR = re.compile(r"(?:0?[1-9]|1[0-2])[.,][0-9]{4}\Z")
_LEAST = 5e-324  # a last digit too small for float64 is still a digit


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """A number and nothing else; the list's unit, if it has one, was put behind it before."""
    found = split_number(text, settings.decimal)
    if found is None or found[1]:
        return None
    number = found[0]
    if number.sign == "-" and not number.digits.strip("0."):
        raise DateRefused("has a zero with a minus sign; year 0 (1 BCE) is written 0 or 0000")
    if _BASIC_DAY.match(text):
        raise DateRefused(
            f"is year {text} or the day {text[:4]}-{text[4:6]}-{text[6:]}; write the day with hyphens, or the year with separators"
        )
    if _MONTH_YEAR.match(text):
        raise DateRefused(
            f"is ambiguous: the decimal year {number.digits}, or a month and year; write the month by name, or the year with other decimals"
        )
    return calendar_year(number, settings)


def calendar_year(number: Number, settings: Settings) -> Span:
    """A whole year covers [Y, Y + 1); one with decimals or a power of ten is known to half a unit of its last digit."""
    value = number.value()
    if not -FARTHEST <= value <= FARTHEST:
        raise DateRefused(f"lies beyond {FARTHEST:.0e} years, where single years cannot be told apart; give a nearer date")
    if number.whole:
        last = float(10 ** number.significant(settings.digits))  # only circa asks: in a plain year zeros are digits
        return Span("year", value, value + 0.5, value + 1.0, f"calendar year {value:.0f}", value, value + 1.0, last=last)
    last, half = float(f"1e{number.last}") or _LEAST, float(f"5e{number.last - 1}")
    words = f"decimal year {value:.15g}, to half a unit of its last digit (± {half:.6g})"
    return Span("year", value - half, value, value + half, words, value, value, last=last)


NOTATION = Notation("year", "1985", "a calendar year, signed (astronomical) or decimal", read)
