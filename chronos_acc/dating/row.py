"""Reading a row: the date's text with the columns that a list may keep beside it."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import replace

from ..errors import DateRefused
from .clean import clean
from .dating import Dating, Reading
from .number import split_number
from .reader import read, shown, takes_unit
from .settings import Settings
from .units import find_unit

_RADIOCARBON = re.compile(r"(?<![A-Za-z0-9])(?:14[- ]?C|C[- ]?14)(?![A-Za-z0-9])|¹⁴C|radiocarbon|\brcy?bp\b|\buncal", re.IGNORECASE)
_UNIT_AT_END = re.compile(r"[^\W\d_][\w .()]*\Z")


def mentions_radiocarbon(text: str) -> bool:
    """Whether a text speaks of radiocarbon (14C) or of uncalibrated dates."""
    return bool(_RADIOCARBON.search(text))


def _given(value: str | float | None) -> str | None:
    """A cell as text; None when it is empty."""
    if value is None or value != value:
        return None
    text = clean(repr(value) if isinstance(value, float) else str(value))
    return text or None


def _amount(name: str, value: str, settings: Settings) -> str:
    """A cell that must hold one number above 0, in plain digits."""
    found = split_number(value, settings.decimal)
    if found is None or found[1] or found[0].sign == "-" or not 0 < found[0].value() < 1e15:
        raise DateRefused(f"has {name} {shown(value)}; give a number above 0")
    return found[0].digits + (f"e{found[0].power}" if found[0].power else "")


def _bound(value: str, unit: str | None, settings: Settings, late: bool) -> tuple[float, Reading]:
    """A bound from a column of its own, as the end of a range would be read."""
    mark = settings.decimal
    word = unit or settings.unit or ("years ago" if settings.counted == "ago" else None)
    found = split_number(value, mark)
    reading = read(value, settings, unit=unit)
    if found and not found[1] and word:
        found_unit = find_unit(word)
    elif found:
        found_unit = find_unit(found[1]) if found[1] else None
    else:
        return (reading.dating.latest if late else reading.dating.earliest), reading
    exact = (found_unit is not None and found_unit.back) or (found_unit is None and not found[1] and not found[0].whole)
    if exact:
        return reading.dating.best, reading
    if found_unit is not None and found_unit.zero == "bce":
        return reading.dating.best + (0.5 if late else -0.5), reading
    return (reading.dating.latest if late else reading.dating.earliest), reading


def read_row(
    date: str | float | None,
    *,
    unit: str | None = None,
    sigma: str | float | None = None,
    plus_minus: str | float | None = None,
    earliest: str | float | None = None,
    latest: str | float | None = None,
    settings: Settings = Settings(),
    others: Iterable[str] = (),
) -> Reading:
    """The dating of a row. Bounds in columns beat ``plus_minus``, which beats the text; two that contradict are refused (DateRefused).

    ``sigma`` is how many standard deviations plus_minus (or the text's own ±) states. With bounds and a date, the bounds are taken as hard
    (uniform) when the date's own span holds their middle, else as the 95 % points around the date (normal, two-piece). ``others`` are the row's
    other cells: a mention of radiocarbon there becomes a remark.
    """
    texts = {"date": _given(date), "plus_minus": _given(plus_minus), "earliest": _given(earliest), "latest": _given(latest)}
    return read(texts["date"] or "", settings, unit=unit)
