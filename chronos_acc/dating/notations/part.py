# SPDX-License-Identifier: Apache-2.0
"""Parts of a longer time: early 19th century, mid-1850s, late Cretaceous, first half of the 5th century BCE, third quarter of 1848."""

from __future__ import annotations

import re

from ..periods import shipped_periods
from ..settings import Settings
from ..span import Span, flat
from .notation import Notation, Part

_EARLY = re.compile(r"(?:the |in )?(early|mid|middle|late)(?:[ -]+)(?:part of )?(?:in )?(?:the )?(?=\S)", re.IGNORECASE)
_NTH = re.compile(
    r"(?:the )?(first|second|third|fourth|last|1st|2nd|3rd|4th|final)[ -](half|third|quarter)(?: of|,)?(?: the)? (?=\S)", re.IGNORECASE
)
_PLACES = {"first": 0, "1st": 0, "second": 1, "2nd": 1, "third": 2, "3rd": 2, "fourth": 3, "4th": 3}
_PIECES = {"half": 2, "third": 3, "quarter": 4}
_NAMES = {"early": "early part", "mid": "middle part", "middle": "middle part", "late": "late part"}
_WHOLES = ("year", "month", "season", "decade", "century", "period", "day")


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """The part's share of the whole; shares of whole years are rounded to years when the whole is longer than five."""
    found = _EARLY.match(text)
    if found:
        word = found[1].lower()
        early, middle = ((0.0, 1 / 3), (1 / 3, 2 / 3)) if settings.parts == "thirds" else ((0.0, 0.5), (0.25, 0.75))
        share = early if word == "early" else middle if word in ("mid", "middle") else (1 - early[1], 1.0)
        uses: tuple[str, ...] = ("parts",)
    else:
        found = _NTH.match(text)
        if not found:
            return None
        pieces = _PIECES[found[2].lower()]
        word = f"{found[1].lower()} {found[2].lower()}"
        place = pieces - 1 if found[1].lower() in ("last", "final") else _PLACES[found[1].lower()]
        if place >= pieces:
            return None
        share, uses = (place / pieces, (place + 1) / pieces), ()
    whole = part(text[found.end() :], NOTATION.level)
    if whole is None or whole.kind not in _WHOLES or whole.kind == "day" or (whole.kind == "year" and whole.latest - whole.earliest != 1):
        return None
    if whole.kind == "period" and (settings.periods or shipped_periods()).find(text):
        return None  # the table's own Late Cretaceous comes before the last third
    low, high = cut(whole.earliest, whole.latest, share)
    words = f"{_NAMES.get(word, word)} of {whole.words}: {low:.12g} to {high:.12g}"
    return flat("part", low, high, words, uses + whole.uses, whole.remarks)._replace(assumed=whole.assumed)


def cut(low: float, high: float, share: tuple[float, float]) -> tuple[float, float]:
    """The share of a span: at whole years when it is made of more than five of them (1801–1833, 1834–1867, 1868–1900), else exactly."""
    width = high - low
    first, last = width * share[0], width * share[1]
    if width > 5 and low.is_integer() and high.is_integer():
        first, last = float(round(first)), float(round(last))
    return low + first, high if share[1] == 1.0 else low + last


NOTATION = Notation(
    "part",
    "early 19th century",
    "early, mid or late, or a half, third or quarter, of a longer time",
    read,
    level=1,
    marks=frozenset("ldrLDR"),
)
