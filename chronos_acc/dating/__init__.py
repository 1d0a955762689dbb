# SPDX-License-Identifier: Apache-2.0
"""Dating: what compilers write, to decimal years with bounds. Pure: only the standard library, no files but the period table."""

from __future__ import annotations

from .calendar import decimal_year, to_era
from .dating import Dating, Reading
from .notations import NOTATIONS, Notation
from .periods import Period, Periods, read_periods, shipped_periods
from .plain import plain
from .reader import read
from .row import mentions_radiocarbon, read_row
from .settings import SETTINGS, Setting, Settings, settings_from
from .units import ASSUMED_YEAR, UNITS, Unit, find_unit
from .writing import explain, write


def notations() -> tuple[str, ...]:
    """The names under which a reading can come: each notation, those with an assumed compile year, and bounds from columns alone."""
    names = tuple(notation.name for notation in NOTATIONS)
    return (*names, "columns", *(f"{name}, from {ASSUMED_YEAR:.0f}" for name in (*names, "columns")))


__all__ = [
    "ASSUMED_YEAR",
    "NOTATIONS",
    "SETTINGS",
    "UNITS",
    "Dating",
    "Notation",
    "Period",
    "Periods",
    "Reading",
    "Setting",
    "Settings",
    "Unit",
    "decimal_year",
    "explain",
    "find_unit",
    "mentions_radiocarbon",
    "notations",
    "plain",
    "read",
    "read_periods",
    "read_row",
    "settings_from",
    "shipped_periods",
    "to_era",
    "write",
]
