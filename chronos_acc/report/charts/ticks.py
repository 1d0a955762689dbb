# SPDX-License-Identifier: Apache-2.0
"""Where the ticks of an axis stand, and what is written at them."""

from __future__ import annotations

import math

from .. import numbers
from .data import Axis

_AGE = ((1e9, "Ga"), (1e6, "Ma"), (1e3, "ka"))
_LENGTH = ((1e9, "Gyr"), (1e6, "Myr"), (1e3, "kyr"))


def ticks(axis: Axis, most: int) -> list[tuple[float, str]]:
    """Up to ``most`` round values inside the limits with their texts, from low to high."""
    if axis.scale == "names":
        return [(float(i), name) for i, name in enumerate(axis.names)]
    values = _log(axis, most) if axis.scale == "log" else _linear(axis, most)
    step = values[1] - values[0] if len(values) > 1 else 0.0
    return [(v, text(axis, v, step)) for v in values]


def text(axis: Axis, value: float, step: float = 0.0) -> str:
    """A tick as written: 10 ka, 100 Myr, 500 BCE, 25 %."""
    if axis.style == "share":
        return f"{100 * value:.3g} %"
    if axis.style == "year":
        year = round(value)
        if abs(value) >= 1e5:
            return numbers.when(value)
        return f"{year}" if year >= 1 else f"{1 - year} BCE" if year < 0 else "1 BCE"
    if axis.style in ("age", "length"):
        for size, unit in _AGE if axis.style == "age" else _LENGTH:
            if abs(value) >= size * 0.9999999:
                return f"{value / size:.4g} {unit}"
        return f"{value:.4g}" if value >= 1e-3 else numbers.number(value, 3)
    if axis.scale == "linear" and step:
        digits = max(0, -math.floor(math.log10(step) + 1e-9))
        if digits <= 6 and abs(value) < 1e6:
            return f"{value:,.{digits}f}".replace("-", "−") if value else "0"
    return numbers.number(value, 3)


def _log(axis: Axis, most: int) -> list[float]:
    low, high = math.log10(axis.low), math.log10(axis.high)
    decades = range(math.ceil(low - 1e-9), math.floor(high + 1e-9) + 1)
    for steps in ((1, 2, 5), (1, 3)):  # finer than decades where these are few
        fine = [m * 10.0**d for d in range(math.floor(low), math.floor(high) + 1) for m in steps]
        fine = [v for v in fine if axis.low <= v * (1 + 1e-9) and v <= axis.high * (1 + 1e-9)]
        if len(fine) <= max(most, 2) and len(decades) <= 3:
            return fine
    stride = next(s for s in (1, 2, 3, 4, 6, 10, 20, 50, 100, 400) if len(decades) <= max(most, 1) * s)
    return [10.0**d for d in decades if d % stride == 0] or [10.0**d for d in decades]


def _linear(axis: Axis, most: int) -> list[float]:
    rough = (axis.high - axis.low) / max(most, 1)
    size = 10.0 ** math.floor(math.log10(rough))
    step = next(m * size for m in (1, 2, 5, 10) if m * size >= rough * (1 - 1e-9))
    first = math.ceil(axis.low / step - 1e-9)
    last = math.floor(axis.high / step + 1e-9)
    return [k * step for k in range(first, last + 1)]
