# SPDX-License-Identifier: Apache-2.0
"""Ages counted back from the compile year: 66.0 Ma, 12 ka, 3.2 Gyr, 500 years ago, 2.1×10^9 years ago."""

from __future__ import annotations

import re

from ...errors import DateRefused
from ..number import Number, split_number
from ..settings import Settings
from ..span import Span
from ..units import ASSUMED_YEAR, B2K_YEAR, BP_YEAR, Unit, find_unit
from .notation import Notation, Part

_LETTERED = re.compile(r"1[0-9]{3}a\Z|20[0-9]{2}a\Z")


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """A number with a unit that counts back from now."""
    found = split_number(text, settings.decimal)
    if found is None or not found[1]:
        return None
    unit = find_unit(found[1])
    if _LETTERED.match(text):
        raise DateRefused(
            f"is ambiguous: {text[:4]} years ago, or the year {text[:4]} with a letter as in a list of references; "
            f'write "{text[:4]} a" or the year alone'
        )
    return age(found[0], unit, settings) if unit is not None and unit.zero == "compiled" else None


def age(number: Number, unit: Unit, settings: Settings) -> Span:
    """A number of years back: known to half a unit of its last significant digit, trailing zeros being rounding."""
    if number.sign == "-":
        raise DateRefused(f"counts back twice: a minus sign and {unit.name}; write one of them")
    assumed = False
    if unit.zero == "1950":
        zero, since = BP_YEAR, "1950"
    elif unit.zero == "2000":
        zero, since = B2K_YEAR, "2000"
    elif settings.compiled is not None:
        zero, since = float(settings.compiled), f"{settings.compiled}, the year the list was compiled"
    else:
        zero, since, assumed = ASSUMED_YEAR, f"{ASSUMED_YEAR:.0f}, as the compile year is not given", True
    last = number.significant(settings.digits) + unit.power
    half, best, scale = float(f"5e{last - 1}"), zero - number.value(unit.power), float(f"1e{unit.power}")
    words = f"{number.digits}{f'e{number.power}' if number.power else ''} {unit.name}, ± {half / scale:.6g}, counted back from {since}"
    return Span(
        "age",
        best - half,
        best,
        best + half,
        words,
        best,
        best,
        "uniform",
        float(f"1e{last}"),
        scale,
        True,
        assumed,
        ("digits",) if number.whole and number.digits[-1] == "0" else (),
    )


NOTATION = Notation(
    "ago", "66.0 Ma", "an age in a, ka, Ma, Ga or in words, counted back from the compile year", read, marks=frozenset("aAyY")
)
