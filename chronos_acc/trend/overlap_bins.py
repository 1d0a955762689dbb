# SPDX-License-Identifier: Apache-2.0
"""How many milestones did no list name? Counts of overlap: two lists, Chao's bound for several, and log-linear models.

Lists stand for groups here: lists that derive from one another count as one.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import combinations

import numpy as np
import numpy.typing as npt

from ..errors import WrongUse

Floats = npt.NDArray[np.float64]
Bools = npt.NDArray[np.bool_]

Z = 1.959963984540054
WITHIN_AICC = 4.0  # log-linear models this near the best take part in the range
MOST_LISTS = 5  # log-linear models of more lists have too many cells for a few dozen milestones


@dataclass(frozen=True)
class Estimate:
    """An estimate of the number of all milestones, with variance, and a 95 % interval that is log-normal on the unseen number."""

    total: float
    variance: float
    low: float
    high: float


def chapman(first: int, second: int, both: int) -> Estimate:
    """Two lists of ``first`` and ``second`` milestones, ``both`` shared: nearly unbiased estimate and variance (Chapman 1951; Seber
    1982)."""
    if min(first, second) < both or both < 0:
        raise WrongUse(f"{both} shared milestones cannot exceed the lists' {first} and {second}")
    total = (first + 1) * (second + 1) / (both + 1) - 1
    variance = (first + 1) * (second + 1) * (first - both) * (second - both) / ((both + 1) ** 2 * (both + 2))
    return _with_interval(total, variance, first + second - both)


def petersen(first: int, second: int, both: int) -> float:
    """The simple ratio of two lists (Lincoln–Petersen); infinite where none is shared."""
    return first * second / both if both else float("inf")


def chao(seen: int, once: int, twice: int, lists: int | None = None, *, bias_corrected: bool = True) -> Estimate:
    """Chao's lower bound from those named once and twice (Chao 1987), with its factor (t - 1)/t where the number of lists is given.

    The bias-corrected form serves also where none is named twice. The variance is that of the uncorrected form where it exists.
    """
    factor = 1.0 if lists is None else (lists - 1) / lists
    if bias_corrected or not twice:
        unseen = factor * once * (once - 1) / (2 * (twice + 1))
    else:
        unseen = factor * once**2 / (2 * twice)
    if twice:
        r = once / twice
        variance = twice * (factor * r**2 / 2 + factor**2 * r**3 + factor**2 * r**4 / 4)
    else:
        variance = factor * once * (once - 1) / 2 + factor**2 * once * (2 * once - 1) ** 2 / 4
        variance -= factor**2 * once**4 / (4 * (seen + unseen)) if seen + unseen > 0 else 0.0
    return _with_interval(seen + unseen, max(variance, 0.0), seen)


def _with_interval(total: float, variance: float, seen: int) -> Estimate:
    unseen = total - seen
    if unseen <= 0:
        return Estimate(total, variance, float(seen), float(seen))
    factor = float(np.exp(Z * np.sqrt(np.log1p(variance / unseen**2))))
    return Estimate(total, variance, seen + unseen / factor, seen + unseen * factor)


@dataclass(frozen=True)
class LogLinear:
    """One log-linear model: the pairs of lists that may depend on one another, its total, deviance, AICc, and the total's own interval
    (delta method)."""

    pairs: tuple[tuple[int, int], ...]
    total: float
    deviance: float
    aicc: float
    interval: Estimate


def log_linear_models(mentions: Bools) -> tuple[LogLinear, ...]:
    """Every model with main effects and any set of pairwise dependences (Fienberg 1972) on m milestones by t lists, 2 <= t <= 5.

    Models whose likelihood has no maximum, or that leave no freedom for the unseen cell, are left out. With four lists and more at most two
    pairs at a time.
    """
    t = mentions.shape[1]
    if not 2 <= t <= MOST_LISTS:
        return ()
    histories = np.array([[bool(h >> j & 1) for j in range(t)] for h in range(1, 2**t)])
    code = (mentions.astype(np.int64) << np.arange(t)).sum(axis=1)
    counts = np.bincount(code, minlength=2**t)[1:].astype(float)
    every = list(combinations(range(t), 2))
    deepest = len(every) if t <= 3 else 2
    out = []
    for size in range(deepest + 1):
        for pairs in combinations(every, size):
            if 1 + t + size > len(counts):
                continue
            model = _fit(histories, counts, pairs)
            if model is not None:
                out.append(model)
    return tuple(out)


def _fit(histories: Bools, counts: Floats, pairs: tuple[tuple[int, int], ...]) -> LogLinear | None:
    """Poisson log-linear fit by Newton steps with halving."""
    h = histories.astype(float)
    design = np.column_stack([np.ones(len(h)), h, *[h[:, i] * h[:, j] for i, j in pairs]])
    if (design[:, 1:].T @ counts <= 0).any():  # an empty margin: the maximum lies at infinity
        return None
    beta = np.linalg.lstsq(design, np.log(counts + 0.5), rcond=None)[0]

    def value(b: Floats) -> float:
        eta = design @ b
        return float(counts @ eta - np.exp(np.minimum(eta, 500.0)).sum())

    here = value(beta)
    for _ in range(60):
        mu = np.exp(np.minimum(design @ beta, 500.0))
        information = (design * mu[:, None]).T @ design
        try:
            step = np.linalg.solve(information, design.T @ (counts - mu))
        except np.linalg.LinAlgError:
            return None
        length = 1.0
        while value(beta + length * step) < here - 1e-12 * abs(here) and length > 1e-8:
            length /= 2
        beta = beta + length * step
        here = value(beta)
        if np.abs(beta).max() > 25.0:  # on its way to infinity
            return None
        if np.abs(step).max() < 1e-9:
            break
    else:
        return None
    mu = np.exp(design @ beta)
    if np.linalg.cond((design * mu[:, None]).T @ design) > 1e12:  # a maximum that runs off to infinity
        return None
    with np.errstate(divide="ignore", invalid="ignore"):
        deviance = 2 * float(np.where(counts > 0, counts * np.log(counts / mu), 0.0).sum() - (counts - mu).sum())
    n, k = float(counts.sum()), design.shape[1]
    if n <= k + 1:
        return None
    from scipy.special import gammaln

    likelihood = float((counts * np.log(mu) - mu - gammaln(counts + 1)).sum())
    unseen = float(np.exp(beta[0]))
    spread = float(np.linalg.inv((design * mu[:, None]).T @ design)[0, 0])
    own = _with_interval(n + unseen, unseen + unseen**2 * spread, int(n))
    return LogLinear(pairs, n + unseen, deviance, -2 * likelihood + 2 * k + 2 * k * (k + 1) / (n - k - 1), own)


def supported(models: tuple[LogLinear, ...]) -> tuple[LogLinear, ...]:
    """The models within four AICc of the best."""
    best = min((m.aicc for m in models), default=0.0)
    return tuple(m for m in models if m.aicc <= best + WITHIN_AICC)


@dataclass(frozen=True)
class CoverageBin:
    """Completeness of one bin of age, years. named: distinct milestones; shared: named by two lists or more; total with interval by
    ``method``.

    method is "chapman" (two lists), "log_linear" (several; log_linear_low and log_linear_high are the range of the well supported models'
    totals, the interval spans theirs), or "chao" (a lower bound, where that range exceeds a factor of two). chapman: of the pair of lists
    that shares most. completeness = named/total, its interval from that of the total.
    """

    age_from: float
    age_to: float
    named: int
    shared: int
    method: str
    total: float
    total_low: float
    total_high: float
    completeness: float
    completeness_low: float
    completeness_high: float
    chao_bound: float
    chapman: float | None
    log_linear_low: float | None
    log_linear_high: float | None


def coverage_bins(ages: Floats, mentions: Bools, fewest: int = 10) -> tuple[CoverageBin, ...]:
    """Bins of age from the youngest on, each grown until it holds ``fewest`` shared milestones; what is left joins the last. Empty: not
    estimable.

    ages (m,) and mentions (m, t) of independent lists, every milestone named at least once.
    """
    order = np.argsort(ages, kind="stable")
    age, named = ages[order], mentions[order]
    shared = named.sum(axis=1) >= 2
    full = int(shared.sum()) // fewest
    if mentions.shape[1] < 2 or full < 1:
        return ()
    position = np.cumsum(shared)
    cuts = [0]
    for b in range(1, full):
        cuts.append(int(np.searchsorted(position, b * fewest)) + 1)
    cuts.append(len(age))
    edges = [float(age[0]), *[float(np.sqrt(max(age[c - 1], 1e-300) * max(age[c], 1e-300))) for c in cuts[1:-1]], float(age[-1])]
    return tuple(_bin(named[a:b], edges[i], edges[i + 1]) for i, (a, b) in enumerate(zip(cuts[:-1], cuts[1:], strict=True)))


def _bin(named: Bools, age_from: float, age_to: float) -> CoverageBin:
    t = named.shape[1]
    often = named.sum(axis=1)
    seen = len(named)
    bound = chao(seen, int((often == 1).sum()), int((often == 2).sum()), t)
    pairs = [(int((named[:, i] & named[:, j]).sum()), i, j) for i, j in combinations(range(t), 2)]
    most, i, j = max(pairs, key=lambda p: (p[0], -p[1], -p[2]))
    pair: Estimate | None = None
    if most:
        pair = chapman(int(named[:, i].sum()), int(named[:, j].sum()), most)
    low = high = None
    models: tuple[LogLinear, ...] = ()
    if t > 2:
        models = supported(log_linear_models(named))
        if models:
            low, high = min(m.total for m in models), max(m.total for m in models)
    if t == 2 and pair is not None:
        method, total, total_low, total_high = "chapman", pair.total, pair.low, pair.high
    elif low is not None and high is not None and high <= 2 * low:
        method, total = "log_linear", float(np.sqrt(low * high))
        total_low, total_high = min(m.interval.low for m in models), max(m.interval.high for m in models)
    else:
        method, total, total_low, total_high = "chao", bound.total, bound.low, bound.high
    total = max(total, float(seen))
    return CoverageBin(
        age_from,
        age_to,
        seen,
        int((often >= 2).sum()),
        method,
        total,
        max(total_low, float(seen)),
        max(total_high, float(seen)),
        seen / total,
        seen / max(total_high, seen),
        min(1.0, seen / max(total_low, seen)),
        bound.total,
        None if pair is None else pair.total,
        low,
        high,
    )
