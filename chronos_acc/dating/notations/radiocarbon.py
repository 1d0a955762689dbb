# SPDX-License-Identifier: Apache-2.0
"""Radiocarbon years (14C BP, rcybp): refused, since they are no calendar years, unless the list says that they are calibrated."""

from __future__ import annotations

import re

from ...errors import DateRefused
from ..settings import Settings
from ..span import Span
from .notation import Notation, Part

_MARK = re.compile(
    r"(?<![A-Za-z0-9])(?:\(?(?:14[- ]?c|c[- ]?14|uncal(?:ibrated|\.)?|conventional|raw)\)?"
    r"|radiocarbon(?: age)?|rcy?(?= ?bp)|rcy?bp|rcya)(?![A-Za-z0-9])",
    re.IGNORECASE,
)


def read(text: str, settings: Settings, part: Part) -> Span | None:
    """Any text that speaks of radiocarbon; with ``radiocarbon = "cal"`` what remains is read as BP."""
    if not _MARK.search(text):
        return None
    if settings.radiocarbon is None:
        raise DateRefused(
            'is in uncalibrated radiocarbon years, which are no calendar years; calibrate it, or set radiocarbon = "cal" if the list did'
        )
    rest = " ".join(_MARK.sub(lambda found: "BP" if found[0].lower().endswith(("bp", "rcya")) else " ", text).split())
    rest = rest if re.search(r"\bBP\b|before present", rest, re.IGNORECASE) else f"{rest} BP"
    span = part(rest, NOTATION.level)
    return (
        None
        if span is None
        else span._replace(
            words=f"{span.words}, calibrated by the list's word", remarks=(*span.remarks, "marked as radiocarbon; read as calibrated")
        )
    )


NOTATION = Notation(
    "radiocarbon", "4500 14C BP", "radiocarbon years, which are refused unless the list says how", read, level=6, marks=frozenset("cCwW")
)
