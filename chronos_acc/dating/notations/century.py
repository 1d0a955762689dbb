# SPDX-License-Identifier: Apache-2.0
"""Centuries and millennia: 19th century, fifth century BCE, XIX c., 3rd millennium BC.

The nth century is 100(n − 1) + 1 to 100n, as no year 0 was counted.
"""

from __future__ import annotations

import re

from ...errors import DateRefused
from ..settings import Settings
from ..span import Span, flat
from ..units import find_unit
from .notation import Notation, Part

_WORDS = (
    "first",
    "second",
    "third",
    "fourth",
    "fifth",
    "sixth",
    "seventh",
    "eighth",
    "ninth",
    "tenth",
    "eleventh",
    "twelfth",
    "thirteenth",
    "fourteenth",
    "fifteenth",
    "sixteenth",
    "seventeenth",
    "eighteenth",
    "nineteenth",
    "twentieth",
    "twenty-first",
)
ORDINALS = {word: place + 1 for place, word in enumerate(_WORDS)}
_ROMAN = (
    "i",
    "ii",
    "iii",
    "iv",
    "v",
    "vi",
    "vii",
    "viii",
    "ix",
    "x",
    "xi",
    "xii",
    "xiii",
    "xiv",
    "xv",
    "xvi",
    "xvii",
    "xviii",
    "xix",
    "xx",
    "xxi",
)
_ROMANS = {numeral: place + 1 for place, numeral in enumerate(_ROMAN)}
ORDINAL = (
    r"(?:[0-9]{1,4}(?:st|nd|rd|th)|"
    + "|".join(sorted(_WORDS, key=len, reverse=True))
    + "|(?:"
    + "|".join(sorted(_ROMAN, key=len, reverse=True))
    + ")(?:st|nd|rd|th|(?![a-z])))"
)
_CENTURY = re.compile(
    rf"(?:the )?(?P<ordinal>{ORDINAL})[ -]?(?P<unit>centur(?:y|ies)|cent\.?|c\.?|millenni(?:um|a)|mill?\.?)"
    r"(?:,? ?(?P<era>bce?|ce|ad|b\.c\.e?\.?|c\.e\.|a\.d\.))?\Z",
    re.IGNORECASE,
)


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """An ordinal with "century" or "millennium", and BCE where it is meant."""
    found = _CENTURY.match(text)
    if found is None:
        return None
    word = found["ordinal"].lower()
    number = ORDINALS.get(word) or _ROMANS.get(re.sub("(?:st|nd|rd|th)$", "", word)) or int(re.sub("[^0-9]", "", word))
    unit, length = ("century", 100) if found["unit"][0] in "cC" else ("millennium", 1000)
    era = find_unit(found["era"]) if found["era"] else None
    if number == 0:
        raise DateRefused(f"names a {unit} 0; they count from the 1st on either side")
    if era is not None and era.zero == "bce":
        low, high = 1.0 - number * length, 1.0 - (number - 1) * length
        years = f"{number * length} to {(number - 1) * length + 1} BCE"
    else:
        low, high = (number - 1) * length + 1.0, number * length + 1.0
        years = f"{low:.0f} to {high - 1:.0f}"
    return flat("century", low, high, f"{unit} {number}{' BCE' if low < 1 else ''}, {years}")


NOTATION = Notation("century", "19th century", "a century or millennium", read, marks=frozenset("cCmM"))
