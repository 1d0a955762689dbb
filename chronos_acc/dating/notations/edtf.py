# SPDX-License-Identifier: Apache-2.0
"""ISO 8601-2:2019 (EDTF), levels 0 to 2: 1985-04-12, 1964/2008, 19XX, 1984~, Y-17E7, [1667,1668], 2001-21."""

from __future__ import annotations

import re

from ...errors import DateRefused
from ..edtf import edtf
from ..number import Number
from ..settings import Settings
from ..span import Span, flat
from .notation import Notation, Part

_HYPHENS = re.compile(r"(-?[0-9]{4})-([0-9]{2})(?:-([0-9]{2}))?\Z")
_YEAR = re.compile(r"-?([0-9]{4})[?~%]?\Z")
_BACKWARDS = re.compile(r"-?[0-9]{4}[-0-9]*/-?[0-9]{4}[-0-9]*\Z")
_JULIAN_ENDS = 1582 + 287 / 365  # 15 October 1582, the first day of the Gregorian calendar


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """The reader's bounds; a text of hyphens that is no day or month is refused here, since no other notation may take it."""
    found = edtf(text, settings.calendar, settings.seasons)
    if found is None:
        shaped = _HYPHENS.match(text)
        if shaped:
            raise DateRefused(_why(shaped))
        if _BACKWARDS.match(text) and all(edtf(end, settings.calendar) for end in text.split("/")):
            if settings.backwards == "swap":
                return read("/".join(reversed(text.split("/"))), settings, part)
            raise DateRefused("runs backwards: its second end is the earlier one; write the earlier end first")
        return None
    uses: tuple[str, ...] = ("seasons",) if found.seasons else ()
    if found.kind in ("day", "month") and found.earliest < _JULIAN_ENDS:
        uses += ("calendar",)
    span = flat(found.kind, found.earliest, found.latest, found.words, uses)
    whole = _YEAR.match(text)  # a year by itself is a number, for circa and plus-minus
    return span._replace(last=float(10 ** Number("", whole[1], 0, 0).significant(settings.digits))) if whole else span


def _why(shaped: re.Match[str]) -> str:
    if shaped[1] == "-0000":
        return "has a year 0 with a minus sign; year 0 (1 BCE) is written 0000"
    if shaped[3] is None:
        return (
            f"has no month {shaped[2]}: after a year of four digits and a hyphen two digits are a month (01-12) or season (21-41); "
            'a range of years needs a dash or "to"'
        )
    return "is no day of the calendar; check the month and the day"


NOTATION = Notation("edtf", "1985-04-12", "ISO 8601-2:2019 (EDTF), levels 0 to 2", read, marks=frozenset("-/X[{?~%YS"))
