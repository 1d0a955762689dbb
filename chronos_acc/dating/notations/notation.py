# SPDX-License-Identifier: Apache-2.0
"""The shape of a member of the family of notations."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from ..settings import Settings
from ..span import Span

DIGITS = frozenset("0123456789")
Part = Callable[[str, int], "Span | None"]
"""``part(text, level)``: how the notations below a level read a part of a text; None when none does."""


@dataclass(frozen=True, slots=True)
class Notation:
    """One way of writing dates.

    ``read(text, settings, part)`` gives a Span, None when the text is not of this notation, or raises DateRefused when it is and says
    something impossible (the reason reads on from the text: "names a year 0 …"). ``level`` orders composition: a notation that is made
    of others hands their texts to ``part`` with its own level, and only notations below it answer. A text of this notation has one of
    the characters in ``marks`` at least (none: it is always asked), so that the others need not be asked: reading a million texts in
    seconds rests on this.
    """

    name: str
    example: str
    question: str
    read: Callable[[str, Settings, Part], Span | None]
    level: int = 0
    marks: frozenset[str] = DIGITS
