# SPDX-License-Identifier: Apache-2.0
"""A best date with its 95 % interval: 2.1 (95% CI 1.9–2.4) Ma, 1850.5 (95 %: 1840.0 to 1862.0), 12.3 ka (95% HPD 13.1-11.9 ka)."""

from __future__ import annotations

import re

from ...errors import DateRefused
from ..number import split_number
from ..settings import Settings
from ..span import Span
from .notation import Notation, Part

_FORM = re.compile(
    r"(?P<best>[^(\[]*[0-9][^(\[]*?) ?[(\[] ?(?P<share>[0-9.]+) ?% ?"
    r"(?:ci|c\.i\.|hpd|hdi|cri|confidence interval|credible interval|interval|range)?[:=,]? ?"
    r"(?P<low>[+-]?[0-9][0-9.,' ]*?(?:e[+-]?[0-9]+)?) ?(?:to|–|-|,) ?(?P<high>[+-]?[0-9][0-9.,']*(?:e[+-]?[0-9]+)?)"
    r"(?: ?(?P<own>[^\d\])][^\])]*))?[)\]] ?(?P<tail>.*)\Z",
    re.IGNORECASE,
)
_NUMBER = re.compile(r"[+-]?[0-9.,' ]+(?:e[+-]?[0-9]+)?\Z")


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """A normal dating, two-piece, whose bounds are the interval as written."""
    if "%" not in text:
        return None
    found = _FORM.match(text)
    if found is None:
        return None
    if float(found["share"].rstrip(".") or 0) != 95:
        raise DateRefused(f"gives a {found['share']} % interval; bounds are 95 % ones, so give those or a ± with its sigma")
    head, tail = found["best"].strip(), found["tail"]
    if found["own"] and not tail and _NUMBER.match(head):  # 2.1 (95% CI 2.4–1.9 Ma): the unit inside is that of the best date too
        tail = found["own"]
    best = part(f"{head} {tail}".strip(), 1)
    if best is None or not best.last:
        return None
    written = split_number(head, settings.decimal)
    own = found["own"] or tail or (written[1] if written else "")
    ends = [part(f"{found[name]} {own}".strip(), 1) for name in ("low", "high")]
    if ends[0] is None or ends[1] is None:
        return None
    first, last = (ends[0], ends[1]) if ends[0].best <= ends[1].best else (ends[1], ends[0])
    if not first.low <= best.best <= last.high:
        raise DateRefused("has a best date outside its own interval; check the three numbers")
    words = f"{best.words.split(', ±')[0]}, normal, 95 % between {first.low:.12g} and {last.high:.12g}"
    return best._replace(
        kind="error",
        earliest=first.low,
        latest=last.high,
        low=first.low,
        high=last.high,
        words=words,
        shape="normal",
        last=0.0,
        uses=(),
        assumed=best.assumed or first.assumed or last.assumed,
    )


NOTATION = Notation("interval", "2.1 (95% CI 2.4–1.9) Ma", "a best date with its 95 % interval", read, level=2, marks=frozenset("%"))
