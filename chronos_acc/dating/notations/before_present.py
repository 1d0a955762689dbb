# SPDX-License-Identifier: Apache-2.0
"""Ages with a fixed zero: BP and cal BP from 1950, b2k from 2000; with ka, Ma or in words too."""

from __future__ import annotations

from ..number import split_number
from ..settings import Settings
from ..span import Span
from ..units import find_unit
from .ago import age
from .notation import Notation, Part


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """A number with BP, cal BP or b2k."""
    found = split_number(text, settings.decimal)
    if found is None or not found[1]:
        return None
    unit = find_unit(found[1])
    return age(found[0], unit, settings) if unit is not None and unit.zero in ("1950", "2000") else None


NOTATION = Notation("before present", "11650 cal BP", "an age counted back from 1950 (BP) or 2000 (b2k)", read, marks=frozenset("bB"))
