# SPDX-License-Identifier: Apache-2.0
"""Equal effort: distinct milestones per year of each bin, with mentions thinned to equal coverage, and the growth of that rate.

Coverage of a bin is Good's 1 - f1/m, the chance that one more mention names a milestone already named (m mentions, f1 milestones
named once; Good 1953). Bins are thinned to the lowest coverage among them, in expectation (Chao & Jost 2012, Ecology
93:2533-2547). Never to equal counts per unit of log age: that would build picking evenly per log age into the data.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from scipy.special import gammaln

from ..record import Window
from ..trend.capture import grouped
from ..trend.null_model import youngest_floor
from .check import Answer, Check, Context, Row
from .growth import Growth, growth, rank_p
from .offset import Offset
from .rows import count, number, stands

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.int64]
BINS = 6
ENOUGH_BINS = 3
FEWEST_MENTIONS = 20
FEWEST_SHARED = 5
REPLICATES = 499


def run(context: Context) -> Answer:
    record = context.record
    window = record.window
    published = growth(window)
    names, mentions = grouped(record)
    counted = window.index[window.opening : window.opening + window.n]
    support = mentions[counted].sum(axis=1)
    if len(names) < 2 or int((support > 1).sum()) < 2:
        return Answer(notes=("equal_effort: needs two independent lists that share milestones",))
    ages = window.present - window.counted
    rows = [r for kind in ("calendar", "log age") if (r := _row(context, window, published, ages, support, len(names), kind)) is not None]
    if not rows:
        return Answer(
            notes=(f"equal_effort: fewer than two bins hold {FEWEST_MENTIONS} mentions and {FEWEST_SHARED} shared milestones each",)
        )
    at = 0 if rows[0].more["bins"] >= ENOUGH_BINS else len(rows) - 1  # calendar bins, unless most milestones crowd into one or two
    shown = rows[at]
    summary = f"at equal coverage ({shown.more['coverage']:.2f}) growth is {number(shown.estimate)} a year; rows: {count(rows)}"
    return Answer(tuple(rows), summary, "growth of distinct milestones a year at equal coverage", (), at)


def _row(context: Context, window: Window, published: Growth, ages: Floats, support: Ints, lists: int, kind: str) -> Row | None:
    edges = _edges(ages, support, window, kind)
    if len(edges) < 3:
        return None
    spectrum = _spectrum(ages[None], support[None], edges, lists)
    distinct, coverage = thinned(spectrum)
    cells = Offset(edges[:-1], np.diff(edges), np.diff(edges))
    middle = (edges[1:] + edges[:-1]) / 2
    if not distinct[0].sum() > 0:
        return None
    mean = float((distinct[0] * middle).sum() / distinct[0].sum())
    rng = np.random.default_rng([context.seed, 7701, len(edges)])
    size = min(REPLICATES, context.replicates)
    null_ages = rng.random((size, len(ages))) * window.span
    null_support = rng.permuted(np.broadcast_to(support, (size, len(ages))), axis=1)
    null_distinct, _ = thinned(_spectrum(null_ages, null_support, edges, lists))
    total = null_distinct.sum(axis=1)
    good = total > 0
    means = (null_distinct[good] * middle).sum(axis=1) / total[good]
    if not len(means):
        return None
    estimate, (low, median, high) = cells.estimate(mean), (cells.estimate(float(q)) for q in np.quantile(means, (0.975, 0.5, 0.025)))
    p = rank_p(mean, means)  # growth is a monotone function of the mean age
    more = {"bins": len(edges) - 1, "coverage": float(coverage[0]), "distinct": float(distinct[0].sum()), "youngest_edge": float(edges[1])}
    return Row(
        "equal_effort",
        f"{kind}, {len(edges) - 1} bins",
        len(ages),
        estimate,
        "steady, mentions shuffled",
        low,
        median,
        high,
        p,
        stands(estimate, p, published.estimate),
        more,
    )


def _edges(ages: Floats, support: Ints, window: Window, kind: str) -> Floats:
    """Edges of age from the present to the start; bins join their older neighbour until each holds enough mentions and shared
    milestones.
    """
    if kind == "calendar":
        edges = np.linspace(0.0, window.span, BINS + 1)
    else:
        youngest = max(float(ages.min()), youngest_floor(window), window.span * 1e-12)
        edges = np.concatenate([[0.0], np.geomspace(youngest, window.span, BINS + 1)[1:]])
    out = [0.0]
    for edge in edges[1:]:
        inside = (ages >= out[-1]) & (ages <= edge)
        if support[inside].sum() >= FEWEST_MENTIONS and int((support[inside] > 1).sum()) >= FEWEST_SHARED:
            out.append(float(edge))
    if len(out) > 1:
        out[-1] = window.span
    return np.array(out)


def _spectrum(ages: Floats, support: Ints, edges: Floats, lists: int) -> Floats:
    """(size, bins, lists) milestones of each bin that 1, 2, ... lists name."""
    size, bins = len(ages), len(edges) - 1
    place = np.clip(np.searchsorted(edges, ages, side="right") - 1, 0, bins - 1)
    flat = (np.arange(size)[:, None] * bins + place) * lists + support - 1
    return np.bincount(flat.ravel(), minlength=size * bins * lists).reshape(size, bins, lists).astype(float)


def thinned(spectrum: Floats) -> tuple[Floats, Floats]:
    """Expected distinct milestones (size, bins) at the lowest coverage among the bins (size,), from how many are named 1, 2, ... times."""
    x = np.arange(1, spectrum.shape[-1] + 1, dtype=float)
    m = (spectrum * x).sum(axis=-1)
    seen = spectrum.sum(axis=-1)
    with np.errstate(invalid="ignore", divide="ignore"):
        full = np.where(m > 0, 1.0 - spectrum[..., 0] / m, 0.0)
    target = full.min(axis=-1)
    low, high = np.zeros_like(m), np.maximum(m - 1.0, 0.0)
    for _ in range(40):
        middle = (low + high) / 2
        below = _coverage(spectrum, x, m, middle) < target[..., None]
        low, high = np.where(below, middle, low), np.where(below, high, middle)
    size = (low + high) / 2
    kept = seen - (spectrum * np.exp(_log_missed(x, m[..., None], size[..., None]))).sum(axis=-1)
    at_full = full <= target[..., None] + 1e-12
    return np.where(m > 0, np.where(at_full, np.minimum(seen, _at_full(spectrum, x, m)), kept), 0.0), target


def _at_full(spectrum: Floats, x: Floats, m: Floats) -> Floats:
    """Expected distinct milestones in all mentions but one, the size at which Good's coverage of the sample stands."""
    size = np.maximum(m - 1.0, 0.0)
    return np.asarray(spectrum.sum(axis=-1) - (spectrum * np.exp(_log_missed(x, m[..., None], size[..., None]))).sum(axis=-1))


def _coverage(spectrum: Floats, x: Floats, m: Floats, size: Floats) -> Floats:
    """Expected coverage of ``size`` mentions out of m."""
    a, s = m[..., None], size[..., None]
    below = np.maximum(a - 1.0, 0.0)
    log = _log_choose(a - x, np.minimum(s, below)) - _log_choose(below, np.minimum(s, below))
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.asarray(1.0 - np.where(a > 0, spectrum * x / a * np.exp(np.minimum(log, 0.0)), 0.0).sum(axis=-1))


def _log_missed(x: Floats, m: Floats, size: Floats) -> Floats:
    """log chance that none of x mentions is among ``size`` out of m."""
    return np.minimum(_log_choose(m - x, size) - _log_choose(m, size), 0.0)


def _log_choose(a: Floats, b: Floats) -> Floats:
    good = (a >= b) & (a >= 0)
    safe = np.where(good, a, 1.0)
    under = np.where(good, b, 0.0)
    return np.where(good, gammaln(safe + 1) - gammaln(under + 1) - gammaln(safe - under + 1), -np.inf)


CHECK = Check("equal_effort", "Does the trend stand at equal effort of the lists?", "two independent lists that share milestones", run)
