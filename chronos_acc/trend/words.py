# SPDX-License-Identifier: Apache-2.0
"""Numbers in sentences: few significant digits, years with their order of magnitude, large counts as powers of ten."""

from __future__ import annotations

import math

SUPERSCRIPT = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
_UNITS = ((1e9, "billion years"), (1e6, "million years"), (1e4, "thousand years"))


def digits(value: float, significant: int = 2) -> str:
    """A plain number with so many significant digits; a true minus sign; powers of ten from 10⁷ on and below 10⁻⁴."""
    if not math.isfinite(value):
        return "unbounded"
    if value == 0:
        return "0"
    size = abs(value)
    sign = "−" if value < 0 else ""
    if size >= 1e7 or size < 1e-4:
        power = math.floor(math.log10(size))
        lead = round(size / 10.0**power, max(significant - 1, 1))
        if lead >= 10:
            lead, power = 1.0, power + 1
        head = "" if lead == 1 else f"{lead:g}×"
        return f"{sign}{head}10{str(power).translate(SUPERSCRIPT)}"
    places = significant - 1 - math.floor(math.log10(size))
    rounded = round(size, places)
    return f"{sign}{rounded:,.{max(places, 0)}f}"


def years(value: float) -> str:
    """A span in years: 34 years, 12 thousand years, 3.4 million years; days below a tenth of a year."""
    for size, name in _UNITS:
        if abs(value) >= size * 0.9995:
            scale = 1e3 if name == "thousand years" else size
            return f"{digits(value / scale)} {name}"
    if abs(value) < 0.1:
        return f"{digits(value * 365.2425)} days"
    text = digits(value, 3 if abs(value) >= 100 else 2)
    return "1 year" if text == "1" else f"{text} years"


def count(value: float) -> str:
    """A number of events: whole below ten thousand, rounded up to a million, a power of ten above."""
    if not math.isfinite(value):
        return "unbounded"
    if value >= 1e6:
        return f"about 10{str(round(math.log10(value))).translate(SUPERSCRIPT)}"
    if value >= 1e4:
        return f"{round(value, 1 - math.floor(math.log10(value))):,.0f}"
    return f"{value:,.0f}"


def percent(share: float) -> str:
    """A share as per cent, two digits, never rounded to 0 or 100 unless it is."""
    value = 100 * share
    if value in (0, 100):
        return f"{value:.0f} %"
    if value > 99.5:
        return "over 99 %"
    if value < 1e-4:
        return "under 0.0001 %"
    return f"{digits(value)} %"


def p(value: float) -> str:
    """A p-value for a sentence."""
    return "p < 0.001" if value < 0.001 else f"p = {value:.2f}" if value >= 0.1 else f"p = {value:.3f}"


def span(low: float | None, high: float | None) -> str:
    """An interval of years, the unit said once where both ends share it; None below is 0, None above unbounded."""
    if low is None or high is None:
        return between("0" if low is None else years(low), None if high is None else years(high))
    first, last = years(low), years(high)
    number, _, unit = first.partition(" ")
    return f"{number} to {last}" if last.partition(" ")[2] == unit else f"{first} to {last}"


def between(low: str, high: str | None) -> str:
    """Two ends; None above is unbounded."""
    return f"{low} to {high}" if high is not None else f"{low} upwards, unbounded"


def listed(parts: list[str]) -> str:
    """One, two and three."""
    return parts[0] if len(parts) == 1 else ", ".join(parts[:-1]) + " and " + parts[-1] if parts else ""
