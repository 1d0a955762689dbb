# SPDX-License-Identifier: Apache-2.0
"""What growth could a list of this size show? The share of simulated records in which each test finds it at 5 %."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from ..errors import WrongUse
from ..progress import Tell, silent
from . import kernels
from .trend_tests import RENEWAL, STEADY, UPPER_TAIL, laplace_p, steady_null

if TYPE_CHECKING:
    import pandas as pd

Floats = npt.NDArray[np.float64]

LEVEL = 0.05
DOUBLINGS = (1.0, 2.0, 4.0)
WISHED = 0.8  # the power at which a growth is said to show
MOST = 60.0  # doublings beyond which no one asks
PERMUTED_UP_TO = 300  # events up to which lewis_robinson is judged by permutation, by the normal law above
CELLS = 4_000_000  # cells of simulated records at a time


@dataclass(frozen=True)
class PowerRow:
    """Share of records of n events, growing log-linearly by so many doublings over the window, in which a test gives p < 0.05.

    low and high: 95 % Monte Carlo interval (Wilson). test "verdict": laplace and lewis_robinson both, in the same direction as the growth.
    """

    test: str
    doublings: float
    n: int
    power: float
    low: float
    high: float


@dataclass(frozen=True)
class Power:
    """Rows in the order of doublings, then tests; how many records each rests on."""

    rows: tuple[PowerRow, ...]
    n: int
    replicates: int
    seed: int
    notes: tuple[str, ...] = field(default=())

    def to_frame(self) -> pd.DataFrame:
        """One row a test and growth."""
        from .frames import frame

        return frame(self.rows, PowerRow)


def power(n: int, *, doublings: Sequence[float] = DOUBLINGS, seed: int = 1, replicates: int = 1000, tell: Tell = silent) -> Power:
    """Simulate log-linear records of n events in a window opened by a milestone, and run the five tests on each. WrongUse below one
    event."""
    if n < 1:
        raise WrongUse(f"power for {n} events was asked for; at least 1")
    rows: list[PowerRow] = []
    for i, size in enumerate(doublings):
        ages = _ages(n, float(size), np.random.default_rng([seed, 6300, i]), replicates)
        found = _rejections(ages, seed, np.random.default_rng([seed, 6310, i]))
        if {"laplace", "lewis_robinson"} <= set(found):
            right = np.sign(0.5 - ages.mean(axis=1)) == np.sign(size) if size else np.ones(replicates, bool)
            found["verdict"] = found["laplace"] & found["lewis_robinson"] & right
        rows.extend(_row(test, float(size), n, hit) for test, hit in found.items())
        tell("power", (i + 1) / len(doublings))
    notes = ("records grow log-linearly, are exactly dated, and their first milestone opens the window; other shapes are easier or harder",)
    return Power(tuple(rows), n, replicates, seed, notes)


def _ages(n: int, doublings: float, rng: np.random.Generator, size: int) -> Floats:
    """(size, n) ages as fractions of the window, oldest first."""
    v = np.clip(rng.random((size, n)), 1e-16, 1 - 1e-16)
    k = abs(doublings) * np.log(2)
    ages = v if k < 1e-12 else -np.log1p(v * np.expm1(-k)) / k
    ages = ages if doublings >= 0 else 1.0 - ages
    ages.sort(axis=1)
    return np.ascontiguousarray(ages[:, ::-1])


def _rejections(ages: Floats, seed: int, rng: np.random.Generator) -> dict[str, npt.NDArray[np.bool_]]:
    n = ages.shape[1]
    x = 1.0 - ages
    laplace = kernels.laplace(x)
    null = steady_null(n, seed, 1999)
    out = {"laplace": laplace_p(laplace, n, seed) < LEVEL}
    for name, column, values in (("mil_hdbk_189", 1, kernels.mil_hdbk_189(x)), ("anderson_darling", 2, kernels.anderson_darling(x, ages))):
        out[name] = _monte_carlo(values, null[:, column], name in UPPER_TAIL) < LEVEL
    intervals = -np.diff(ages, axis=1, prepend=1.0)
    r = intervals.shape[1]
    if r < 2:
        return out
    chance = kernels.reversals(np.argsort(rng.random((1999, r)), axis=1).astype(float))
    out["reverse_arrangements"] = _monte_carlo(kernels.reversals(intervals), chance, False) < LEVEL
    out["lewis_robinson"] = _lewis_robinson(intervals, laplace, rng)
    return {name: out[name] for name in STEADY + RENEWAL}


def _monte_carlo(values: Floats, null: Floats, upper: bool) -> Floats:
    ordered = np.sort(null)
    slack = 1e-10 * max(float(np.abs(ordered).max()), 1e-300)
    above = 1 + len(ordered) - np.searchsorted(ordered, values - slack, side="left")
    below = 1 + np.searchsorted(ordered, values + slack, side="right")
    return np.asarray((above if upper else np.minimum(2 * np.minimum(above, below), len(ordered) + 1)) / (len(ordered) + 1))


def _lewis_robinson(intervals: Floats, laplace: Floats, rng: np.random.Generator, permutations: int = 999) -> npt.NDArray[np.bool_]:
    """Rejections by permuting closed intervals; Laplace's statistic serves, the variation being the same in all permutations of a record.

    All records share the permutations, each record's test being exact given them; so the whole is one matrix product.
    """
    r = intervals.shape[1]
    if r > PERMUTED_UP_TO:
        return np.asarray(np.abs(laplace / kernels.variation(intervals)) > 1.959963984540054)
    weight = np.arange(r, 0, -1.0)  # the sum of the dates is the sum of the intervals, each weighted by the events from its end on
    null = intervals @ weight[np.argsort(rng.random((permutations, r)), axis=1)].T
    seen = (intervals @ weight)[:, None]
    above = 1 + (null >= seen * (1 - 1e-12)).sum(axis=1)
    below = 1 + (null <= seen * (1 + 1e-12)).sum(axis=1)
    return np.asarray(2 * np.minimum(above, below) / (permutations + 1) < LEVEL)


def _row(test: str, doublings: float, n: int, hit: npt.NDArray[np.bool_]) -> PowerRow:
    share, size, z2 = float(hit.mean()), len(hit), 3.841458820694124
    middle = (share + z2 / (2 * size)) / (1 + z2 / size)
    half = float(np.sqrt(z2 * (share * (1 - share) / size + z2 / (4 * size * size)))) / (1 + z2 / size)
    return PowerRow(test, doublings, n, share, max(0.0, middle - half), min(1.0, middle + half))


# ------------------------------------------------------------------------------------------- what a verdict says of power


@lru_cache(maxsize=256)
def laplace_power(n: int, doublings: float, seed: int = 1, replicates: int = 4000) -> float:
    """Share of records of n events growing by so many doublings in which Laplace's exact test gives p < 0.05 in the right direction."""
    if n < 1:
        return 0.0
    ages = _ages(n, doublings, np.random.default_rng([seed, 6320]), min(replicates, max(200, 2 * CELLS // n)))
    values = kernels.laplace(1.0 - ages)
    return float(((laplace_p(values, n, seed) < LEVEL) & ((values > 0) == (doublings > 0))).mean())


@lru_cache(maxsize=256)
def smallest_shown(n: int, seed: int = 1, wished: float = WISHED) -> float | None:
    """The fewest doublings over the window that Laplace's test shows in four of five records of n events; None where none does."""
    if laplace_power(n, MOST, seed) < wished:
        return None
    low, high = 0.0, MOST
    while high - low > 0.05:
        middle = 0.5 * (low + high)
        low, high = (low, middle) if laplace_power(n, middle, seed) >= wished else (middle, high)
    return high
