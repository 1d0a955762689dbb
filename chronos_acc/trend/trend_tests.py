# SPDX-License-Identifier: Apache-2.0
"""Five tests of trend in one window, each with an exact p-value, and their joint adjustment.

Two families, by what they take for granted. *Steady*: laplace, mil_hdbk_189 and anderson_darling ask whether events fall as under a
steady rate; given how many there are, their dates are then uniform, so the exact law is simulated with no unknown. *Renewal*:
reverse_arrangements and lewis_robinson allow intervals of any one distribution and permute them; the residual interval from a given
start to the first milestone and the open one up to the present stay in place.
"""

from __future__ import annotations

from dataclasses import asdict, dataclass, field
from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt
from scipy.special import chdtr, chdtrc, ndtr, ndtri

from ..progress import Tell, silent
from ..record import Window
from . import kernels
from .exact_laws import LARGEST_EXACT, anderson_darling_tail, reversal_moments, reversal_tails
from .multiplicity import holm, monte_carlo_p, null_p, step_down_min_p
from .positions import Floats, positions, rounding

if TYPE_CHECKING:
    import pandas as pd

CELLS = 2_000_000  # null records are made in chunks of about this many cells
LONGEST_PAIRWISE = 160  # closed intervals up to which all pairs of every permuted row are compared
LONGEST_COUNTED = 1000  # and up to which tied ones are counted in a tree
STEADY = ("laplace", "mil_hdbk_189", "anderson_darling")
RENEWAL = ("reverse_arrangements", "lewis_robinson")
UPPER_TAIL = ("anderson_darling",)
SENSITIVE_TO = {
    "laplace": "a rate that rises or falls steadily through the window; most powerful against exponential growth; also moved by clusters",
    "mil_hdbk_189": "a rate that changes as a power of the time since the start; weighs the earliest events most; also moved by clusters",
    "anderson_darling": "any departure from a steady rate, also one that rises and falls; has no direction",
    "reverse_arrangements": "intervals that get longer or shorter in order, whatever their distribution; blind to a trend inside ties",
    "lewis_robinson": "a trend like laplace's, after allowing for intervals more or less scattered than a steady rate gives",
}


@dataclass(frozen=True)
class TestRow:
    """One test. statistic and z keep their published sign; ``direction`` says what the sign means.

    p_value: asymptotic, two-sided as the doubled smaller tail, anderson_darling upper tail. p_exact: from the conditional law of
    the null, same tails. p_adjusted: step-down min-p in its family, the renewal family after the steady one. p_holm: Holm in the
    same order. None where not computed. z of reverse_arrangements carries the ordinary continuity correction, one half towards the
    mean (the correction is sometimes printed the other way), and the variance is that of the ties.
    """

    __test__ = False  # not a test case of the test runner

    test: str
    statistic: float | None
    z: float | None
    direction: str
    p_value: float | None
    p_exact: float | None
    p_adjusted: float | None
    p_holm: float | None
    null: str
    sensitive_to: str


@dataclass(frozen=True)
class TestsResult:
    """All tests on one window. n counted events, ``intervals`` closed intervals, seed and replicates of the null draws."""

    __test__ = False

    rows: tuple[TestRow, ...]
    n: int
    intervals: int
    seed: int
    replicates: int
    notes: tuple[str, ...] = field(default=())

    def row(self, test: str) -> TestRow:
        """The row of one test, by name."""
        return next(r for r in self.rows if r.test == test)

    def to_frame(self) -> pd.DataFrame:
        """One row a test, the fields of TestRow."""
        import pandas as pd

        frame = pd.DataFrame([asdict(r) for r in self.rows])
        return frame.astype({c: float for c in ("statistic", "z", "p_value", "p_exact", "p_adjusted", "p_holm")})


def run_tests(
    window: Window, *, seed: int, replicates: int = 1999, renewal_at_start: bool = False, strict_ties: bool = False, tell: Tell = silent
) -> TestsResult:
    """All five tests on the counted events of a window.

    renewal_at_start: the interval from the start to the first milestone is an interval like the others (observation began with an
    event or with something new). strict_ties: equal intervals count nothing in reverse_arrangements, as in the published worked
    example, instead of half.
    """
    events = positions(window)
    notes: list[str] = []
    found: dict[str, TestRow] = {}
    if events.n:
        tell("trend tests: steady null", 0.1)
        found.update(_steady_rows(events.x, events.v, seed, replicates))
    tell("trend tests: permuted intervals", 0.5)
    spacing = _Spacing.of(window, renewal_at_start)
    found.update(_renewal_rows(spacing, seed, replicates, strict_ties, notes))
    gate = min((r.p_adjusted for t, r in found.items() if t in STEADY and r.p_adjusted is not None), default=0.0)
    gate_holm = min((r.p_holm for t, r in found.items() if t in STEADY and r.p_holm is not None), default=0.0)
    rows = []
    for name in STEADY + RENEWAL:
        row = found.get(name) or _none(name)
        if name in RENEWAL and row.p_adjusted is not None and row.p_holm is not None:
            row = TestRow(**{**asdict(row), "p_adjusted": max(gate, row.p_adjusted), "p_holm": max(gate_holm, row.p_holm)})
        rows.append(row)
    if not events.n:
        notes.append("No event is counted inside the window: no test can be made.")
    return TestsResult(tuple(rows), events.n, len(spacing.intervals), seed, replicates, tuple(notes))


def laplace_p(statistic: Floats, n: int, seed: int, replicates: int = 1999) -> Floats:
    """Exact two-sided p of Laplace statistics (...) of records of n events, against the same null draws as ``run_tests``.

    At fixed n and window the growth of the log-linear law is a monotone function of the statistic, so this is the p of that growth too.
    """
    null = np.sort(steady_null(n, seed, replicates)[:, 0])
    values = np.asarray(statistic, dtype=float)
    slack = 1e-10 * np.maximum(np.abs(values), np.abs(null).max())
    above = 1 + len(null) - np.searchsorted(null, values - slack, side="left")
    below = 1 + np.searchsorted(null, values + slack, side="right")
    return np.asarray(np.minimum(1.0, 2.0 * np.minimum(above, below) / (len(null) + 1)))


@lru_cache(maxsize=64)
def steady_null(n: int, seed: int, replicates: int) -> Floats:
    """(B, 3) laplace, mil_hdbk_189 and anderson_darling of records of n uniform dates; kept, since they depend on n alone.

    B is 5 (replicates + 1) - 1 up to 400 events, replicates above: one set of draws judges every record of its size, and with 1,999
    of them alone the true level of a nominal 5 % would itself scatter by half a point.
    """
    if n <= 400:
        replicates = 5 * (replicates + 1) - 1
    rng = np.random.default_rng([seed, 5300])
    rows = max(1, CELLS // max(n, 1))
    out = np.empty((replicates, 3))
    for first in range(0, replicates, rows):
        u = np.clip(rng.random((min(rows, replicates - first), n)), 1e-16, 1.0 - 1.2e-16)
        u.sort(axis=-1)
        out[first : first + len(u)] = _steady_statistics(u, 1.0 - u)
    out.setflags(write=False)
    return out


def _steady_statistics(x: Floats, v: Floats) -> Floats:
    laplace = np.where(v.mean(axis=-1) < 0.5, kernels.laplace(1.0 - v), kernels.laplace(x))
    return np.stack([laplace, kernels.mil_hdbk_189(x), kernels.anderson_darling(x, v)], axis=-1)


def _steady_rows(x: Floats, v: Floats, seed: int, replicates: int) -> dict[str, TestRow]:
    n = len(x)
    statistics = _steady_statistics(x, v)
    null = steady_null(n, seed, replicates)
    exact = np.array([monte_carlo_p(float(statistics[i]), null[:, i], name in UPPER_TAIL) for i, name in enumerate(STEADY)])
    null_ps = [null_p(null[:, i], float(statistics[i]), name in UPPER_TAIL) for i, name in enumerate(STEADY)]
    adjusted = step_down_min_p(exact, np.stack(null_ps, axis=1))
    by_holm = holm(exact)
    below, above = float(chdtr(2 * n, statistics[1])), float(chdtrc(2 * n, statistics[1]))
    z = (float(statistics[0]), float(ndtri(below)) if below < 0.5 else -float(ndtri(above)), None)
    asymptotic = (
        2.0 * float(ndtr(-abs(statistics[0]))),
        min(1.0, 2.0 * min(below, above)),
        anderson_darling_tail(float(statistics[2])),
    )
    centred = (statistics[0], 2.0 * n - statistics[1], 0.0)
    return {
        name: TestRow(
            name,
            float(statistics[i]),
            z[i],
            _direction(float(centred[i])),
            min(1.0, asymptotic[i]),
            float(exact[i]),
            float(adjusted[i]),
            float(by_holm[i]),
            "steady",
            SENSITIVE_TO[name],
        )
        for i, name in enumerate(STEADY)
    }


@dataclass(frozen=True)
class _Spacing:
    """A window as: residual interval, closed intervals, open interval; n counted events."""

    before: float  # from a given start to the first milestone, 0 where a milestone stands there
    intervals: Floats  # closed intervals between milestones, in years
    span: float
    counted_first: bool  # whether the milestone that opens the first closed interval is itself counted
    counted_last: bool  # whether the milestone that closes the last one is

    @classmethod
    def of(cls, window: Window, renewal_at_start: bool) -> _Spacing:
        events = positions(window)
        intervals, before, counted_first = events.intervals, 0.0, not events.opened
        if counted_first and events.n:
            before = float(window.times[0] - window.start)
            if renewal_at_start:
                intervals, before, counted_first = np.concatenate([[before], intervals]), 0.0, False
        return cls(before, _with_exact_ties(intervals, rounding(window)), window.span, counted_first, not events.closed)

    def laplace(self, intervals: Floats) -> Floats:
        """Laplace's statistic of the records (...) with these intervals in this order."""
        times = self.before + np.cumsum(intervals, axis=-1)
        if not self.counted_last:
            times = times[..., :-1]
        n = times.shape[-1] + self.counted_first
        total = times.sum(axis=-1) + (self.before if self.counted_first else 0.0)
        return np.asarray(np.sqrt(12.0 * n) * (total / (n * self.span) - 0.5))


def _with_exact_ties(intervals: Floats, slack: float) -> Floats:
    """The intervals, made equal where only the rounding of their dates parts them: ties must not depend on the unit or the origin
    of time.
    """
    order = np.argsort(intervals, kind="stable")
    ordered = intervals[order]
    group = np.concatenate([[0], np.cumsum(np.diff(ordered) > slack)]) if len(ordered) else np.empty(0, dtype=np.int64)
    out = np.empty_like(intervals)
    out[order] = ordered[np.searchsorted(group, group, side="left")]
    return out


def _renewal_rows(spacing: _Spacing, seed: int, replicates: int, strict_ties: bool, notes: list[str]) -> dict[str, TestRow]:
    intervals = spacing.intervals
    r = len(intervals)
    if r < 2:
        notes.append(f"reverse_arrangements and lewis_robinson need at least two closed intervals; there are {r}.")
        return {}
    if r < 5:
        notes.append(f"reverse_arrangements cannot reject at 5 % below five closed intervals; there are {r}.")
    ties = 0.0 if strict_ties else 0.5
    spread = float(kernels.variation(intervals)) if intervals.mean() > 0 else 0.0
    n = r - 1 + spacing.counted_first + spacing.counted_last
    observed = {"reverse_arrangements": float(kernels.reversals(intervals, ties))}
    if spread > 1e-12 and n > 0:
        observed["lewis_robinson"] = float(spacing.laplace(intervals)) / spread
    else:
        notes.append("lewis_robinson needs closed intervals of unequal length.")
    tied = len(np.unique(intervals)) < r
    count = r <= LONGEST_COUNTED if tied else r <= LONGEST_PAIRWISE
    null_reversals, null_laplace = _permuted(spacing, seed, replicates, ties, count)
    null = {"reverse_arrangements": null_reversals, "lewis_robinson": null_laplace / spread if spread > 1e-12 else null_laplace}
    exact = {name: monte_carlo_p(value, null[name]) for name, value in observed.items() if count or name != "reverse_arrangements"}
    mean, variance = reversal_moments(r) if strict_ties else _reversal_moments_with_ties(intervals)
    away = observed["reverse_arrangements"] - mean
    z_reversals = float(np.sign(away) * max(abs(away) - 0.5, 0.0) / np.sqrt(variance)) if variance > 0 else None
    if not tied and r <= LARGEST_EXACT:
        upper, lower = reversal_tails(round(observed["reverse_arrangements"]), r)
        exact["reverse_arrangements"] = min(1.0, 2.0 * min(upper, lower))
    elif not count:
        exact["reverse_arrangements"] = 1.0 if z_reversals is None else min(1.0, 2.0 * float(ndtr(-abs(z_reversals))))
        notes.append(f"reverse_arrangements: with {r} intervals the normal law stands for the exact one.")
    at = {name: observed[name] if count or name != "reverse_arrangements" else _observed_rank_sum(intervals) for name in observed}
    names = list(observed)
    p = np.array([exact[name] for name in names])
    adjusted = step_down_min_p(p, np.stack([null_p(null[name], at[name]) for name in names], axis=1))
    by_holm = holm(p)
    out = {}
    for i, name in enumerate(names):
        value = observed[name]
        if name == "reverse_arrangements":
            z, direction = z_reversals, _direction(-away)
        else:
            z, direction = value, _direction(value)
        out[name] = TestRow(
            name,
            value,
            z,
            direction,
            None if z is None else min(1.0, 2.0 * float(ndtr(-abs(z)))),
            float(p[i]),
            float(adjusted[i]),
            float(by_holm[i]),
            "renewal",
            SENSITIVE_TO[name],
        )
    return out


def _reversal_moments_with_ties(intervals: Floats) -> tuple[float, float]:
    """Mean and variance over orderings of the same intervals, ties counting half, as for Kendall's S = 2R - r(r - 1)/2."""
    mean, variance = reversal_moments(len(intervals))
    _, counts = np.unique(intervals, return_counts=True)
    return mean, variance - float((counts * (counts - 1.0) * (2.0 * counts + 5.0)).sum()) / 72.0


def _rank_sum(rank: npt.NDArray[np.intp]) -> Floats:
    """Position times rank, summed: under random order its correlation with the reversals is above 0.998 from 160 intervals on."""
    return np.asarray(rank @ np.arange(1.0, rank.shape[-1] + 1.0))


def _observed_rank_sum(intervals: Floats) -> float:
    _, rank = np.unique(intervals, return_inverse=True)
    return float(_rank_sum(rank))


def _permuted(spacing: _Spacing, seed: int, replicates: int, ties: float, count: bool) -> tuple[Floats, Floats]:
    """Reversals and Laplace's statistic of records with the closed intervals in random order, (replicates,) each.

    Where the reversals of many long rows would cost too much (``count`` False) the sum of position times rank stands for them.
    """
    rng = np.random.default_rng([seed, 5310])
    _, rank = np.unique(spacing.intervals, return_inverse=True)
    r = len(rank)
    rows = max(1, CELLS // r)
    reversals, laplace = [], []
    for first in range(0, replicates, rows):
        order = np.argsort(rng.random((min(rows, replicates - first), r)), axis=-1)
        reversals.append(_reversals_of_ranks(rank[order], ties) if count else _rank_sum(rank[order]))
        laplace.append(spacing.laplace(spacing.intervals[order]))
    return np.concatenate(reversals), np.concatenate(laplace)


def _reversals_of_ranks(rank: npt.NDArray[np.intp], ties: float) -> Floats:
    """Reversals of rows of ranks: pair by pair for short rows, by counts in a binary tree for long ones."""
    rows, r = rank.shape
    if r <= LONGEST_PAIRWISE:
        return kernels.reversals(rank.astype(np.int16), ties)
    size = int(rank.max()) + 2
    tree = np.zeros((size + 1, rows), dtype=np.int32)
    total = np.zeros(rows)
    lane = np.arange(rows)

    def below(at: npt.NDArray[np.intp]) -> npt.NDArray[np.int64]:
        out = np.zeros(rows, dtype=np.int64)
        at = at.copy()
        while at.any():
            out += tree[at, lane]  # position 0 is never filled
            at &= at - 1 * (at > 0)
        return out

    for i in range(r):
        here = rank[:, i].astype(np.intp)
        smaller = below(here)
        total += smaller + ties * (below(here + 1) - smaller)
        at = here + 1
        live = at <= size
        while live.any():
            tree[at[live], lane[live]] += 1
            at = at + (at & -at)
            live = at <= size
    return total


def _direction(value: float) -> str:
    return "speeding" if value > 1e-12 else "slowing" if value < -1e-12 else "none"


def _none(test: str) -> TestRow:
    return TestRow(test, None, None, "none", None, None, None, None, "steady" if test in STEADY else "renewal", SENSITIVE_TO[test])
