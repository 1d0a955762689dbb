# SPDX-License-Identifier: Apache-2.0
"""Years of an era: 44 BCE, 753 B.C., AD 79, 1054 CE, 10,000 BCE, 2.5 million BCE."""

from __future__ import annotations

import re

from ...errors import DateRefused
from ..number import Number, split_number
from ..settings import Settings
from ..span import Span
from ..units import Unit, find_unit
from .notation import Notation, Part

_BEFORE = re.compile(r"(?:cal\.? )?(a\.?\s?d\.?|c\.?e\.?|b\.?\s?c\.?(?:\s?e\.?)?)\s?(?=[0-9+-])", re.IGNORECASE)


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """A number with BCE, BC, CE or AD on either side."""
    prefix = _BEFORE.match(text) if text[0] in "aAbBcC" else None
    found = split_number(text[prefix.end() :] if prefix else text, settings.decimal)
    if found is None or (prefix is None) == (not found[1]):
        return None
    unit = find_unit(prefix[1] if prefix else found[1])
    return era_year(found[0], unit, settings) if unit is not None and not unit.back else None


def era_year(number: Number, unit: Unit, settings: Settings) -> Span:
    """Year n BCE is 1 − n; its trailing zeros are rounding, and those of a CE year are digits."""
    if number.sign:
        raise DateRefused(f"gives the era twice: a sign and {unit.name}; write one of them")
    value = number.value(unit.power)
    if not value.is_integer():
        raise DateRefused(f"gives a part of a year with {unit.name}, which counts whole years; use a decimal year without an era")
    if value == 0:
        raise DateRefused(f"names a year 0 {unit.name}, which no era has: 1 BCE is followed by 1 CE; write year 0 without an era for 1 BCE")
    places = max(0, unit.power + number.significant(settings.digits))
    last = float(10**places)
    if unit.zero == "ce":
        half = 0.5 if number.whole and not unit.power else max(last / 2, 0.5)
        return Span("year", value + 0.5 - half, value + 0.5, value + 0.5 + half, f"year {value:.0f} CE", value, value + 1.0, last=last)
    start, half = 1.0 - value, last / 2
    words = f"year {value:.0f} BCE, astronomical {start:.0f}"
    if places:
        words += f", its trailing zeros taken as rounding (± {half:g} years)"
    rounded = ("digits",) if number.whole and number.digits.endswith("0") else ()
    return Span("year", start + 0.5 - half, start + 0.5, start + 0.5 + half, words, start, start + 1.0, last=last, uses=rounded)


NOTATION = Notation("era", "44 BCE", "a year with BCE, BC, CE or AD before or after it", read, marks=frozenset("cCdD"))
