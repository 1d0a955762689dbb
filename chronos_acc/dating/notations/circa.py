# SPDX-License-Identifier: Apache-2.0
"""Circa: c. 1850, ca 500 BCE, about 12 ka, ~1900, probably late 12th century, 1850 (approx.)."""

from __future__ import annotations

import re

from ...errors import DateRefused
from ..settings import Settings
from ..span import Span
from .notation import Notation, Part

PREFIX = re.compile(
    r"(?:c\.? ?(?=[0-9+-])|(?:c|ca|cca)\. ?|(?:ca|cca|circa|about|abt\.?|approximately|approx\.?|around|roughly|probably|prob\.|"
    r"perhaps|possibly|maybe|estimated|est\.) |[~?] ?)(?=\S)",
    re.IGNORECASE,
)
_SUFFIX = re.compile(r" ?(?: |\()(?:circa|ca\.?|approx\.?|approximately|about|estimated|est\.)\)?\Z", re.IGNORECASE)
_QUALIFIED_ISO = re.compile(r"[~?%]-?[0-9X]{4}-[0-9X]")
_CENTURY = re.compile(r"[cC][0-9]{1,2}\Z")
LEAST = 5.0
"""Circa reaches five years at least."""


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """A word or sign that says "about" on either side of a date."""
    found = PREFIX.match(text)
    if found:
        if _CENTURY.match(text):
            raise DateRefused(
                f"is ambiguous: about the year {text[1:]}, or century {text[1:]} as some write it; "
                f'write "c. {text[1:]} CE" or the century out'
            )
        if _QUALIFIED_ISO.match(text):
            return None  # a qualifier in ISO 8601-2's own place
        inner = part(text[found.end() :], NOTATION.level)
    else:
        found = _SUFFIX.search(text)
        inner = part(text[: found.start()], NOTATION.level) if found else None
    return None if inner is None else widen(inner, settings)


def widen(span: Span, settings: Settings) -> Span:
    """A unit of the last significant digit each side, at least five years; half the width of what is no number; or the list's rule."""
    if span.shape == "normal":
        return span._replace(remarks=(*span.remarks, "circa adds nothing to a stated error"))
    half = (span.latest - span.earliest) / 2
    if settings.circa != "digit":
        reach = float(settings.circa)
    elif span.last:
        reach = max(span.last, LEAST)
    else:
        reach = max(half, LEAST)
    if span.last:
        reach = max(reach, half)
        earliest, latest = span.best - reach, span.best + reach
    else:
        earliest, latest = span.earliest - reach, span.latest + reach
    uses = ("circa", "digits") if span.last and settings.circa == "digit" else ("circa",)
    return span._replace(
        kind="circa",
        earliest=earliest,
        latest=latest,
        low=earliest,
        high=latest,
        last=0.0,
        words=f"circa (± {reach:.6g} years): {span.words}",
        uses=(*span.uses, *uses),
    )


NOTATION = Notation("circa", "c. 1850", "a date said to be about right", read, level=3, marks=frozenset("cCaAoOeE~?"))
