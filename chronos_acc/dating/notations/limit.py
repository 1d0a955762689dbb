# SPDX-License-Identifier: Apache-2.0
"""One bound only: before 1850, after 66 Ma, until 1914, since 1945, no later than 300 BCE, > 40 ka, 1850 or later.

The open end takes the list's limit.
"""

from __future__ import annotations

import re
from math import inf

from ..settings import Settings
from ..span import Span
from .notation import Notation, Part

_WORDS = {
    "before": ("before", "prior to", "earlier than", "older than", "ante", "pre"),
    "until": ("until", "till", "up to", "by", "no later than", "not later than", "not after", "terminus ante quem", "taq", "at the latest"),
    "after": ("after", "later than", "younger than", "post"),
    "since": ("since", "from", "starting in", "no earlier than", "not earlier than", "not before", "terminus post quem", "tpq"),
}
_MEANING = {word: meaning for meaning, words in _WORDS.items() for word in words}
_PREFIX = re.compile(
    r"(?P<word>" + "|".join(sorted(map(re.escape, _MEANING), key=len, reverse=True)) + r")\b(?:[: ] ?(?=\S)|(?<=pre)-|(?<=post)-)"
    r"|(?P<sign><=|>=|<|>) ?(?=\S)",
    re.IGNORECASE,
)
_SUFFIX = re.compile(r",? (?:(?:or|and) (earlier|before|older|later|after|younger)|(onwards?))\Z", re.IGNORECASE)
_OF_AGES = re.compile(r"(at least|more than|over|less than|under|at most) (?=\S)", re.IGNORECASE)
_AGES = {"at least": "until", "more than": "before", "over": "before", "less than": "after", "under": "after", "at most": "since"}
_BACK = {"<": "after", "<=": "since", ">": "before", ">=": "until"}  # of an age, the smaller number is the later date
_FORTH = {"<": "before", "<=": "until", ">": "after", ">=": "since"}


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """Before and after leave the named time out, until and since take it in."""
    ages = _OF_AGES.match(text)
    if ages:
        inner = part(text[ages.end() :], NOTATION.level)
        return None if inner is None or not inner.back else _limited(_AGES[ages[1].lower()], inner)
    found = _PREFIX.match(text)
    if found:
        inner = part(text[found.end() :], NOTATION.level)
    else:
        found = _SUFFIX.search(text)
        inner = part(text[: found.start()], NOTATION.level) if found else None
    if inner is None or found is None:
        return None
    if found.re is _SUFFIX:
        meaning = "until" if (found[1] or "").lower() in ("earlier", "before", "older") else "since"
    else:
        meaning = _MEANING[found["word"].lower()] if found["word"] else (_BACK if inner.back else _FORTH)[found["sign"]]
    return _limited(meaning, inner)


def _limited(meaning: str, inner: Span) -> Span:
    low, high = {"before": (-inf, inner.low), "until": (-inf, inner.high), "after": (inner.high, inf), "since": (inner.low, inf)}[meaning]
    uses = tuple(name for name in inner.uses if name != "digits" or inner.kind == "circa")
    return Span(
        "limit",
        low,
        high if low == -inf else low,
        high,
        f"{meaning} {inner.words.split(', ±')[0]}",
        low,
        high,
        assumed=inner.assumed,
        uses=uses,
        remarks=inner.remarks,
    )


NOTATION = Notation(
    "limit", "before 1850", "a date with one bound; the other is the list's limit", read, level=4, marks=frozenset("<>eEoOuUiIbBaA")
)
