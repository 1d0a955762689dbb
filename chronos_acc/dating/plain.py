# SPDX-License-Identifier: Apache-2.0
"""The rule for plain numbers, in one place: what `read` gives for a bare year or a number with a unit, in terms that SQL can repeat.

A *plain* number is digits with an optional sign and an optional point and decimals: no grouping, no power of ten (PLAIN). With no
unit it is a calendar year: whole years of at most seven digits (PLAIN_YEAR; a day in ISO basic form has eight) are [Y, Y + 1) with
best Y + 0.5; decimals d are as written, ± 5·10^(−d−1). With a unit of UNITS that counts back, unsigned, n · 10^power years before its zero:

    p = power − d             with d decimals, else
    p = power + z             where z = trailing zeros, but `digits` leading digits count: z = max(0, min(trailing, length − digits))
    best = zero − CAST(text || 'e' || power AS DOUBLE)        (one conversion, so that 66.04 Ma is exact)
    half = CAST('5e' || (p − 1) AS DOUBLE)
    earliest = best − half, latest = best + half

"length" leaves leading zeros out. The zero is the compile year Y as Y.0, 1950 or 2000. Whatever is not covered (PLAIN does not match,
"-0", an era, radiocarbon, the compile year unknown, latest after the end of the compile year, beyond 1e15 years) is left to `read`:
then `plain` gives None.
"""

from __future__ import annotations

import re

from .settings import Settings
from .span import FARTHEST
from .units import B2K_YEAR, BP_YEAR, Unit, find_unit

PLAIN = r"^[+-]?[0-9]+(\.[0-9]+)?$"
"""A plain number; a regular expression that RE2 reads too."""
PLAIN_YEAR = r"^[+-]?[0-9]{1,7}$"
"""A whole calendar year that needs no second look."""
PLAIN_DECIMAL_YEAR = r"^[+-]?[0-9]{3,12}\.[0-9]{1,9}$"
"""A decimal calendar year that needs no second look (04.1985 may be a month)."""
PLAIN_AGE = r"^[0-9]{1,12}(\.[0-9]{1,9})?$"
"""The number of a plain age."""
NEGATIVE_ZERO = r"^-[0.]+$"
"""A zero with a minus sign, which is refused."""
YEAR_NAME, AGO_NAME, BP_NAME = "year", "ago", "before present"
"""The notations that plain numbers are counted under."""

_YEAR, _DECIMAL, _AGE, _MINUS_ZERO = map(re.compile, (PLAIN_YEAR, PLAIN_DECIMAL_YEAR, PLAIN_AGE, NEGATIVE_ZERO))


def plain_unit(unit: str | None, settings: Settings) -> Unit | None:
    """The unit that a number without its own takes: the row's, else the list's, else years ago if the list counts ago."""
    word = unit or settings.unit or ("a" if settings.counted == "ago" else None)
    return find_unit(word) if word else None


def zero_of(unit: Unit, settings: Settings) -> float | None:
    """The year that a unit counts back from; None for eras, radiocarbon, and an unknown compile year."""
    if unit.zero == "compiled":
        return None if settings.compiled is None else float(settings.compiled)
    return {"1950": BP_YEAR, "2000": B2K_YEAR}.get(unit.zero)


def plain(number: str, unit: str | None, settings: Settings) -> tuple[float, float, float, str] | None:
    """(earliest, best, latest, notation) of a plain number, exactly as `read` gives them; None where `read` must look."""
    if settings.decimal != "." or _MINUS_ZERO.match(number):
        return None
    back = plain_unit(unit, settings)
    if back is None and (unit or settings.unit):
        return None
    if back is None:
        if _YEAR.match(number):
            best, half, name = float(number) + 0.5, 0.5, YEAR_NAME
        elif _DECIMAL.match(number):
            best, half, name = float(number), float(f"5e{-len(number.partition('.')[2]) - 1}"), YEAR_NAME
        else:
            return None
    else:
        zero = zero_of(back, settings)
        if zero is None or not _AGE.match(number):
            return None
        whole, _, places = number.partition(".")
        digits = whole.lstrip("0")
        zeros = (
            0 if places or settings.digits == "all" else max(0, min(len(digits) - len(digits.rstrip("0")), len(digits) - settings.digits))
        )
        best, half = zero - float(f"{number}e{back.power}"), float(f"5e{back.power + (-len(places) if places else zeros) - 1}")
        name = AGO_NAME if back.zero == "compiled" else BP_NAME
    if not -FARTHEST <= best - half <= best + half <= FARTHEST:
        return None
    if settings.compiled is not None and best + half > settings.compiled + 1:
        return None
    return best - half, best, best + half, name
