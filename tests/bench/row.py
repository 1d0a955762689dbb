# SPDX-License-Identifier: Apache-2.0
"""How a row of the bench is timed: a piece of work and its yardstick in turn, A B A B, in one run; the median of the paired ratios."""

from __future__ import annotations

import gc
import statistics
import time
from collections.abc import Callable
from dataclasses import dataclass


@dataclass(frozen=True)
class Row:
    """One line of the table. ``ratio`` and ``target`` are in the unit that ``of`` names (× the yardstick, or seconds)."""

    work: str
    yardstick: str
    ratio: float
    low: float
    high: float
    target: str
    met: bool
    where: str  # where the remaining time goes


def seconds(work: Callable[[], object]) -> float:
    """Wall time of one call."""
    gc.collect()
    begun = time.perf_counter()
    work()
    return time.perf_counter() - begun


def paired(work: Callable[[], object], yardstick: Callable[[], object], pairs: int = 5) -> tuple[float, float, float]:
    """Median, least and largest of the ratios work/yardstick over ``pairs`` turns, after one turn that does not count."""
    work(), yardstick()
    ratios = sorted(seconds(work) / seconds(yardstick) for _ in range(pairs))
    return statistics.median(ratios), ratios[0], ratios[-1]


def at_most(work: str, yardstick: str, found: tuple[float, float, float], target: float, where: str, unit: str = "×") -> Row:
    """A row whose figure should not pass the target."""
    return Row(work, yardstick, *found, f"≤ {target:g} {unit}", found[0] <= target, where)


def at_least(work: str, yardstick: str, found: tuple[float, float, float], target: float, where: str) -> Row:
    """A row whose figure should reach the target."""
    return Row(work, yardstick, *found, f"≥ {target:g} ×", found[0] >= target, where)
