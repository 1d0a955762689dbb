# SPDX-License-Identifier: Apache-2.0
"""Decades: 1850s, the 1850's, 1850s BCE; a round hundred (1500s) by the list's rule."""

from __future__ import annotations

import re

from ...errors import DateRefused
from ..settings import Settings
from ..span import Span, flat
from ..units import find_unit
from .notation import Notation, Part

_DECADE = re.compile(r"(?:the )?([0-9]{1,6}0)'?(?-i:s)(?: ?(bce?|ce|ad|b\.c\.e?\.?|c\.e\.|a\.d\.))?\Z", re.IGNORECASE)


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """The ten years that share all digits but the last; a hundred needs the setting ``hundreds``."""
    found = _DECADE.match(text)
    if found is None:
        return None
    number, era = int(found[1]), find_unit(found[2]) if found[2] else None
    before = era is not None and era.zero == "bce"
    name = f"{number}s BCE" if before else f"{number}s"
    if number < 100:
        raise DateRefused("names no century; write the decade in full, such as 1980s")
    length, uses = 10, ()
    if number % 100 == 0:
        if settings.hundreds is None:
            (a, b), (c, d) = _years(number, 100, before), _years(number, 10, before)
            raise DateRefused(
                f"is ambiguous: the century {a}–{b} or the decade {c}–{d}; set hundreds in the list's sheet, or write the years out"
            )
        length = 100 if settings.hundreds == "century" else 10
    low = float(1 - (number + length - 1)) if before else float(number)
    first, last = _years(number, length, before)
    return flat(
        "decade" if length == 10 else "century",
        low,
        low + length,
        f"the {'decade' if length == 10 else 'century'} {name}, {first} to {last}",
        uses,
    )


def _years(number: int, length: int, before: bool) -> tuple[str, str]:
    return (f"{number + length - 1} BCE", f"{number} BCE") if before else (str(number), str(number + length - 1))


NOTATION = Notation("decade", "1850s", "a decade, or a century written as 1500s", read, marks=frozenset("s"))
