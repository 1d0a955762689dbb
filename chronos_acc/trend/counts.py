# SPDX-License-Identifier: Apache-2.0
"""Lists that give counts per bin of time only: the same rate laws, fitted to the counts.

Given their sum, counts are multinomial with the law's share of each bin, so no date inside a bin is made up. Counts scatter more
than Poisson where events come in bunches: Pearson's dispersion says by how much, and a second interval allows for it
(quasi-likelihood; McCullagh and Nelder 1989).
"""

from __future__ import annotations

import csv
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from scipy.optimize import brentq
from scipy.special import gammaincc, stdtrit, xlogy

from ..errors import ListRefused, RecordRefused, WrongUse
from .curves import CURVES, Curve, Place, step
from .positions import Floats
from .rate_laws import CHI2_95

if TYPE_CHECKING:
    import pandas as pd

OF_THE_LAW = ("log_likelihood", "aicc", "bic", "deviance", "dispersion", "lr", "lr_p", "same_curve_as")
GRIDS: dict[str, Floats] = {
    "log_linear": np.concatenate([-np.geomspace(1e6, 0.25, 60), np.geomspace(0.25, 1e6, 60)]),
    "power_law": np.linspace(-6.0, 14.0, 81),  # logarithm of the exponent
    "hyperbolic": np.append(np.linspace(-30.0, 6.0, 73), 10.0),
}


@dataclass(frozen=True)
class CountRow:
    """One law fitted to counts. log_likelihood = sum(c ln mu - mu) over bins, without c!; deviance against one rate a bin;
    dispersion: Pearson's sum of squares over its degrees of freedom; low_robust and high_robust allow for it. lr and lr_p: twice
    the log-likelihood over the steady law, and its p (hyperbolic: half of it, on the boundary; step: bootstrap).
    """

    law: str
    parameters: dict[str, float | None]
    low: dict[str, float | None]
    high: dict[str, float | None]
    low_robust: dict[str, float | None]
    high_robust: dict[str, float | None]
    log_likelihood: float | None
    aicc: float | None
    bic: float | None
    deviance: float | None
    dispersion: float | None
    lr: float | None
    lr_p: float | None
    same_curve_as: str | None


@dataclass(frozen=True)
class CountsResult:
    """All laws on one series of counts: bins, n events in all."""

    rows: tuple[CountRow, ...]
    bins: int
    n: int
    notes: tuple[str, ...] = field(default=())

    def row(self, law: str) -> CountRow:
        """The row of one law, by name."""
        return next(r for r in self.rows if r.law == law)

    def to_frame(self) -> pd.DataFrame:
        """One row a law and parameter."""
        import pandas as pd

        out = []
        for r in self.rows:
            for name, value in r.parameters.items():
                line: dict[str, object] = {"law": r.law, "parameter": name, "estimate": value, "low": r.low[name], "high": r.high[name]}
                line.update(low_robust=r.low_robust[name], high_robust=r.high_robust[name])
                line.update({key: getattr(r, key) for key in OF_THE_LAW})
                out.append(line)
        return pd.DataFrame(out)


def fit_counts(
    edges: Sequence[float] | Floats, counts: Sequence[int] | Floats, *, seed: int = 1, replicates: int = 499
) -> CountsResult:
    """Fit the rate laws to counts (q,) between edges (q + 1,) in decimal years; the window is the first to the last edge, its start
    a given start.

    Raises WrongUse for edges that do not rise or counts that are no whole numbers, RecordRefused for fewer than two bins or no
    event.
    """
    e, c = np.asarray(edges, dtype=float), np.asarray(counts, dtype=float)
    if e.ndim != 1 or c.shape != (len(e) - 1,) or not np.isfinite(e).all() or not (np.diff(e) > 0).all():
        raise WrongUse("edges must rise, one more than counts")
    if not np.isfinite(c).all() or (c < 0).any() or (c != np.rint(c)).any():
        raise WrongUse("counts must be whole numbers, zero or above")
    if len(c) < 2 or not c.sum() > 0:
        raise RecordRefused(f"{len(c)} bins with {int(c.sum())} events; a law needs at least two bins and one event")
    place = Place(start=float(e[0]), span=float(e[-1] - e[0]), present=float(e[-1]), n=int(c.sum()))
    x, v = (e - e[0]) / place.span, (e[-1] - e) / place.span
    base = _likelihood(np.diff(e) / place.span, c, place)
    rows = [_row(curve, x, v, c, place, base, seed, replicates) for curve in CURVES]
    notes = []
    for row in rows:
        if row.log_likelihood is None:
            sides = f"needs {step.fewest(place.n)} events on each side of an edge"
            why = sides if row.law == "step" else "has no best parameter: all events lie in one outer bin"
            notes.append(f"{row.law} {why}.")
    worst = max((r.dispersion for r in rows if r.dispersion is not None), default=1.0)
    if worst > 1.5:
        notes.append(f"Counts scatter more than Poisson (dispersion up to {worst:.3g}): read the robust intervals.")
    return CountsResult(tuple(rows), len(c), place.n, tuple(notes))


def _shares(curve: Curve, theta: Floats, x: Floats, v: Floats) -> Floats:
    """Share of the events in each bin, differences of whichever cumulated side is the smaller."""
    with np.errstate(divide="ignore"):
        share, rest = curve.cumulative(theta, x, v)
    return np.asarray(np.maximum(np.where(rest[:-1] < 0.5, rest[:-1] - rest[1:], share[1:] - share[:-1]), 0.0))


def _likelihood(shares: Floats, counts: Floats, place: Place) -> float:
    mu = place.n * shares
    with np.errstate(divide="ignore"):
        return float(xlogy(counts, mu).sum() - place.n)


def _theta(curve: Curve, p: float) -> Floats:
    return np.array([np.exp(p) if curve.name == "power_law" else p])


def _row(curve: Curve, x: Floats, v: Floats, c: Floats, place: Place, base: float, seed: int, replicates: int) -> CountRow:
    nothing: dict[str, float | None] = dict.fromkeys(curve.parameters)
    if curve is step.CURVE:
        return _step_row(x, c, place, base, seed, replicates)
    n, k = place.n, curve.k
    if curve.name == "steady":
        fitted, theta = base, np.empty(0)
    else:

        def value(p: float) -> float:
            return _likelihood(_shares(curve, _theta(curve, p), x, v), c, place)

        p, fitted = _maximum(value, GRIDS[curve.name])
        if curve.name == "hyperbolic" and (fitted <= base or p >= GRIDS[curve.name][-1]):
            p, fitted = np.inf, base
        elif p in (GRIDS[curve.name][0], GRIDS[curve.name][-1]):
            return _nothing(curve)  # all events in an outer bin: the likelihood only rises
        theta = _theta(curve, p)
    shares = _shares(curve, theta, x, v)
    dispersion, deviance = _scatter(shares, c, place, k)
    intervals = []
    for critical in (CHI2_95, _critical(dispersion, len(c), k)):
        if critical is None:
            intervals.append((nothing, nothing))
        elif curve.name == "steady":
            intervals.append(_sides(curve.interval(theta, x, v, place, critical)))
        else:
            intervals.append(_profile(curve, value, p, fitted, base, critical, place))
    (low, high), (low_robust, high_robust) = intervals
    lr = None if curve.name == "steady" else max(0.0, 2.0 * (fitted - base))
    tail = None if lr is None else float(gammaincc(0.5, lr / 2.0))
    parameters = curve.natural(theta, place)
    return CountRow(
        law=curve.name,
        parameters=parameters,
        low=low,
        high=high,
        low_robust=low_robust,
        high_robust=high_robust,
        log_likelihood=fitted,
        aicc=-2 * fitted + 2 * k + 2 * k * (k + 1) / (n - k - 1) if n > k + 1 else None,
        bic=-2 * fitted + k * float(np.log(n)),
        deviance=deviance,
        dispersion=dispersion,
        lr=lr,
        lr_p=tail if curve.name != "hyperbolic" or tail is None else (0.5 * tail if lr else 1.0),
        same_curve_as=curve.same_curve(parameters, place),
    )


def _nothing(curve: Curve) -> CountRow:
    none: dict[str, float | None] = dict.fromkeys(curve.parameters)
    return CountRow(curve.name, none, none, none, none, none, None, None, None, None, None, None, None, None)


def _critical(dispersion: float | None, bins: int, k: int) -> float | None:
    if dispersion is None or dispersion <= 0 or bins <= k:
        return None
    return dispersion * float(stdtrit(bins - k, 0.975)) ** 2


def _scatter(shares: Floats, c: Floats, place: Place, k: int) -> tuple[float | None, float]:
    """Pearson's dispersion (None without degrees of freedom) and the deviance."""
    mu = place.n * shares
    with np.errstate(divide="ignore", invalid="ignore"):
        terms = np.where(mu > 0, (c - mu) ** 2 / mu, 0.0)
        deviance = 2.0 * float((xlogy(c, np.where(c > 0, c / mu, 1.0)) - (c - mu)).sum())
    return (float(terms.sum()) / (len(c) - k) if len(c) > k else None), deviance


def _maximum(value: Callable[[float], float], grid: Floats) -> tuple[float, float]:
    """Best point of a grid, then the zero of the slope beside it."""
    values = np.array([value(float(p)) for p in grid])
    i = int(np.nanargmax(np.where(np.isfinite(values), values, -np.inf)))
    low, high = float(grid[max(i - 1, 0)]), float(grid[min(i + 1, len(grid) - 1)])

    def slope(p: float) -> float:
        h = 1e-4 * max(1.0, abs(p))
        return value(p + h) - value(p - h)

    if not slope(low) > 0 > slope(high):
        return float(grid[i]), float(values[i])
    best = float(brentq(slope, low, high, xtol=1e-12))
    return best, value(best)


Ends = tuple[dict[str, float | None], dict[str, float | None]]


def _sides(interval: dict[str, tuple[float | None, float | None]]) -> Ends:
    return {name: pair[0] for name, pair in interval.items()}, {name: pair[1] for name, pair in interval.items()}


def _profile(curve: Curve, value: Callable[[float], float], p: float, top: float, base: float, critical: float, place: Place) -> Ends:
    """Ends of the profile interval in years; None where the likelihood never falls so far."""

    def over(at: float) -> float:
        return 2.0 * (top - value(at)) - critical

    grid = GRIDS[curve.name]
    (name,) = curve.parameters
    out: list[dict[str, float | None]] = []
    for side in (-1.0, 1.0):
        centre = p if np.isfinite(p) else float(grid[-1])
        if curve.name == "hyperbolic" and side > 0 and 2.0 * (top - base) <= critical:
            out.append({name: None})
            continue
        reach, edge = 0.1, None
        while reach < (600.0 if curve.name == "power_law" else 1e5):
            if over(centre + side * reach) > 0:
                edge = float(brentq(over, centre, centre + side * reach, xtol=1e-12))
                break
            reach *= 1.6
        if edge is None:
            out.append({name: place.present if curve.name == "hyperbolic" and side < 0 else None})
        else:
            out.append(curve.natural(_theta(curve, edge), place))
    return out[0], out[1]


def _step_row(x: Floats, c: Floats, place: Place, base: float, seed: int, replicates: int) -> CountRow:
    """The step at an edge between bins, fewest events on each side as for dates; its ratio against steady counts of the same sum."""
    nothing: dict[str, float | None] = dict.fromkeys(step.CURVE.parameters)
    gain, at = _best_step(c[None, :], x, place.n)
    if not np.isfinite(gain[0]):
        return _nothing(step.CURVE)
    first = int(at[0])
    before, after = c[:first].sum() / (place.span * x[first]), c[first:].sum() / (place.span * (1 - x[first]))
    shares = np.where(np.arange(len(c)) < first, before, after) * np.diff(x) * place.span / place.n
    dispersion, deviance = _scatter(shares, c, place, 3)
    fitted = base + float(gain[0])
    p = None
    if replicates:
        null = np.random.default_rng([seed, 5500]).multinomial(place.n, np.diff(x), size=replicates)
        p = (1 + int((_best_step(null.astype(float), x, place.n)[0] >= gain[0] * (1 - 1e-12)).sum())) / (replicates + 1)
    year = place.start + place.span * float(x[first])
    parameters: dict[str, float | None] = {"year": year, "before": float(before), "after": float(after)}
    n = place.n
    return CountRow(
        "step",
        parameters,
        nothing,
        nothing,
        nothing,
        nothing,
        fitted,
        -2 * fitted + 6 + 24 / (n - 4) if n > 4 else None,
        -2 * fitted + 3 * float(np.log(n)),
        deviance,
        dispersion,
        2.0 * float(gain[0]),
        p,
        None,
    )


def _best_step(c: Floats, x: Floats, n: int) -> tuple[Floats, np.ndarray[tuple[int, ...], np.dtype[np.intp]]]:
    """Gain in log-likelihood over steady of the best edge, and the edge, for rows of counts; -inf where no edge leaves enough
    events on both sides.
    """
    before = np.cumsum(c, axis=1)[:, :-1]
    inner = x[1:-1]
    least = step.fewest(n)
    with np.errstate(divide="ignore", invalid="ignore"):
        gain = xlogy(before, before / (n * inner)) + xlogy(n - before, (n - before) / (n * (1 - inner)))
    gain = np.where((before >= least) & (n - before >= least), gain, -np.inf)
    best = gain.argmax(axis=1)
    return np.take_along_axis(gain, best[:, None], axis=1)[:, 0], best + 1


def read_counts(path: Path) -> tuple[Floats, Floats]:
    """Edges (q + 1,) and counts (q,) from a CSV file with columns from, to, count; bins in order, each starting where the last one ends.

    Raises ListRefused, naming the line.
    """
    try:
        with path.open(encoding="utf-8-sig", newline="") as file:
            rows = list(csv.DictReader(file))
    except (OSError, UnicodeDecodeError, csv.Error) as error:
        raise ListRefused(f"{path}: not a readable CSV file; give one with columns from, to and count") from error
    if not rows or not {"from", "to", "count"} <= set(rows[0]):
        raise ListRefused(f"{path}: no columns from, to and count, or no rows; the first line must name them")
    edges: list[float] = []
    counts: list[float] = []
    for line, row in enumerate(rows, start=2):
        try:
            low, high, count = float(row["from"]), float(row["to"]), float(row["count"])
        except (TypeError, ValueError) as error:
            raise ListRefused(f"{path}, line {line}: from {row['from']!r}, to {row['to']!r} and count {row['count']!r} must be numbers") from error
        if edges and low != edges[-1]:
            raise ListRefused(f"{path}, line {line}: the bin starts at {low:g}, the one before ends at {edges[-1]:g}; bins must join, empty ones with count 0")
        edges = edges or [low]
        edges.append(high)
        counts.append(count)
    return np.array(edges), np.array(counts)
