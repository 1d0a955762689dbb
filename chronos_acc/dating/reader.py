# SPDX-License-Identifier: Apache-2.0
"""Reading a text: every notation is tried, and a text with two different readings is refused with both named."""

from __future__ import annotations

import re
from functools import lru_cache

from ..errors import DateRefused
from .clean import clean
from .dating import Reading
from .notations import NOTATIONS, Notation, ago, before_present, era
from .number import split_number
from .settings import Settings
from .span import Span, finish
from .units import find_unit

LONGEST = 200
"""Longer texts are prose, not dates."""

_NO_UNIT_WORDS = re.compile(
    r"\b(?:circa|ca?|approximately|approx|about|around|roughly|between|and|from|to|through|until|till|before|after|since|prior|post|"
    r"ante|by|up|not|no|earlier|later|than|older|younger|at|least|most|more|less|over|under|sigma|sd|s\.d|probably|perhaps|possibly|ci|hpd)"
    r"\b\.?|[0-9][eE][+-]?(?=[0-9])|[x×*] ?10(?=\^| \^|\*\*)|σ"
    r"|[+-] ?(?:[0-9][0-9.,']*)? ?/ ?(?=[+-])",  # the slash of +/- and of +0.3/-0.1
    re.IGNORECASE,
)
_SHOULD_STAND = re.compile(r"[^\W\d_]|[/:\[\]{}]|\.\.|\A-?[0-9]{4}-[0-9]{2}(?:-[0-9]{2})?\Z|[0-9][.][0-9]+[.]")


def shown(text: str) -> str:
    """A text as a message quotes it: one line, no control characters, not too long."""
    return repr(text if len(text) <= 60 else text[:57] + "...")


def takes_unit(text: str) -> bool:
    """Whether a cleaned text holds numbers only, so that a unit of the row or list applies to it."""
    return not _SHOULD_STAND.search(_NO_UNIT_WORDS.sub(" ", text))


def split_unit(text: str) -> str:
    """What stands behind the last number of a cleaned text: its unit or era, if that is what it is."""
    return text[max((place + 1 for place, character in enumerate(text) if character.isdigit()), default=0) :].strip(" )")


def read(text: str, settings: Settings = Settings(), *, unit: str | None = None) -> Reading:
    """The dating of a text as compilers write it.

    ``unit`` is that of the row; it stands behind a text that names none, before the list's own (``settings.unit``), and a list that
    counts "ago" without a unit means years. Raises DateRefused, in one line: what was given, why not, what to do.
    """
    if not isinstance(text, str) or not text.strip():
        raise DateRefused("the date is empty; give a date, or leave the row out")
    try:
        found = read_clean(_with_unit(text, settings, unit), settings)
        return finish(found[1], found[0].name, settings)
    except DateRefused as refusal:
        raise DateRefused(f"{shown(text)} {refusal}") from None


def ends(text: str, settings: Settings, *, unit: str | None = None) -> Span:
    """A text as the end of a range: ``low`` and ``high`` are its bounds as written, before the compile year is heeded."""
    try:
        return read_clean(_with_unit(text, settings, unit), settings)[1]
    except DateRefused as refusal:
        raise DateRefused(f"{shown(text)} {refusal}") from None


def _with_unit(text: str, settings: Settings, unit: str | None) -> str:
    plain = clean(text)
    word = unit or settings.unit or ("years ago" if settings.counted == "ago" else None)
    if word and ("±" in plain or "+" in plain):
        named = find_unit(word)
        # the row's unit is the date's; behind an error a bare "a" could be the error's own
        if named is not None and named.zero == "compiled" and named.power == 0:
            word = "years ago"
    return f"{plain} {word.strip()}" if word and takes_unit(plain) else plain


_OF_ZERO = {
    "ce": era.NOTATION,
    "bce": era.NOTATION,
    "compiled": ago.NOTATION,
    "1950": before_present.NOTATION,
    "2000": before_present.NOTATION,
}
_HIGHEST = max(notation.level for notation in NOTATIONS)
_ONE_DIGIT = str.maketrans("123456789", "000000000")


@lru_cache(maxsize=4096)
def _asked(signs: frozenset[str], below: int) -> tuple[Notation, ...]:
    """The notations below a level that a text of these characters may be of (0 stands for every digit)."""
    return tuple(
        notation for notation in NOTATIONS if notation.level < below and (not notation.marks or not notation.marks.isdisjoint(signs))
    )


def read_clean(text: str, settings: Settings) -> tuple[Notation, Span]:
    """The one reading of a cleaned text and its notation; raises DateRefused with a reason that follows the text."""
    if len(text) > LONGEST:
        raise DateRefused(f"is longer than {LONGEST} characters; give the date alone")
    found = _try(text, settings, _HIGHEST + 1)
    if found is None:
        raise DateRefused(f"is read by no notation; {_hint(text)}")
    return found


_HINTS = (
    (
        re.compile(r"[0-9],[0-9]{1,2}(?![0-9])|[0-9],[0-9]{4}"),
        'a comma groups thousands and needs three digits behind it; set decimal = "," if it is the list\'s decimal mark',
    ),
    (re.compile(r"[0-9]\.[0-9]{3}\.[0-9]"), 'a point is the decimal mark; set decimal = "," if points group thousands in this list'),
    (
        re.compile(r"[0-9] ?years?\Z", re.IGNORECASE),
        'years alone may be a length of time; write "years ago", or the calendar year without a unit',
    ),
    (re.compile(r"\bturn of|\bbeginning|\bend of|\bstart of", re.IGNORECASE), "say early, mid or late, or give the years"),
    (re.compile(r"\A[^0-9]*\Z"), "it has no number and is no name of the period table; give a date"),
    (
        re.compile(r"\b(?:unknown|open|uuuu)\b|[0-9]u", re.IGNORECASE),
        "that is an older draft's form; write X for an unspecified digit, .. for an open end, nothing for an unknown one",
    ),
    (re.compile(r"[0-9]\.\.[0-9]|[\[{]"), "write a set without spaces as [1667,1668] (one of) or {1667..1672} (all of)"),
)


def _hint(text: str) -> str:
    """What to do with a text that no notation reads."""
    return next(
        (advice for pattern, advice in _HINTS if pattern.search(text)),
        "write it as 1985-04-12, 450–400 BCE, 66.0 ± 0.05 Ma or the like, or give earliest and latest years",
    )


def _try(text: str, settings: Settings, below: int) -> tuple[Notation, Span] | None:
    """Every notation below a level on a text; two different bounds raise."""

    def part(piece: str, level: int) -> Span | None:
        answer = _try(piece, settings, level)
        return None if answer is None else answer[1]

    first: tuple[Notation, Span] | None = None
    if not text:
        return None
    quantity = split_number(text, settings.decimal)
    if quantity is not None and quantity[1]:  # most texts of most lists: a number and a unit, which no other notation reads (tested)
        unit = find_unit(quantity[1])
        if unit is not None and unit.zero in _OF_ZERO:
            notation = _OF_ZERO[unit.zero]
            span = notation.read(text, settings, part)
            return None if span is None else (notation, span)
    for notation in _asked(frozenset(text.translate(_ONE_DIGIT)), below):
        span = notation.read(text, settings, part)
        if span is None:
            continue
        if first is None:
            first = notation, span
        elif (span.earliest, span.latest) != (first[1].earliest, first[1].latest):
            raise DateRefused(f"is ambiguous: {first[1].words} ({first[0].name}), or {span.words} ({notation.name}); write one of them out")
    return first
