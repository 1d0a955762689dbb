# SPDX-License-Identifier: Apache-2.0
"""Reading a row: the date's text with the columns that a list may keep beside it."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import replace

from ..errors import DateRefused
from .clean import clean
from .dating import Reading
from .number import split_number
from .reader import ends, read, shown, split_unit
from .settings import Settings
from .span import Span, finish, flat, middle
from .units import find_unit

_RADIOCARBON = re.compile(r"(?<![A-Za-z0-9])(?:14[- ]?C|C[- ]?14)(?![A-Za-z0-9])|¹⁴C|radiocarbon|\brcy?bp\b|\buncal", re.IGNORECASE)
_NOTHING = (None,) * 5
_HAS_ERROR = re.compile(r"±|\+ ?/? ?-|\([0-9]+\)|[0-9] ?%")


def mentions_radiocarbon(text: str) -> bool:
    """Whether a text speaks of radiocarbon (14C) or of uncalibrated dates."""
    return bool(_RADIOCARBON.search(text))


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

    ``unit`` and the bounds are read as the date would be, a bound as the end of a range. ``sigma`` is how many standard deviations
    ``plus_minus`` (or the text's own ±) states. Bounds with a date are hard (uniform) when the date's own span holds their middle; else
    they are the 95 % points around the date (normal, two-piece). ``others`` are the row's other cells: a mention of radiocarbon there
    becomes a remark.
    """
    if isinstance(date, str) and date and not others and (unit, sigma, plus_minus, earliest, latest) == _NOTHING:
        return read(date, settings)  # most rows of most lists
    text, low, high, error = _cell(date), _cell(earliest), _cell(latest), _cell(plus_minus)
    unit = _cell(unit)
    if unit is not None and find_unit(unit) is None:
        raise DateRefused(
            f"the unit {shown(unit)} is not known; use one such as a, ka, Ma, Ga, BP, b2k, BCE, CE, or leave it empty for calendar years"
        )
    counted = _cell(sigma)
    if counted is not None:
        settings = replace(settings, sigma=float(_amount("sigma", counted, settings)), given=settings.given | {"sigma"})
    if text is not None and unit is not None:
        _heed_unit(text, unit)
    reading = None
    if text is not None and (error is None or low is not None or high is not None):
        reading = read(text, settings, unit=unit)
    elif text is not None and error is not None:
        reading = _with_error(text, error, unit, settings)
    if low is not None or high is not None:
        reading = _with_bounds(reading, text, low, high, unit, settings)
    if reading is None:
        raise DateRefused("the date is empty; give a date, or an earliest and a latest year, or leave the row out")
    if reading.notation != "radiocarbon" and any(mentions_radiocarbon(cell) for cell in others if cell):
        reading = replace(
            reading, remarks=(*reading.remarks, "another column of the row speaks of radiocarbon; check that the date is calibrated")
        )
    return reading


def _cell(value: object) -> str | None:
    """A cell as text; None when it is empty (NaN is)."""
    if value is None or value != value:
        return None
    return clean(str(int(value)) if isinstance(value, float) and value.is_integer() and abs(value) < 1e15 else str(value)) or None


def _amount(name: str, value: str, settings: Settings) -> str:
    """A cell that must hold one number above 0, in digits with a decimal point."""
    found = split_number(value, settings.decimal)
    if found is None or found[1] or found[0].sign == "-" or not 0 < found[0].value() < 1e15:
        raise DateRefused(f"{name} {shown(value)} is no amount; give one number above 0")
    return f"{found[0].digits}e{found[0].power}" if found[0].power else found[0].digits


def _heed_unit(text: str, unit: str) -> None:
    """Refuses a text whose own unit is not that of the row."""
    own, column = find_unit(split_unit(text)), find_unit(unit)
    if own is not None and column is not None and (own.power, own.zero) != (column.power, column.zero):
        raise DateRefused(f"{shown(text)} has the unit {own.name}, and the row's unit is {column.name}; keep the one that is true")


def _with_error(text: str, error: str, unit: str | None, settings: Settings) -> Reading:
    """The date of the text with the error of its column, in the date's unit."""
    amount = _amount("plus_minus", error, settings)
    if _HAS_ERROR.search(text):
        stated = re.search(r"(?:±|\+ ?/? ?-) ?([0-9.,]+)", text)
        number = split_number(stated[1], settings.decimal) if stated else None
        if number is None or number[0].value() != float(amount):
            raise DateRefused(f"{shown(text)} states an error of its own, and plus_minus says {error}; keep the one that is true")
        return read(text, settings, unit=unit)
    if settings.decimal == ",":
        amount = amount.replace(".", ",")
    try:
        return read(f"{text} ± {amount}", settings, unit=unit)
    except DateRefused as refusal:
        reason = str(refusal).partition(" ± ")[2].partition("' ")[2]
        raise DateRefused(
            f"{shown(text)} with plus_minus {error}: "
            f"{reason if 'no notation' not in reason else 'an error needs a single number as its date; give bounds'}"
        ) from None


def _with_bounds(
    reading: Reading | None, text: str | None, low: str | None, high: str | None, unit: str | None, settings: Settings
) -> Reading:
    """Bounds of columns of their own; one that is missing is the text's."""
    first, last = (None if bound is None else _end(name, bound, unit, settings) for name, bound in (("earliest", low), ("latest", high)))
    if (first is None or last is None) and reading is None:
        missing, there = ("latest", f"earliest {low}") if last is None else ("earliest", f"latest {high}")
        raise DateRefused(f"{there} stands alone: no date and no {missing}; give the other bound or a date")
    start = first.low if first else reading.dating.earliest if reading else 0.0
    end = last.high if last else reading.dating.latest if reading else 0.0
    if start > end:
        raise DateRefused(
            f"earliest {low if low is not None else text} lies after latest {high if high is not None else text}; "
            "an age's earlier bound is the larger number"
        )
    assumed = bool((first and first.assumed) or (last and last.assumed))
    remarks = tuple(remark for one in (first, last) if one for remark in one.remarks)
    span = flat("range", start, end, f"bounds {start:.12g} and {end:.12g} from the row's columns", (), remarks)
    if reading is not None:
        own = reading.dating
        if own.earliest > end or own.latest < start:
            raise DateRefused(
                f"{shown(text or '')} lies outside the row's bounds {start:.12g} to {end:.12g}; check the date and the bounds"
            )
        centre = middle(start, end)
        if not own.earliest <= centre <= own.latest:
            best = min(max(own.best, start), end)
            span = span._replace(
                best=best,
                shape="normal",
                words=f"{reading.words}, with bounds {start:.12g} and {end:.12g} from the row's columns as 95 % points",
            )
    return finish(span._replace(assumed=assumed), "columns" if reading is None else reading.notation.partition(", from ")[0], settings)


def _end(name: str, text: str, unit: str | None, settings: Settings) -> Span:
    """A bound as the end of a range: a number as written, a year or day with all of it."""
    try:
        return ends(text, settings, unit=unit)
    except DateRefused as refusal:
        raise DateRefused(f"{name} {refusal}") from None
