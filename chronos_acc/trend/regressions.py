# SPDX-License-Identifier: Apache-2.0
"""Regressions of log10 interval on log10 age, on order, and on time: estimators, influence, and a sensitivity row from the datings.

Response: log10 of every closed interval longer than zero (milestones of one instant are joined), in years. Predictors run so that a
positive slope is speeding: log10_age, the age at the interval's older end; order, counted back from the youngest interval; log10_time,
minus log10 of the time from the start of the window to the interval's younger end, that is elapsed time counted back.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt
from scipy.special import ndtri, stdtrit

from ..errors import WrongUse
from ..progress import Tell, silent
from ..record import Record, Window
from .least_squares import LeastSquares, line
from .line_estimators import exponential_line, median_line, theil_sen_line

if TYPE_CHECKING:
    import pandas as pd

Floats = npt.NDArray[np.float64]

RESPONSE = "log10_interval"
PREDICTORS = ("log10_age", "order", "log10_time")
ESTIMATORS = ("ols_hc3", "ols_hac", "median", "theil_sen", "glm")
HAC_FROM = 100  # below this many intervals its intervals cover 75 to 85 % of what they promise
PAIRS_LIMIT = 600  # Theil–Sen looks at every pair of intervals, in every null record too
DRAW_CELLS = 250_000  # draws taken at a time: small enough to stay in the cache
DRAW_ROWS = 100  # but never fewer draws at a time, since every milestone costs a call
MOST_DRAWN = 2_000_000  # drawn dates in all: above it fewer draws are made, never under FEWEST_DRAWS
FEWEST_DRAWS = 199


@dataclass(frozen=True)
class RegressionRow:
    """One fitted slope. low and high: 95 %; n intervals. ``remark`` marks what should not be read as the main result."""

    response: str
    predictor: str
    estimator: str
    slope: float | None
    std_error: float | None
    low: float | None
    high: float | None
    r_squared: float | None
    n: int
    intercept: float | None = None
    remark: str = ""


@dataclass(frozen=True)
class LeverageRow:
    """How much one interval (named by the milestone that opens it) carries in the main regression."""

    milestone: int
    title: str
    age: float
    interval: float
    leverage: float
    cooks_distance: float
    slope_without: float


@dataclass(frozen=True)
class Regressions:
    """Rows of all predictors and estimators, the influence of each interval in the main one, and remarks."""

    rows: tuple[RegressionRow, ...]
    leverage: tuple[LeverageRow, ...] = ()
    floored: int = 0
    notes: tuple[str, ...] = field(default=())

    def row(self, predictor: str = "log10_age", estimator: str = "ols_hc3") -> RegressionRow | None:
        """The row of one predictor and estimator, or None."""
        return next((r for r in self.rows if (r.predictor, r.estimator) == (predictor, estimator)), None)

    def to_frame(self) -> pd.DataFrame:
        """One row a slope, unrounded."""
        from .frames import frame

        return frame(self.rows, RegressionRow)


@dataclass(frozen=True)
class Pairs:
    """The r closed intervals longer than zero of a window, oldest first: ``older`` positions in the window of the milestone that opens
    each."""

    older: npt.NDArray[np.int64]
    interval: Floats
    age: Floats
    order: Floats
    elapsed: Floats

    @classmethod
    def of(cls, window: Window) -> Pairs:
        """Intervals of a window on best dates, zero ones dropped."""
        intervals = window.intervals
        older = np.nonzero(intervals > 0)[0]
        interval = intervals[older]
        return cls(
            older=older,
            interval=interval,
            age=window.present - window.times[older],
            order=np.arange(len(older), 0, -1, dtype=float),
            elapsed=window.times[older + 1] - window.start,
        )

    def predictor(self, name: str) -> Floats:
        """(r,) values of a predictor; WrongUse for an unknown name."""
        if name == "log10_age":
            return np.log10(self.age)
        if name == "order":
            return self.order
        if name == "log10_time":
            return np.asarray(-np.log10(self.elapsed))
        raise WrongUse(f"predictor {name!r} is not known; it is one of {', '.join(PREDICTORS)}")


def regress(
    window: Window,
    *,
    record: Record | None = None,
    predictors: Sequence[str] = PREDICTORS,
    estimators: Sequence[str] = ESTIMATORS,
    draws: int = 0,
    seed: int = 1,
    tell: Tell = silent,
) -> Regressions:
    """Fit every estimator on every predictor. With a record: influence with milestones named, and with draws > 0 a row of drawn datings.

    Fewer than three intervals longer than zero, or all at one age, give no rows and a remark. Raises WrongUse for unknown names.
    """
    unknown = [e for e in estimators if e not in _FITS]
    if unknown:
        raise WrongUse(f"estimator {unknown[0]!r} is not known; it is one of {', '.join(ESTIMATORS)}")
    pairs = Pairs.of(window)
    notes: list[str] = []
    if len(pairs.interval) < 3:
        for name in predictors:
            pairs.predictor(name)
        return Regressions((), notes=("fewer than three closed intervals longer than zero: no regression",))
    y = np.log10(pairs.interval)
    rows: list[RegressionRow] = []
    for name in predictors:
        x = pairs.predictor(name)
        for estimator in estimators:
            rows.extend(_FITS[estimator](x, y, name))
    if "theil_sen" in estimators and len(y) > PAIRS_LIMIT:
        notes.append(f"theil_sen is left out above {PAIRS_LIMIT:,} intervals: it compares every pair, in every null record too")
    leverage: tuple[LeverageRow, ...] = ()
    floored = 0
    if record is not None:
        leverage = _leverage(line(pairs.predictor("log10_age"), y), pairs, window, record)
        if draws > 0 and "log10_age" in predictors:
            made = min(draws, max(FEWEST_DRAWS, MOST_DRAWN // len(record)))
            drawn = drawn_slopes(record, draws=made, seed=seed, tell=tell)
            if drawn is not None:
                if made < draws:
                    notes.append(f"{made} draws instead of {draws:,} behind the row of draws, for {len(record):,} milestones")
                floored = drawn.floored
                rows.append(_draw_row(drawn, len(y)))
                if floored:
                    notes.append(
                        f"{floored} of {drawn.cells} drawn ages and intervals lay under half the finest dating unit and were set to it"
                    )
            else:
                notes.append("every date is exact as written: drawing the datings changes nothing, and no row of draws is given")
    return Regressions(tuple(rows), leverage, floored, tuple(notes))


# ------------------------------------------------------------------------------------------------------------- draws


@dataclass(frozen=True)
class DrawnSlopes:
    """slope and r_squared (draws,) of log10 interval on log10 age, dates drawn from their datings; ``floored`` of ``cells`` values were
    raised."""

    slope: Floats
    r_squared: Floats
    floored: int
    cells: int


def drawn_slopes(record: Record, *, draws: int, seed: int, tell: Tell = silent) -> DrawnSlopes | None:
    """The main regression on drawn dates: sorted anew in each draw, values floored at half the finest dating unit. None where no date is
    uncertain.

    A sensitivity, not a confidence interval: dating errors hardly move this slope.
    """
    window = record.window
    if window.finest_unit <= 0 or len(window.times) < 4:
        return None
    floor = 0.5 * window.finest_unit
    keep = np.zeros(len(record), bool)
    keep[window.index] = True
    # a given start can let in or shut out milestones from draw to draw; without one, those in the window stay in it
    seen = record.only(keep=keep) if record.start is None and not keep.all() else record
    slopes: list[Floats] = []
    squares: list[Floats] = []
    floored = cells = done = 0
    for dates in _chunks(seen, draws, seed):
        slope, square, raised, count = drawn_lines(dates, record.present, record.start, floor)
        slopes.append(slope)
        squares.append(square)
        floored += raised
        cells += count
        done += len(dates)
        tell("drawing dates", done / draws)
    return DrawnSlopes(np.concatenate(slopes), np.concatenate(squares), floored, cells)


def _chunks(record: Record, draws: int, seed: int) -> Iterator[Floats]:
    return record.draws(draws, seed, chunk=max(DRAW_ROWS, DRAW_CELLS // max(len(record), 1)))


def drawn_lines(dates: Floats, present: float, start: float | None, floor: float) -> tuple[Floats, Floats, int, int]:
    """slope, R², floored, cells of drawn dates (rows, m). Logs are natural: both sides alike, so slope and R² are those of log10."""
    ages = present - dates
    ages.sort(axis=1)  # youngest first
    outside = bool(ages[:, 0].min() < 0) or (start is not None and bool(ages[:, -1].max() > present - start))
    intervals = ages[:, 1:] - ages[:, :-1]
    older = ages[:, 1:]
    cells = 2 * intervals.size
    short = intervals < floor
    raised = int(short.sum()) + int((older < floor).sum())
    np.maximum(intervals, floor, out=intervals)
    if not outside:
        x, y = np.log(np.maximum(older, floor)), np.log(intervals)
        x -= x.mean(axis=1, keepdims=True)
        y -= y.mean(axis=1, keepdims=True)
        sxx, sxy, syy = (np.einsum("ij,ij->i", a, b) for a, b in ((x, x), (x, y), (y, y)))
    else:
        limit = np.inf if start is None else present - start
        w = ((ages[:, :-1] >= 0) & (older <= limit)).astype(float)
        x, y = np.log(np.maximum(older, floor)), np.log(intervals)
        count = np.maximum(w.sum(axis=1, keepdims=True), 1.0)
        x -= (w * x).sum(axis=1, keepdims=True) / count
        y -= (w * y).sum(axis=1, keepdims=True) / count
        sxx, sxy, syy = (np.einsum("ij,ij,ij->i", w, a, b) for a, b in ((x, x), (x, y), (y, y)))
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.asarray(sxy / sxx), np.asarray(sxy * sxy / (sxx * syy)), raised, cells


def _draw_row(drawn: DrawnSlopes, n: int) -> RegressionRow:
    good = np.isfinite(drawn.slope)
    if not good.any():
        return RegressionRow(RESPONSE, "log10_age", "draws", None, None, None, None, None, n, remark="no draw gave a slope")
    low, median, high = np.quantile(drawn.slope[good], [0.025, 0.5, 0.975])
    return RegressionRow(
        RESPONSE,
        "log10_age",
        "draws",
        float(median),
        None,
        float(low),
        float(high),
        float(np.median(drawn.r_squared[good])),
        n,
        remark="sensitivity to the datings (median and 95 % of draws), not a confidence interval",
    )


# -------------------------------------------------------------------------------------------------------- estimators


def _ols_hc3(x: Floats, y: Floats, predictor: str) -> list[RegressionRow]:
    if np.ptp(x) == 0:
        return []
    fit = line(x, y)
    return [_least_squares_row(fit, float(fit.hc3()[1]), predictor, "ols_hc3", "")]


def _ols_hac(x: Floats, y: Floats, predictor: str) -> list[RegressionRow]:
    if len(x) < HAC_FROM or np.ptp(x) == 0:
        return []
    fit = line(x, y)
    lags = int(4 * (len(x) / 100) ** (2 / 9))
    remark = f"Newey–West with {lags} lags: its interval tends to be too short"
    return [_least_squares_row(fit, float(fit.hac(lags)[1]), predictor, "ols_hac", remark)]


def _least_squares_row(fit: LeastSquares, error: float, predictor: str, estimator: str, remark: str) -> RegressionRow:
    n = len(fit.residuals)
    slope = float(fit.coefficients[1])
    half = float(stdtrit(n - 2, 0.975)) * error
    finite = np.isfinite(half)
    return RegressionRow(
        RESPONSE,
        predictor,
        estimator,
        slope,
        error if finite else None,
        slope - half if finite else None,
        slope + half if finite else None,
        fit.r_squared if np.isfinite(fit.r_squared) else None,
        n,
        float(fit.coefficients[0]),
        remark,
    )


def _median(x: Floats, y: Floats, predictor: str) -> list[RegressionRow]:
    if np.ptp(x) == 0:
        return []
    n = len(x)
    intercept, slope = median_line(x, y)
    left = y - intercept - slope * x
    # sparsity by an Epanechnikov kernel with the Hall–Sheather bandwidth
    width = n ** (-1 / 3) * ndtri(0.975) ** (2 / 3) * (1.5 / (2 * np.pi)) ** (1 / 3)
    spread = min(float(y.std()), float(np.subtract(*np.percentile(left, [75, 25]))) / 1.34)
    band = spread * float(ndtri(min(0.5 + width, 1 - 1e-9)) - ndtri(max(0.5 - width, 1e-9)))
    error = None
    if band > 0:
        u = left / band
        density = float(np.where(np.abs(u) <= 1, 0.75 * (1 - u * u), 0.0).sum()) / (n * band)
        if density > 0:  # a line between points of a small record may have none near it
            error = 0.5 / density / float(np.sqrt(((x - x.mean()) ** 2).sum()))
    half = None if error is None else float(stdtrit(n - 2, 0.975)) * error
    flat = float(np.abs(y - np.median(y)).sum())
    return [
        RegressionRow(
            RESPONSE,
            predictor,
            "median",
            slope,
            error,
            None if half is None else slope - half,
            None if half is None else slope + half,
            1.0 - float(np.abs(left).sum()) / flat if flat > 0 else None,
            n,
            intercept,
            "r_squared is the share of absolute deviation explained (Koenker & Machado 1999)",
        )
    ]


def _theil_sen(x: Floats, y: Floats, predictor: str) -> list[RegressionRow]:
    if np.ptp(x) == 0 or len(x) > PAIRS_LIMIT:
        return []
    slope, intercept, low, high = theil_sen_line(x, y)
    return [RegressionRow(RESPONSE, predictor, "theil_sen", slope, None, low, high, None, len(x), intercept)]


def _glm(x: Floats, y: Floats, predictor: str) -> list[RegressionRow]:
    if np.ptp(x) == 0:
        return []
    beta, errors = exponential_line(x, y * np.log(10))
    slope, error, half = (float(v) / np.log(10) for v in (beta[1], errors[1], ndtri(0.975) * errors[1]))
    intercept = float(beta[0]) / np.log(10)
    return [
        RegressionRow(
            RESPONSE,
            predictor,
            "glm",
            slope,
            error,
            slope - half,
            slope + half,
            None,
            len(x),
            intercept,
            "exponential response: not the likelihood of the waiting times unless the rate stays constant between milestones",
        )
    ]


_FITS: dict[str, Callable[[Floats, Floats, str], list[RegressionRow]]] = {
    "ols_hc3": _ols_hc3,
    "ols_hac": _ols_hac,
    "median": _median,
    "theil_sen": _theil_sen,
    "glm": _glm,
}


def _leverage(fit: LeastSquares, pairs: Pairs, window: Window, record: Record) -> tuple[LeverageRow, ...]:
    """Every interval's leverage and influence, the most influential first."""
    cook, without = fit.cooks_distance(), fit.without()[:, 1]
    order = np.argsort(-np.nan_to_num(cook, nan=np.inf), kind="stable")
    out = []
    for i in order:
        j = int(window.index[pairs.older[i]])
        out.append(
            LeverageRow(
                int(record.id[j]),
                record.title[j],
                float(pairs.age[i]),
                float(pairs.interval[i]),
                float(fit.hat[i]),
                float(cook[i]),
                float(without[i]),
            )
        )
    return tuple(out)
