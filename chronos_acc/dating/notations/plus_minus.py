# SPDX-License-Identifier: Apache-2.0
"""Dates with an error: 66.0 ± 0.05 Ma, 1628 ± 5 BCE, 4567.3 Ma ± 160 ka (2σ), 251.902(24) Ma, 66.0 +0.3/-0.1 Ma, 12 ka ± 5 %."""

from __future__ import annotations

import re
from typing import NamedTuple

from ...errors import DateRefused
from ..dating import Z975
from ..number import Number, split_number
from ..settings import Settings
from ..span import Span
from ..units import find_unit
from .notation import Notation, Part

_SIGMA = re.compile(
    r" ?[(\[,]? ?(?:at |with )?(?:"
    r"(?P<n>[0-9](?:\.[0-9]+)?)[ -]?(?:σ|sigmas?\b|s\.?d\.?(?![a-z])|s\.?e\.?(?![a-z])|s(?![a-z])|standard deviations?)"
    r"|(?P<share>68|95)(?:\.[0-9]+)? ?%(?: ?(?:ci|confidence|level|c\.i\.))*"
    r")(?: errors?| level)? ?[)\]]?(?= |\Z)",
    re.IGNORECASE,
)
_SIGMA_MARKS = frozenset("σsS%")
_ERROR = r"([0-9][0-9.,']*|[.,][0-9]+)"
_BOTH = re.compile(rf"(.*?[^ (]) ?(?:±|\+ ?/ ?-|\+-) ?{_ERROR} ?(%)? ?([^\d%±+()][^()]*)?\Z")
_ENCLOSED = re.compile(r"\( ?((?:±|\+ ?/ ?-|\+-)[^()]*)\)")
_SIDES = re.compile(rf"(.*?[^ (]) ?\(? ?([+-]) ?{_ERROR} ?[/,;]? ?([+-]) ?{_ERROR} ?\)? ?([^\d±+].*)?\Z")
_BRACKET = re.compile(r"(.*[0-9])\(([0-9]{1,4})\) ?([^\d±+].*)?\Z")
_BARE = re.compile(r"[-+0-9.,' ]+\Z")
_YEARS = frozenset(("years", "year", "yrs", "yr", "y", "a"))


class _Error(NamedTuple):
    head: str
    tail: str
    plus: str
    minus: str
    form: str  # "number", "percent" or "digits" (of the last place)


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """A normal dating: bounds at 1.96 standard deviations, each side its own."""
    if "±" not in text and "+" not in text and ")" not in text:
        return None
    sigma: float | None = None
    stated = _SIGMA.search(text) if not _SIGMA_MARKS.isdisjoint(text) else None
    if stated:
        sigma = float(stated["n"]) if stated["n"] else (Z975 if stated["share"] == "95" else 1.0)
        text = f"{text[: stated.start()]} {text[stated.end() :]}".strip()
    error = _split(text)
    if error is None:
        return None
    if sigma is not None and sigma <= 0:
        raise DateRefused("states an error at 0 sigma; give the number of standard deviations, such as 2σ")
    readings = [span for span in (_shared(error, sigma, settings, part), _own(error, sigma, settings, part)) if span is not None]
    if not readings:
        return None
    if len({(span.earliest, span.latest) for span in readings}) > 1:
        raise DateRefused(f'is ambiguous: {" or ".join(span.words for span in readings)}; write "years ago" or an era')
    return readings[0]


def _split(text: str) -> _Error | None:
    both = _BOTH.match(_ENCLOSED.sub(r"\1", text) if "(" in text else text)
    if both:
        return _Error(both[1], both[4] or "", both[2], both[2], "percent" if both[3] else "number")
    sides = _SIDES.match(text)
    if sides and sides[2] != sides[4]:
        plus, minus = (sides[3], sides[5]) if sides[2] == "+" else (sides[5], sides[3])
        return _Error(sides[1], sides[6] or "", plus, minus, "number")
    bracket = _BRACKET.match(text)
    return _Error(bracket[1], bracket[3] or "", bracket[2], bracket[2], "digits") if bracket else None


def _shared(error: _Error, sigma: float | None, settings: Settings, part: Part) -> Span | None:
    """The unit behind the error is that of the date too."""
    span = part(f"{error.head} {error.tail}".strip(), 1)
    return None if span is None or not span.last else _normal(span, error, span.scale, sigma, settings)


def _own(error: _Error, sigma: float | None, settings: Settings, part: Part) -> Span | None:
    """The unit behind the error is the error's own: 4567.3 Ma ± 160 ka, 1850 ± 10 years."""
    if not error.tail:
        return None
    unit = find_unit(error.tail)
    years = error.tail.lower().rstrip(".") in _YEARS
    if not years and (unit is None or unit.zero != "compiled" or _BARE.match(error.head)):
        return None
    span = part(error.head, 1)
    if span is None or not span.last or (not years and not span.back):
        return None
    return _normal(span, error, 1.0 if years or unit is None else 10.0**unit.power, sigma, settings)


def _normal(span: Span, error: _Error, scale: float, sigma: float | None, settings: Settings) -> Span:
    counted = settings.sigma if sigma is None else sigma
    plus, minus = (_size(amount, error, span, settings) * scale for amount in (error.plus, error.minus))
    if plus == 0 and minus == 0:
        raise DateRefused("states an error of 0, which no dating has; leave it out, or give its true size")
    late, early = (minus, plus) if span.back else (plus, minus)
    how = f"± {plus:.10g}" if plus == minus else f"+ {plus:.10g} − {minus:.10g}"
    words = f"{span.words.split(', ±')[0]} {how} years at {counted:.4g} sigma, normal; bounds at 95 %"
    if span.back:
        words += f", counted back{span.words.partition(', counted back')[2]}"
    earliest, latest = span.best - early * Z975 / counted, span.best + late * Z975 / counted
    return span._replace(
        kind="error",
        earliest=earliest,
        latest=latest,
        words=words,
        low=earliest,
        high=latest,
        shape="normal",
        last=0.0,
        uses=("sigma",) if sigma is None else (),
    )


def _size(amount: str, error: _Error, span: Span, settings: Settings) -> float:
    """The error in units of the date."""
    head = split_number(error.head, settings.decimal)
    found = split_number(amount, settings.decimal)
    if found is None or found[1]:
        raise DateRefused(
            f"has an error {amount!r} that is no number; the decimal mark of this list is {settings.decimal!r} (setting decimal)"
        )
    size: Number = found[0]
    if error.form == "percent":
        if head is None or not span.back:
            raise DateRefused("gives an error in per cent of a calendar year, which has no natural zero; give it in years")
        return abs(head[0].value()) * size.value() / 100
    if error.form == "digits":
        return size.value(head[0].last) if head is not None else size.value()
    return size.value()


NOTATION = Notation(
    "plus-minus",
    "66.0 ± 0.05 Ma",
    "a date with its error: ±, +/-, asymmetric, or of the last digits in brackets",
    read,
    level=2,
    marks=frozenset("±+)"),
)
