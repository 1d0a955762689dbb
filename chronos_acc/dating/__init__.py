"""Dating: what compilers write, to decimal years with bounds. Pure: only the standard library, no files but the period table."""

from __future__ import annotations

from .dating import Dating, Reading
from .periods import Period, Periods, read_periods, shipped_periods
from .reader import read
from .row import mentions_radiocarbon, read_row
from .settings import SETTINGS, Setting, Settings, settings_from

__all__ = [
    "SETTINGS",
    "Dating",
    "Period",
    "Periods",
    "Reading",
    "Setting",
    "Settings",
    "mentions_radiocarbon",
    "read",
    "read_periods",
    "read_row",
    "settings_from",
    "shipped_periods",
]
