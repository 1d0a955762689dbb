# SPDX-License-Identifier: Apache-2.0
"""The family of notations. Each is tried on every text; two that read a text to different bounds make it ambiguous."""

from __future__ import annotations

from . import (
    ago,
    before_present,
    century,
    circa,
    credible,
    day_time,
    decade,
    edtf,
    era,
    limit,
    named_day,
    numeric_day,
    part,
    period,
    plus_minus,
    radiocarbon,
    range,
    uncertain,
    year,
)
from .notation import Notation, Part

NOTATIONS: tuple[Notation, ...] = (
    year.NOTATION,
    era.NOTATION,
    ago.NOTATION,
    before_present.NOTATION,
    edtf.NOTATION,
    named_day.NOTATION,
    numeric_day.NOTATION,
    day_time.NOTATION,
    decade.NOTATION,
    century.NOTATION,
    period.NOTATION,
    part.NOTATION,
    plus_minus.NOTATION,
    credible.NOTATION,
    circa.NOTATION,
    range.NOTATION,
    limit.NOTATION,
    uncertain.NOTATION,
    radiocarbon.NOTATION,
)
"""All notations, in the order in which they are tried and named."""

__all__ = ["NOTATIONS", "Notation", "Part"]
