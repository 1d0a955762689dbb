# SPDX-License-Identifier: Apache-2.0
"""Ranges: 450–400 BCE, 12–9 ka, 50 BCE–20 CE, between 1914 and 1918, from May to July 1848, 5th–4th century BCE, 1914–18.

Ends are taken as written, without rounding.
"""

from __future__ import annotations

import re
from math import inf

from ...errors import DateRefused
from ..number import MANTISSA, split_number
from ..settings import Settings
from ..span import Span, flat
from ..units import Unit, find_unit
from .century import ORDINAL
from .circa import PREFIX as CIRCA
from .notation import Notation, Part

_WORDED = (
    re.compile(r"(?:between|betw\.) (.+) and (.+)\Z", re.IGNORECASE),
    re.compile(r"from (.+?) (?:to|until|till|through|thru|up to) (.+)\Z", re.IGNORECASE),
    re.compile(r"(.+?) ?(?:-to-| to | until | till | through | thru | up to | or )(.+)\Z", re.IGNORECASE),
)
_ORDINALS = re.compile(rf"((?:.* )?{ORDINAL})/({ORDINAL} .*)\Z", re.IGNORECASE)
_TWO_DECADES = re.compile(r"(?:the )?([0-9]{1,3})[0-9]0'?s\Z")
_SHORT_DECADE = re.compile(r"([0-9]0'?s)\Z")
_HAS_WORD = re.compile(r"[ -](?:to|until|till|through|thru|or|and)[ -]", re.IGNORECASE)
_DASHES = re.compile(r" ?(?:–|--+) ?")
_HYPHEN = re.compile(r"(?<=[\w.)'?])-(?=[\w.+~?-])")
_ISO = re.compile(r"[?~%]?[+-]?[0-9X]{4}[?~%]?-[?~%]?[0-9X]{2}(?=\Z|[T/?~%-])")
_FOUR_TWO = re.compile(r"(?:.*[^0-9.,])?([0-9]{4})-([0-9]{1,2})(?![0-9.,])(?P<tail>.*)\Z")
_DAY_MONTH_YEAR = re.compile(r"[0-9]{1,2}(?:st|nd|rd|th)?-[^\W\d_]{3,9}\.?[- ]-?[0-9]+\Z")  # 12-Apr-1961 is one day
_NOW = frozenset(("present", "the present", "now", "today", "date", "present day"))
_QUALIFIER = re.compile(r"(?:early|mid|middle|late)[ -]", re.IGNORECASE)
_TOKEN = re.compile(rf"{ORDINAL}(?![a-z])|[0-9]+'?s\b", re.IGNORECASE)
_WORD = re.compile(r"[^\W\d_]+\.?")
_ERA_BEFORE = re.compile(r"((?:a\.?d|b\.?c(?:\.?e)?|c\.?e)\.? ?)[0-9]", re.IGNORECASE)
_MONTH_BEFORE = re.compile(r"([^\W\d_]{3,9}\.? )[0-9]{1,2}(?:st|nd|rd|th)?\Z")


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """Two dates with a dash or a word between; a unit, era, month or noun may stand at one end for both."""
    span = None
    for left, right, may_shorten in _splits(text):
        found = _between(left.strip(), right.strip(), may_shorten, settings, part)
        if found is None:
            continue
        if span is not None and (span.earliest, span.latest) != (found.earliest, found.latest):
            raise DateRefused(f'is ambiguous: {span.words} or {found.words}; use "to" between the two dates')
        span = found
    return span


def _splits(text: str) -> list[tuple[str, str, bool]]:
    """Where a text may come apart, and whether the second number may be shortened there (not at a hyphen: that is ISO 8601's)."""
    for form in _WORDED if _HAS_WORD.search(text) else ():
        found = form.match(text)
        if found:
            return [(found[1], found[2], True)]
    pieces = _DASHES.split(text)
    if len(pieces) > 1:
        return [(pieces[0], pieces[1], True)] if len(pieces) == 2 and all(pieces) else []
    ordinals = _ORDINALS.match(text)
    if ordinals:
        return [(ordinals[1], ordinals[2], False)]
    pieces = text.split(" - ")
    if len(pieces) > 1:
        return [(pieces[0], pieces[1], False)] if len(pieces) == 2 else []
    if "-" not in text[1:] or _ISO.match(text) or "/" in text or text[0] in "[{":
        return []
    tight = _FOUR_TWO.match(text)
    if tight:
        unit = find_unit(tight["tail"])
        if unit is None or not unit.back:
            raise DateRefused(
                f"has a hyphen between four digits and {len(tight[2])}, which is ISO 8601's year and month alone; "
                'use a dash or "to" for a range'
            )
    if _DAY_MONTH_YEAR.match(text):
        return []
    return [(text[: found.start()], text[found.end() :], False) for found in list(_HYPHEN.finditer(text))[:8]]


def _tail(text: str, settings: Settings) -> str:
    """What follows the first number, ordinal or word of a date: its unit, era, month and year, or noun."""
    circa = CIRCA.match(text)
    rest = text[circa.end() :] if circa else text
    early = _QUALIFIER.match(rest)
    rest = rest[early.end() :] if early else rest
    token = _TOKEN.match(rest)
    if token:
        return rest[token.end() :].strip()
    number = MANTISSA[settings.decimal].match(rest)
    if number and number.end():
        return rest[number.end() :].strip()
    word = _WORD.match(rest)
    return rest[word.end() :].strip() if word else ""


def _between(left: str, right: str, may_shorten: bool, settings: Settings, part: Part) -> Span | None:
    if not left or not right:
        return None
    number_right = split_number(right, settings.decimal)
    if right.lower() in _NOW:
        start = part(left, NOTATION.level)
        return (
            None
            if start is None
            else flat("range", start.low, inf, f"from {_brief(start)} to the present", start.uses, start.remarks)._replace(
                assumed=start.assumed
            )
        )
    decades = _TWO_DECADES.match(left) if _SHORT_DECADE.match(right) else None
    if decades:  # 1850s–60s
        right = decades[1] + right
    tail = _tail(right, settings)
    circa = CIRCA.match(left)
    if circa and not CIRCA.match(right):
        right_as_is, right = right, circa[0] + right
        if part(right, NOTATION.level) is None:
            right = right_as_is
    start = _left_end(left, right, tail, part, settings)
    if start is None:
        return None
    if may_shorten:
        shortened = _shortened(left, right, start, settings, part)
        if shortened is not None:
            return shortened
    left_tail = _tail(left, settings)
    era = _ERA_BEFORE.match(left)
    bare = number_right is not None and not number_right[1]
    if bare and era:
        end = part(era[1] + right, NOTATION.level)
    elif bare and left_tail:
        return _one_sided(start, right, left_tail, settings, part)
    else:
        end = part(right, NOTATION.level)
        month = _MONTH_BEFORE.match(left)
        if end is None and month:
            end = part(month[1] + right, NOTATION.level)
    return None if end is None else _ordered(start, end, settings)


def _left_end(left: str, right: str, tail: str, part: Part, settings: Settings) -> Span | None:
    """The first date, with as much of the second one's tail as makes it one: the most first."""
    if tail.startswith(","):
        shared = part(left + tail, NOTATION.level)
        if shared is not None:
            return shared
    words = tail.split()
    tails = [" ".join(words[place:]) for place in range(len(words))]
    if words and not any(character.isdigit() for character in left):  # "early to mid 19th century": the number too
        whole = right.split()
        tails = [" ".join(whole[place:]) for place in range(1, len(whole))]
    for shared_tail in tails:
        shared = part(f"{left.rstrip('-')} {shared_tail}", NOTATION.level)
        if shared is not None:
            return shared
    return part(left, NOTATION.level)


def _shortened(left: str, right: str, start: Span, settings: Settings, part: Part) -> Span | None:
    """1914–18: the second year's missing digits are the first's. For BCE both ways may run forward; then neither is guessed."""
    opening, circa = CIRCA.match(left), CIRCA.match(right)
    first = split_number(left[opening.end() :] if opening else left, settings.decimal)
    second = split_number(right[circa.end() :] if circa else right, settings.decimal)
    if first is None or second is None or not first[0].whole or not second[0].whole or second[0].sign or first[0].sign:
        return None
    size = len(second[0].digits)
    if not size < len(first[0].digits) or size > 2:
        return None
    unit: Unit | None = find_unit(second[1]) if second[1] else None
    if (second[1] and (unit is None or unit.back or unit.power)) or (first[1] and find_unit(first[1]) != unit):
        return None
    prefix = circa[0] if circa else ""
    longer = f"{prefix}{first[0].digits[:-size]}{second[0].digits} {second[1]}".strip()
    end = part(longer, NOTATION.level)
    if end is None or end.back or start.kind not in ("year", "circa"):
        return None
    as_is = part(right, NOTATION.level)
    if end.low <= start.low:
        if as_is is None or as_is.low <= start.low:
            return _ordered(start, end, settings)
        return None
    if as_is is not None and as_is.low > start.low:
        raise DateRefused(
            f"is ambiguous: from {_brief(start)} to {_brief(end)}, or to {_brief(as_is)}; "
            "write the second year in full, with its era at both ends"
        )
    return _ordered(start, end, settings)


def _one_sided(start: Span, right: str, left_tail: str, settings: Settings, part: Part) -> Span | None:
    """450 BCE–400: the unit stands at the first date only. An age's holds for both; an era is refused where both readings run forward."""
    shared, alone = part(f"{right} {left_tail}", NOTATION.level), part(right, NOTATION.level)
    if shared is not None and shared.back and start.back:
        return _ordered(start, shared, settings)
    forward = [end for end in (shared, alone) if end is not None and end.low > start.low]
    if len({(end.low, end.high) for end in forward}) > 1:
        raise DateRefused(
            f"is ambiguous: from {_brief(start)} to {_brief(forward[0])} or to {_brief(forward[1])}; write the era at both ends"
        )
    if forward:
        return _ordered(start, forward[0], settings)
    end = shared or alone
    return None if end is None else _ordered(start, end, settings)


def _ordered(start: Span, end: Span, settings: Settings) -> Span:
    if "normal" in (start.shape, end.shape):
        raise DateRefused("gives an error at the end of a range; give the bounds alone, or one date with its error")
    if (start.low, start.high) == (end.low, end.high):
        raise DateRefused(f"is a range from {_brief(start)} to itself; write that date alone")
    if start.low > end.low or start.low >= end.high:
        if settings.backwards == "refuse":
            raise DateRefused(
                f"runs backwards: {_brief(end)} comes before {_brief(start)}; "
                'write the earlier end first, with its era, or set backwards = "swap"'
            )
        start, end = end, start
    # as ends are taken as written, the rounding of a number plays no part; circa's width does
    uses = tuple(name for one in (start, end) for name in one.uses if name != "digits" or one.kind == "circa")
    words = f"from {_brief(start)} to {_brief(end)}"
    return flat("range", start.low, end.high, words, uses, start.remarks + end.remarks)._replace(
        back=start.back, assumed=start.assumed or end.assumed
    )


def _brief(span: Span) -> str:
    """The words of an end without its rounding."""
    return span.words.split(", ±")[0].split(", its trailing zeros")[0]


NOTATION = Notation("range", "450–400 BCE", "two dates with a dash or a word between them", read, level=4, marks=frozenset("-–oOuUiIaA"))
