# SPDX-License-Identifier: Apache-2.0
"""Named periods of the list's period table or the shipped one: Cretaceous, the Holocene, Late Cretaceous where the table has it."""

from __future__ import annotations

from math import inf

from ...errors import DateRefused
from ..periods import shipped_periods
from ..settings import Settings
from ..span import Span, flat
from .notation import Notation, Part


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """A name of the period table, with the bounds of its row."""
    if text.upper() == text.lower() and text.isascii():
        return None  # no letter, no name
    table = settings.periods or shipped_periods()
    row = table.find(text)
    if row is None:
        return None
    ends = [part(f"{bound} {row.unit}".strip(), 1) for bound in (row.earliest, row.latest)]
    if ends[0] is None or ends[1] is None or not -inf < ends[0].low < ends[1].high < inf:
        raise DateRefused(
            f"has bounds {row.earliest} and {row.latest} {row.unit} in the period table {table.origin}, "
            "which cannot be read in this order; mend the table"
        )
    words = f"{row.name}, {row.earliest} to {row.latest} {row.unit}".rstrip() + f" ({row.source})"
    return flat("period", ends[0].low, ends[1].high, words)._replace(assumed=ends[0].assumed or ends[1].assumed)


NOTATION = Notation("period", "Cretaceous", "a named period of the period table", read, marks=frozenset())
