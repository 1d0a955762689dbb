# SPDX-License-Identifier: Apache-2.0
"""A question mark behind a date that ISO 8601-2 does not write: 44 BCE?, 66 Ma (?). It qualifies and moves no bound."""

from __future__ import annotations

import re

from ..settings import Settings
from ..span import Span
from .notation import Notation, Part

_MARK = re.compile(r" ?\(?\?\)?\Z")


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """The date without its mark, with a remark."""
    found = _MARK.search(text)
    if found is None or not found.start() or text[found.start() - 1] in "?~%":
        return None
    span = part(text[: found.start()], NOTATION.level)
    return None if span is None else span._replace(remarks=(*span.remarks, "marked uncertain; the bounds are those of the date itself"))


NOTATION = Notation("uncertain", "44 BCE?", "a question mark behind a date, which moves no bound", read, level=5, marks=frozenset("?"))
