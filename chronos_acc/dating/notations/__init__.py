"""The family of notations. Each is tried on every text; two that read a text to different bounds make it ambiguous."""

from __future__ import annotations

from . import ago, before_present, era, year
from .notation import Notation, Part

NOTATIONS: tuple[Notation, ...] = tuple(
    module.NOTATION
    for module in (
        year,
        era,
        ago,
        before_present,
    )
)
"""All notations, in the order in which they are tried and named."""

__all__ = ["NOTATIONS", "Notation", "Part"]
