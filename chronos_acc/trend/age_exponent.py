# SPDX-License-Identifier: Apache-2.0
"""The age exponent: how steeply milestones thin out with age, on a scale that needs no interval between them.

Ages have density proportional to a^(-s) between the youngest and the oldest, which are kept: s = 0 is a steady rate, 0 < s < 1
partial forgetting, s = 1 picking evenly per unit of log age, s > 1 steeper than any such picking. With L = ln(oldest/youngest) and
v = ln(a/youngest)/L the others have density proportional to exp((1 - s) L v) on (0, 1): the log-linear likelihood again, in log
age.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from ..record import Window
from .curves import log_linear
from .positions import Floats
from .rate_laws import CHI2_95

FEWEST_FOR_THIRDS = 24  # milestones from which the record is looked at in thirds


@dataclass(frozen=True)
class ExponentRow:
    """The exponent of one stretch of ages with its 95 % profile interval. n: milestones in it, the kept youngest and oldest among
    them; youngest and oldest in years. None where fewer than three milestones, or ages all alike, leave nothing to estimate.
    """

    era: str
    estimate: float | None
    low: float | None
    high: float | None
    n: int
    youngest: float | None
    oldest: float | None


def age_exponent(window: Window, eras: Sequence[tuple[str, float, float]] | None = None) -> tuple[ExponentRow, ...]:
    """The exponent of the whole record, then of each era.

    eras: (name, from year, to year), both ends counted in; without them the ranked ages are cut in thirds where there are at least
    24, neighbours sharing the age at the cut. All milestones of the window take part, the one that opens it too; ages are floored
    at half the finest dating unit, and an age of zero with no unit to floor it is left out.
    """
    ages = _ages(window.present - window.times, window.finest_unit)
    rows = [_row("whole record", ages)]
    if eras is not None:
        for name, since, until in eras:
            inside = (window.times >= since) & (window.times <= until)
            rows.append(_row(name, _ages(window.present - window.times[inside], window.finest_unit)))
    elif len(ages) >= FEWEST_FOR_THIRDS:
        cut = [0, round(len(ages) / 3), round(2 * len(ages) / 3), len(ages) - 1]
        for name, i in (("oldest third", 2), ("middle third", 1), ("youngest third", 0)):
            rows.append(_row(name, ages[cut[i] : cut[i + 1] + 1]))
    return tuple(rows)


def exponents(ages: Floats, critical: float = CHI2_95) -> tuple[Floats, Floats, Floats]:
    """Estimate and profile interval for many records at once: ages (..., n) above zero, in any order, n at least 3, oldest above
    youngest.
    """
    logs = np.sort(np.log(ages), axis=-1)
    youngest, length = logs[..., :1], logs[..., -1] - logs[..., 0]
    v = (logs[..., 1:-1] - youngest) / length[..., None]
    older, younger = v.mean(axis=-1), 1.0 - v.mean(axis=-1)
    # the density exp(k v) rises with v where k > 0: v is the position, 1 - v the distance from the busier end
    best, low, high = log_linear.profile(younger, older, ages.shape[-1] - 2, critical)
    return 1.0 - best / length, 1.0 - high / length, 1.0 - low / length


def _ages(ages: Floats, finest_unit: float) -> Floats:
    floored = np.maximum(ages, finest_unit / 2.0)
    return np.sort(floored[floored > 0])


def _row(era: str, ages: Floats) -> ExponentRow:
    n = len(ages)
    ends = (float(ages[0]), float(ages[-1])) if n else (None, None)
    inner = ages[1:-1]
    if n < 3 or not ages[-1] > ages[0] or (inner == ages[0]).all() or (inner == ages[-1]).all():
        return ExponentRow(era, None, None, None, n, *ends)
    best, low, high = exponents(ages)
    return ExponentRow(era, float(best), float(low), float(high), n, *ends)
