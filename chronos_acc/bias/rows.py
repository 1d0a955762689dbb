# SPDX-License-Identifier: Apache-2.0
"""Rows of checks: the rule for ``stands``, and rows beside an exact or a simulated null."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import numpy as np
import numpy.typing as npt

from ..record import Record
from ..trend.words import digits
from .check import Row
from .growth import Growth, band_of, growth, rank_p

Floats = npt.NDArray[np.float64]
LEVEL = 0.05
ENOUGH = 8  # counted events from which a row may speak for its check


def stands(estimate: float | None, p_value: float | None, published: float | None) -> str:
    """First that applies: no (opposite sign), yes (p < .05 and at least half the published estimate), weaker (under half), too
    few (the rest).

    The rule compares with the published estimate whether or not that one is significant itself; the summary says so where it is
    not.
    """
    if estimate is None or published is None or not math.isfinite(estimate):
        return "too few"
    if estimate * published < 0:
        return "no"
    under_half = abs(estimate) < 0.5 * abs(published)
    if p_value is not None and p_value < LEVEL and not under_half:
        return "yes"
    return "weaker" if under_half else "too few"


def row(check: str, setting: float | str, found: Growth, published: Growth, null: str = "steady", **more: Any) -> Row:
    """A row beside the exact steady null of its own n and window."""
    extra = {"low": found.low, "high": found.high, **more}
    return Row(
        check,
        setting,
        found.n,
        found.estimate,
        null,
        found.null_low,
        found.null_median,
        found.null_high,
        found.p_value,
        stands(found.estimate, found.p_value, published.estimate),
        extra,
    )


def record_row(check: str, setting: float | str, record: Record, published: Growth, **more: Any) -> Row:
    """A row for a variant of the record."""
    return row(check, setting, growth(record.window), published, **more)


def simulated_row(
    check: str, setting: float | str, n: int, estimate: float | None, null_name: str, null: Floats, published: Growth, **more: Any
) -> Row:
    """A row beside simulated values of the same estimate."""
    null = null[np.isfinite(null)]
    if estimate is None or not len(null):
        return Row(check, setting, n, estimate, null_name, None, None, None, None, stands(estimate, None, published.estimate), more)
    low, median, high = band_of(null)
    p = rank_p(estimate, null)
    return Row(check, setting, n, estimate, null_name, low, median, high, p, stands(estimate, p, published.estimate), more)


def telling(rows: Sequence[Row], published: Growth, least: int = ENOUGH) -> int | None:
    """Position of the row that weakens the published estimate most, among those with enough events; the first such for ties."""
    if published.estimate is None:
        return 0 if rows else None
    sign = math.copysign(1.0, published.estimate)
    fit = [i for i, r in enumerate(rows) if r.estimate is not None and r.n >= least]
    if not fit:
        return None
    return min(fit, key=lambda i: (sign * float(rows[i].estimate or 0.0), i))


def count(rows: Sequence[Row]) -> str:
    """How the rows of a check ended, in words."""
    parts = [f"{sum(r.stands == s for r in rows)} {s}" for s in ("yes", "too few", "weaker", "no") if any(r.stands == s for r in rows)]
    return ", ".join(parts)


def number(value: float | None, significant: int = 3) -> str:
    """A figure in running text."""
    return "none" if value is None else digits(value, significant)


def p_words(p: float | None) -> str:
    """A p-value in running text, as "= 0.012" or "< 0.001"."""
    return "not computed" if p is None else "< 0.001" if p < 0.001 else f"= {p:.3f}"


def years(value: float) -> str:
    """Years in running text, without an exponent where a person would write none."""
    if abs(value) >= 1e6:
        return f"{value:.3g}"
    return f"{value:,.0f}" if abs(value) >= 100 or value == round(value) else f"{value:.3g}"
