# SPDX-License-Identifier: Apache-2.0
"""Units that count years back, and eras: one table of their spellings, for texts, unit columns and sheets alike."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import product
from typing import Literal

Zero = Literal["compiled", "1950", "2000", "ce", "bce", "radiocarbon"]


@dataclass(frozen=True, slots=True)
class Unit:
    """What stands behind a number: 10**power years, and where it is counted from.

    ``zero``: "compiled" (the start of the compile year), "1950" (BP) and "2000" (b2k) count back; "ce" and "bce" are eras, calendar years;
    "radiocarbon" is uncalibrated. ``name`` is the short spelling that stands in the words of a reading.
    """

    name: str
    power: int
    zero: Zero

    @property
    def back(self) -> bool:
        """Whether it counts years back (everything but the eras)."""
        return self.zero not in ("ce", "bce")


BP_YEAR = 1950.0
"""BP counts from 1950 (Stuiver & Polach 1977)."""
B2K_YEAR = 2000.0
"""b2k counts from 2000 (Rasmussen et al. 2006)."""
ASSUMED_YEAR = 2000.0
"""Where an age is counted from when the compile year is unknown and cannot matter."""
MATTERS_BELOW = 1000.0
"""Half-width in years below which an age without a compile year is refused."""

# 1 a is one year, ka 10**3, Ma 10**6, Ga 10**9: Holden et al. 2011, Pure Appl. Chem. 83:1159-1162
_SHORT = {
    0: ("a", "yr", "yrs", "ya"),
    3: ("ka", "kyr", "kyrs", "kya", "ky"),
    6: ("ma", "myr", "myrs", "mya", "my"),
    9: ("ga", "gyr", "gyrs", "gya", "gy", "bya", "byr"),
}
_LONG = {0: ("",), 3: ("thousand", "k"), 6: ("million", "mio", "mln"), 9: ("billion", "bn")}
_NAMES = {0: "a", 3: "ka", 6: "Ma", 9: "Ga"}
_YEARS = ("years", "year", "yr", "yrs")
_AGO = ("ago", "before now", "before today", "old")
_BP = (
    "bp",
    "b p",
    "before present",
    "cal bp",
    "calbp",
    "bp cal",
    "bp (cal)",
    "cal before present",
    "calibrated bp",
    "bp calibrated",
    "calibrated before present",
)
_B2K = ("b2k", "before 2000", "before 2k")
_RAW = (
    "14c bp",
    "c14 bp",
    "14c",
    "rcybp",
    "rcbp",
    "c-14 bp",
    "bp uncal",
    "uncal bp",
    "bp (uncal)",
    "bp uncalibrated",
    "uncalibrated bp",
    "radiocarbon bp",
    "radiocarbon before present",
    "radiocarbon",
    "14c before present",
    "bp (14c)",
    "bp 14c",
    "conventional bp",
)
_CE = ("ce", "ad", "c e", "a d", "cal ce", "cal ad", "ce cal", "ad cal")
_BCE = ("bce", "bc", "b c e", "b c", "cal bce", "cal bc", "bce cal", "bc cal")


def _table() -> dict[str, Unit]:
    table: dict[str, Unit] = {}

    def put(unit: Unit, *spellings: str) -> None:
        for spelling in spellings:
            table.setdefault(" ".join(spelling.split()), unit)
        table.setdefault(unit.name, unit)  # the usual spelling is found at once

    for power, name in _NAMES.items():
        compiled, bp, b2k = (
            Unit(name, power, "compiled"),
            Unit(f"{name} BP" if power else "BP", power, "1950"),
            Unit(f"{name} b2k" if power else "b2k", power, "2000"),
        )
        raw = Unit(f"{name} 14C BP" if power else "14C BP", power, "radiocarbon")
        counted = [f"{long} {years}" for long, years in product(_LONG[power], _YEARS)]
        put(compiled, *_SHORT[power], *(f"{unit} {ago}" for unit, ago in product([*_SHORT[power], *counted], _AGO)))
        if power:  # "3 million years" can only be an age; "300 years" may be a length of time
            put(compiled, *counted)
        for zero, endings in ((bp, _BP), (b2k, _B2K), (raw, _RAW)):
            bare = [f"{long} {ending}" for long, ending in product(_LONG[power], endings)]
            put(zero, *bare, *(f"{unit} {ending}" for unit, ending in product([*_SHORT[power], *counted], endings)))
            for ending in endings:  # "cal ka BP", "14C yr BP", "cal kyr b2k"
                first, _, rest = ending.partition(" ")
                if rest:
                    put(zero, *(f"{first} {unit} {rest}" for unit in [*_SHORT[power], *counted]))
            put(zero, *(f"cal {unit} b2k" for unit in _SHORT[power] if zero is b2k))
        for zero_name, eras in (("CE", _CE), ("BCE", _BCE)):
            if power:
                put(
                    Unit(f"{_LONG[power][0]} {zero_name}", power, "ce" if zero_name == "CE" else "bce"),
                    *(f"{long} {era}" for long, era in product(_LONG[power], eras)),
                )
            else:
                put(Unit(zero_name, 0, "ce" if zero_name == "CE" else "bce"), *eras)
    for joined in ("ybp", "yrbp"):
        put(table["bp"], joined)
    put(table["ma bp"], "mybp")
    put(table["ka bp"], "kybp")
    return table


UNITS: dict[str, Unit] = _table()
"""Spelling (lower case, without full stops, single spaces) to unit. The spellings are those that compilers use; see ``find_unit``."""


def tidy_unit(text: str) -> str:
    """A spelling as UNITS holds it: lower case, no full stops, single spaces."""
    plain = text.lower()
    if "." in plain:  # "B.C.E." closes up, "cal. BP" and "m.y. ago" keep their words apart
        plain = plain.replace(".", "")
    return " ".join(plain.split())


def find_unit(text: str) -> Unit | None:
    """The unit that a spelling stands for, or None."""
    return UNITS.get(text) or UNITS.get(tidy_unit(text))
