# SPDX-License-Identifier: Apache-2.0
"""Numbers as a person reads them. Full precision stays in the frames; rounding happens here only."""

from __future__ import annotations

import math
from typing import Any

_SUPERSCRIPT = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
_SPANS = ((1e9, 1e9, "Gyr"), (1e6, 1e6, "Myr"), (1e4, 1e3, "kyr"))  # from this length on, in units of so many years
_AGES = ((1e9, 1e9, "Ga"), (1e6, 1e6, "Ma"), (1.5e4, 1e3, "ka"))


def is_missing(value: Any) -> bool:
    """None, NaN and pandas' NA stand for "not computed"."""
    if value is None:
        return True
    try:
        return bool(value != value)
    except (TypeError, ValueError):  # pandas.NA has no truth value
        return True


def number(value: Any, digits: int = 4) -> str:
    """``digits`` significant digits, thousands grouped, powers of ten beyond a million or below a thousandth: 0.01836, 1,234, 2.1×10⁹."""
    if is_missing(value):
        return "–"
    x = float(value)
    if math.isinf(x):
        return "unbounded"
    if x == 0:
        return "0"
    exponent = math.floor(math.log10(abs(x)))
    if exponent >= 6 or exponent < -4:
        mantissa = f"{x / 10.0**exponent:.{max(digits - 2, 1)}f}"
        if abs(float(mantissa)) >= 10:  # 9.996 rounds up
            exponent += 1
            mantissa = f"{x / 10.0**exponent:.{max(digits - 2, 1)}f}"
        return f"{mantissa}×10{str(exponent).translate(_SUPERSCRIPT)}".replace("-", "−", 1)
    text = f"{x:,.{max(digits - 1 - exponent, 0)}f}"
    if "." in text and exponent >= digits - 1:
        text = text.rstrip("0").rstrip(".")
    return text.replace("-", "−")


def count(value: Any) -> str:
    """A whole number with grouped thousands; above a million as a power of ten."""
    if is_missing(value):
        return "–"
    x = float(value)
    return f"{x:,.0f}".replace("-", "−") if abs(x) < 1e7 else number(x, 3)


def p_value(value: Any) -> str:
    """Three decimals, or "<.001"."""
    if is_missing(value):
        return "–"
    x = float(value)
    return "<.001" if x < 0.001 else f"{x:.3f}".replace("0.", ".", 1) if x < 1 else "1"


def share(value: Any) -> str:
    """A share as per cent: 0.034 is 3.4 %."""
    if is_missing(value):
        return "–"
    x = 100 * float(value)
    if x != 0 and abs(x) < 0.01:
        return f"{number(x, 2)} %"
    return (f"{x:.0f} %" if abs(x) >= 10 or x == 0 else f"{x:.2g} %").replace("-", "−")


def span(value: Any) -> str:
    """A length of time in years, with its unit: 12.4 yr, 1,250 yr, 3.20 Myr; below a year in days."""
    if is_missing(value):
        return "–"
    x = float(value)
    if math.isinf(x):
        return "unbounded"
    for begin, size, unit in _SPANS:
        if abs(x) >= begin:
            return f"{number(x / size, 3)} {unit}"
    if 0 < abs(x) < 0.5:
        return f"{number(x * 365.2425, 3)} d"
    return f"{number(x, 4 if abs(x) >= 1000 else 3)} yr"


def when(value: Any) -> str:
    """A decimal year for reading: 1851.2, 449 BCE, 12.1 ka, 66.02 Ma (ages count back from 2000 and are rounded)."""
    if is_missing(value):
        return "–"
    x = float(value)
    if math.isinf(x):
        return "unbounded"
    for begin, size, unit in _AGES:
        if 2000 - x >= begin:
            return f"{number((2000 - x) / size, 4)} {unit}"
    if x < 1:
        return f"{1 - math.floor(x):,.0f} BCE"
    tenth = round(x, 1)
    return f"{tenth:.1f}" if x >= 1000 else f"{math.floor(x)} CE"


def truth(value: Any) -> str:
    """yes or no."""
    return "–" if is_missing(value) else "yes" if value else "no"
