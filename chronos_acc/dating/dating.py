# SPDX-License-Identifier: Apache-2.0
"""What a date text becomes: a Dating, with the words and rules that led to it."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Literal

from ..errors import DateRefused

Shape = Literal["uniform", "normal"]
Z975 = 1.959963984540054  # the 97.5 % point of the standard normal


@dataclass(frozen=True, slots=True)
class Dating:
    """When something happened, in decimal years (proleptic Gregorian, astronomical: 1 BCE is 0).

    ``best`` is the median. ``earliest`` and ``latest`` are the bounds of a uniform dating and the 2.5 and 97.5 % points
    of a normal one, which is two-piece: the sd of each side is its half-width / 1.96.
    """

    earliest: float
    best: float
    latest: float
    shape: Shape = "uniform"

    def __post_init__(self) -> None:
        if not all(map(math.isfinite, (self.earliest, self.best, self.latest))):
            raise DateRefused("a dating needs finite bounds; give an earliest and a latest year")
        if not self.earliest <= self.best <= self.latest:
            raise DateRefused(f"bounds out of order: {self.earliest!r}, {self.best!r}, {self.latest!r}; earliest comes first")

    @property
    def half_width(self) -> float:
        """Half the distance between the bounds, in years."""
        return (self.latest - self.earliest) / 2


@dataclass(frozen=True, slots=True)
class Reading:
    """A dating, the notation that read it, and how.

    ``notation`` names the member of the family; ``words`` say in a sentence how the text was understood;
    ``defaults`` name the settings whose default was used (counted once per list in the notes of a load);
    ``remarks`` are things a person should know about this one text (a bound that was cut, a reference year assumed).
    """

    dating: Dating
    notation: str
    words: str = ""
    defaults: tuple[str, ...] = ()
    remarks: tuple[str, ...] = field(default=())
