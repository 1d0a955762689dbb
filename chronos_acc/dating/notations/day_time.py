# SPDX-License-Identifier: Apache-2.0
"""A day with its time: 1969-07-20 20:17:40, 1969-07-20T20:17Z, 20 July 1969, 20:17 UTC.

A dating is no finer than a day, so the time is checked and left out.
"""

from __future__ import annotations

import re

from ..settings import Settings
from ..span import Span
from .notation import Notation, Part

_TIME = re.compile(
    r"(?P<day>.*[0-9])(?:T|,? )(?:at )?(?:[01]?[0-9]|2[0-3]):[0-5][0-9](?::(?:[0-5][0-9]|60)(?:[.,][0-9]+)?)?"
    r"(?: ?[ap]\.?m\.?)?(?: ?(?:Z|\(?(?:UTC|GMT|UT)\)?|[+-](?:0[0-9]|1[0-4])(?::?[0-5][0-9])?))?\Z",
    re.IGNORECASE,
)


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """The day that the time belongs to, by its own clock."""
    found = _TIME.match(text)
    if found is None:
        return None
    span = part(found["day"], NOTATION.level)
    return None if span is None or span.kind != "day" else span._replace(words=f"{span.words}, without its time")


NOTATION = Notation("day and time", "1969-07-20 20:17", "a day with a time of day, which is left out", read, level=1, marks=frozenset(":"))
