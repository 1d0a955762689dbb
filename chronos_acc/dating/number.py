# SPDX-License-Identifier: Apache-2.0
"""Numbers as people write them: grouped, decimal, with powers of ten; exact to the last written digit."""

from __future__ import annotations

import re
from functools import lru_cache
from typing import Literal, NamedTuple

_TAIL = r"(?P<power>[eE][+-]?[0-9]{1,3}|\s?[x×*·]\s?10\s?(?:\^|\*\*)\s?[0-9]{1,2})?"


def _pattern(mark: str, group: str) -> str:
    grouped = rf"[0-9]{{1,3}}(?:{group}[0-9]{{3}})+(?![0-9])|[0-9]{{1,3}}(?: [0-9]{{3}})+(?![0-9])|[0-9]{{1,3}}(?:'[0-9]{{3}})+(?![0-9])"
    return rf"(?P<sign>[+-])?(?P<whole>{grouped}|[0-9]+)?(?:{mark}(?P<places>[0-9]+))?" + _TAIL


POINT = _pattern(r"\.", ",")
COMMA = _pattern(",", r"\.")
_POINT, _COMMA = re.compile(POINT), re.compile(COMMA)
_BARE_POWER = re.compile(r"10\s?(?:\^|\*\*)\s?([0-9]{1,2})(?![0-9])")
_DIGITS = re.compile(r"[0-9]+\Z")


class Number(NamedTuple):
    """A written number: sign, digits (no grouping, point as mark), power of ten, and the power of its last written digit."""

    sign: str
    digits: str
    power: int
    last: int

    @property
    def whole(self) -> bool:
        """Whether it is a whole number without a power of ten, so that it can be a year as a calendar counts them."""
        return self.last == 0 and self.power == 0

    def value(self, power: int = 0) -> float:
        """The number times 10**power, signed, converted once: 66.04 Ma is the float nearest to 66,040,000. Too large is inf."""
        return float(f"{'-' if self.sign == '-' else ''}{self.digits}e{self.power + power}")

    def significant(self, at_least: Literal["all"] | int) -> int:
        """The power of ten of the last significant digit: trailing zeros of a whole number are rounding, but ``at_least`` digits count."""
        if at_least == "all" or not self.whole:
            return self.last
        stripped = self.digits.lstrip("0")
        zeros = len(stripped) - len(stripped.rstrip("0"))
        return max(0, min(zeros, len(stripped) - at_least))


@lru_cache(maxsize=64)  # the notations ask for the same text one after another
def split_number(text: str, decimal: str = ".") -> tuple[Number, str] | None:
    """A number at the start of a text, and what follows it, without the space between; None when the text begins otherwise."""
    if _DIGITS.match(text):
        return Number("", text, 0, 0), ""
    bare = _BARE_POWER.match(text)
    if bare:
        power = int(bare[1])
        return Number("", "1", power, power), text[bare.end() :].lstrip()
    found = (_POINT if decimal == "." else _COMMA).match(text)
    if not found:
        return None
    sign, whole, places, power_text = found.groups()
    if whole is None and places is None:
        return None
    rest = text[found.end() :]
    if rest and (
        rest[0].isdigit() or (rest[0] in ".,'" and rest[1:2].isdigit())
    ):  # "66,04", "1,23,456": the mark is not what the list says
        return None
    power = int(re.split(r"[eE^*]|\*\*", power_text)[-1]) if power_text else 0
    digits = (whole or "0") if whole is None or whole.isdigit() else re.sub("[^0-9]", "", whole)
    if places:
        return Number(sign or "", f"{digits}.{places}", power, power - len(places)), rest.lstrip()
    return Number(sign or "", digits, power, power), rest.lstrip()


MANTISSA = {mark: re.compile(pattern.removesuffix(_TAIL)) for mark, pattern in ((".", POINT), (",", COMMA))}
"""A number without its power of ten, by decimal mark; where two numbers share a power ("1.5–1.2 × 10^9") the tail starts behind it."""
