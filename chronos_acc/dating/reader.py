"""Reading a text: every notation is tried, and a text with two different readings is refused with both named."""

from __future__ import annotations

import re

from ..errors import DateRefused
from .clean import clean
from .dating import Reading
from .notations import NOTATIONS, Notation
from .settings import Settings
from .span import Span, finish

LONGEST = 200
"""Longer texts are prose, not dates."""

_NO_UNIT_WORDS = re.compile(
    r"\b(?:circa|ca?|approximately|approx|about|around|roughly|between|and|from|to|through|until|till|before|after|since|prior|post|ante|by|up|not|no|"
    r"earlier|later|than|older|younger|sigma|sd|s\.d|probably|perhaps|possibly|ci|hpd)\b\.?|[0-9][eE]\+?(?=[0-9])|[x×*] ?10(?=\^| \^|\*\*)|σ", re.IGNORECASE)
_SHOULD_STAND = re.compile(r"[^\W\d_]|[/:\[\]{}]|\.\.|\A-?[0-9]{4}-[0-9]{2}(?:-[0-9]{2})?\Z|[0-9][.][0-9]+[.]")


def shown(text: str) -> str:
    """A text as a message quotes it: one line, no control characters, not too long."""
    return repr(text if len(text) <= 60 else text[:57] + "...")


def takes_unit(text: str) -> bool:
    """Whether a cleaned text holds numbers only, so that a unit of the row or list applies to it."""
    return not _SHOULD_STAND.search(_NO_UNIT_WORDS.sub(" ", text))


def read(text: str, settings: Settings = Settings(), *, unit: str | None = None) -> Reading:
    """The dating of a text as compilers write it.

    ``unit`` is that of the row; it stands behind a text that names none, before the list's own (``settings.unit``), and a list that counts "ago"
    without a unit means years. Raises DateRefused, in one line: what was given, why not, what to do.
    """
    if not isinstance(text, str) or not text.strip():
        raise DateRefused("the date is empty; give a date, or leave the row out")
    try:
        plain = clean(text)
        word = unit or settings.unit or ("years ago" if settings.counted == "ago" else None)
        if word and takes_unit(plain):
            plain = f"{plain} {word.strip()}"
        found = read_clean(plain, settings)
        return finish(found[1], found[0].name if found[1].named is None else found[1].named, settings)
    except DateRefused as refusal:
        raise DateRefused(f"{shown(text)} {refusal}") from None


def read_clean(text: str, settings: Settings) -> tuple[Notation, Span]:
    """The one reading of a cleaned text and its notation; raises DateRefused with a reason that follows the text."""
    if len(text) > LONGEST:
        raise DateRefused(f"is longer than {LONGEST} characters; give the date alone")
    found = _try(text, settings, len(NOTATIONS))
    if found is None:
        raise DateRefused("is read by no notation; see the examples of `date --help`, or give earliest and latest years")
    return found


def _try(text: str, settings: Settings, below: int) -> tuple[Notation, Span] | None:
    """Every notation below a level on a text; two different bounds raise."""

    def part(piece: str, level: int) -> Span | None:
        answer = _try(piece, settings, level)
        return None if answer is None else answer[1]

    first: tuple[Notation, Span] | None = None
    if not text:
        return None
    for notation in NOTATIONS:
        if notation.level >= below:
            continue
        span = notation.read(text, settings, part)
        if span is None:
            continue
        if first is None:
            first = notation, span
        elif (span.earliest, span.latest) != (first[1].earliest, first[1].latest):
            raise DateRefused(f"is ambiguous: {first[1].words} ({first[0].name}), or {span.words} ({notation.name}); write one of them out")
    return first
