# SPDX-License-Identifier: Apache-2.0
"""The regressions beside the nulls: what every estimator gives on every predictor in whole null records.

The least-squares slope and R² on log10 age stand in the main table of nulls; here are the other predictors and the other estimators. The
slower an estimator, the fewer records it is given, never under ``FEWEST_RECORDS``; in long records it stands beside log_uniform only.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import asdict, dataclass, fields
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt

from ..progress import Tell, silent
from ..record import Record, Window
from . import words
from .line_batches import exponential_slopes, median_lines, ols_slopes, theil_sen_slopes
from .null_model import Null
from .null_table import FEWEST_RECORDS, NullRow, NullTable, null_row, null_times_in_chunks, records_for
from .precision import Kernel
from .regressions import PAIRS_LIMIT, PREDICTORS, RegressionRow, drawn_lines

if TYPE_CHECKING:
    import pandas as pd

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.int64]

LN10 = float(np.log(10.0))
DRAWS_NULL = 999  # null records drawn once each behind the row of draws
MAIN = "ols_hc3"  # ols_hac draws the same line: it shares these rows
JUDGED_WHEN_FITTED = "log10_age"  # the predictor whose slope and R² keep their size under a fitted null


@dataclass(frozen=True)
class Lines:
    """An estimator on many records: ``fit(x, y)`` gives the arrays (s,) named in ``gives``; at most ``records`` null records, of all nulls
    up to ``limit`` intervals, of log_uniform above."""

    estimator: str
    gives: tuple[str, ...]
    fit: Callable[[Floats, Floats], tuple[Floats, ...]]
    records: Callable[[int], int]
    limit: int


def _few(intervals: int) -> int:
    return max(FEWEST_RECORDS, min(299, 50_000 // max(intervals, 1)))


LINES = (
    Lines(MAIN, ("slope", "r_squared"), ols_slopes, lambda r: 1_000_000_000, 1_000_000_000),
    Lines("median", ("slope", "r_squared"), lambda x, y: median_lines(x, y)[::2], _few, 500),
    Lines("theil_sen", ("slope",), lambda x, y: (theil_sen_slopes(x, y),), lambda r: FEWEST_RECORDS, 200),
    Lines("glm", ("slope",), lambda x, y: (exponential_slopes(x, y * LN10) / LN10,), _few, 500),
)


def statistic_name(what: str, predictor: str, estimator: str) -> str:
    """Name of a row: slope or r_squared on log10_age bare for least squares, as in the main table."""
    if estimator != MAIN:
        return f"{what} on {predictor}, {estimator}"
    return what if predictor == "log10_age" else f"{what} on {predictor}"


def regression_nulls(
    record: Record,
    nulls: Sequence[Null],
    *,
    seed: int,
    replicates: int = 1999,
    window: Window | None = None,
    drawn: RegressionRow | None = None,
    tell: Tell = silent,
) -> NullTable:
    """Every predictor and estimator beside every null, but for least squares on log10 age, which ``null_table`` has. Rows say in
    ``records`` how many null records stand behind them. ``drawn``: the row of drawn dates, to stand beside null records drawn once each."""
    window = record.window if window is None else window
    intervals = int((window.intervals > 0).sum()) if len(window.times) else 0
    if window.n < 1 or not window.span > 0 or intervals < 3:
        return NullTable((), replicates)
    replicates = records_for(window, replicates)
    chosen = [line for line in LINES if line.estimator != "theil_sen" or intervals <= PAIRS_LIMIT]
    observed = _values(window.times[None], window, chosen, {line.estimator: 1 for line in chosen})
    rows: list[NullRow] = []
    for done, null in enumerate(nulls):
        here = [line for line in chosen if intervals <= line.limit or null.name == "log_uniform"]
        most = {line.estimator: min(replicates, line.records(intervals)) for line in here}
        parts: list[dict[tuple[str, str, str], Floats]] = []
        made = 0
        draws = DRAWS_NULL if drawn is not None and drawn.slope is not None else 0
        redrawn: list[tuple[Floats, Floats]] = []
        for times in null_times_in_chunks(record, null, seed=seed, replicates=replicates, window=window):
            parts.append(_values(times, window, here, {e: max(min(k - made, len(times)), 0) for e, k in most.items()}))
            if made < draws:
                redrawn.append(_redrawn(record, window, times[: draws - made], np.random.default_rng([seed, 6200, made])))
            made += len(times)
        for key in parts[0]:
            rows.append(
                null_row(
                    null,
                    statistic_name(*key),
                    "upper",
                    float(observed[key][0]),
                    np.concatenate([p[key] for p in parts]),
                    judged=key[1] == JUDGED_WHEN_FITTED,
                )
            )
        for position, what in enumerate(("slope", "r_squared")):
            seen = getattr(drawn, what, None)
            if redrawn and seen is not None:
                values = np.concatenate([pair[position] for pair in redrawn])
                rows.append(null_row(null, statistic_name(what, "log10_age", "draws"), "upper", seen, values, judged=True))
        tell(f"regressions under {null.name}", (done + 1) / len(nulls))
    return NullTable(tuple(rows), replicates, _notes(intervals, chosen, replicates))


def _redrawn(record: Record, window: Window, times: Floats, rng: np.random.Generator) -> tuple[Floats, Floats]:
    """Slopes and R² of null records with every date drawn once from the dating it took over."""
    donor = window.index[Kernel.of(record, window).donors(times, window.present)]
    first, last = (record.best - record.earliest)[donor], (record.latest - record.best)[donor]
    even = rng.random(times.shape) * (first + last) - first
    moved = np.where(record.sd[donor] > 0, record.sd[donor] * rng.standard_normal(times.shape), even)
    slope, square, _, _ = drawn_lines(np.minimum(times + moved, window.present), window.present, record.start, 0.5 * window.finest_unit)
    return slope, square


def _notes(intervals: int, chosen: Sequence[Lines], replicates: int) -> tuple[str, ...]:
    fewer: dict[int, list[str]] = {}
    for line in chosen:
        count = min(replicates, line.records(intervals))
        if count < replicates:
            fewer.setdefault(count, []).append(line.estimator)
    notes = []
    if fewer:
        said = ", ".join(f"{count} for {words.listed(names)}" for count, names in fewer.items())
        notes.append(f"slow estimators stand beside fewer null records: {said} (null_records)")
    alone = [line.estimator for line in chosen if intervals > line.limit]
    if alone:
        notes.append(f"beside log_uniform only, for their number of intervals ({intervals:,}): {words.listed(alone)}")
    return tuple(notes)


def _values(times: Floats, window: Window, lines: Sequence[Lines], most: dict[str, int]) -> dict[tuple[str, str, str], Floats]:
    """(what, predictor, estimator) -> values of the first ``most`` of these records (s, w); NaN where there is no line."""
    keys = [
        (what, predictor, line.estimator)
        for predictor in PREDICTORS
        for line in lines
        for what in line.gives
        if (predictor, line.estimator) != ("log10_age", MAIN)
    ]
    out = {key: np.full(most[key[2]], np.nan) for key in keys}
    for rows, y, x in _alike(times, window):
        for line in lines:
            take = int(np.searchsorted(rows, most[line.estimator]))  # rows are in order
            if not take:
                continue
            asked = [p for p in PREDICTORS if (p, line.estimator) != ("log10_age", MAIN)]
            found = line.fit(np.concatenate([x[p][:take] for p in asked]), np.concatenate([y[:take]] * len(asked)))
            for what, values in zip(line.gives, found, strict=True):
                for predictor, part in zip(asked, np.split(values, len(asked)), strict=True):
                    out[what, predictor, line.estimator][rows[:take]] = part
    return out


def _alike(times: Floats, window: Window) -> Iterator[tuple[Ints, Floats, dict[str, Floats]]]:
    """Records of as many intervals above zero, together: their rows, responses (g, c), and predictors (g, c) by name."""
    intervals = np.diff(times, axis=1)
    keep = intervals > 0
    count = keep.sum(axis=1)
    for c in np.unique(count):
        if c < 3:
            continue
        rows = np.nonzero(count == c)[0]
        at = np.nonzero(keep[rows])[1].reshape(len(rows), c)
        dates = times[rows]
        y = np.log10(np.take_along_axis(intervals[rows], at, axis=1))
        yield (
            rows,
            y,
            {
                "log10_age": np.log10(window.present - np.take_along_axis(dates, at, axis=1)),
                "order": np.broadcast_to(np.arange(c, 0, -1, dtype=float), y.shape),
                "log10_time": -np.log10(np.take_along_axis(dates, at + 1, axis=1) - window.start),
            },
        )


@dataclass(frozen=True)
class Beside:
    """The regressions, every slope and R² beside what log_uniform gives: ``main`` has least squares on log10 age, ``others`` the rest."""

    regressions: tuple[RegressionRow, ...]
    main: NullTable
    others: NullTable

    def null(self, row: RegressionRow, what: str) -> NullRow | None:
        """What log_uniform gives for a row's slope or r_squared. HAC draws the line of least squares."""
        name = statistic_name(what, row.predictor, MAIN if row.estimator == "ols_hac" else row.estimator)
        return (self.main if name == what else self.others).row("log_uniform", name)

    def rows(self) -> list[dict[str, Any]]:
        """One a slope: the regression's own columns, then the band and p (upper tail), the same of R², and the number of null records."""
        out = []
        for row in self.regressions:
            slope, square = self.null(row, "slope"), None if row.r_squared is None else self.null(row, "r_squared")
            beside: dict[str, Any] = {"null": None if slope is None else slope.null}
            for prefix, found in (("", slope), ("r_squared_", square)):
                for end in ("low", "median", "high"):
                    beside[f"{prefix}null_{end}"] = None if found is None else getattr(found, end)
                beside[f"{prefix}p_value"] = None if found is None else found.p_value
            out.append({**asdict(row), **beside, "null_records": None if slope is None else slope.records})
        return out

    def to_frame(self) -> pd.DataFrame:
        """The same as a frame, NaN where nothing was computed."""
        import pandas as pd

        own = [f.name for f in fields(RegressionRow)]
        frame = pd.DataFrame(self.rows(), columns=[*own, "null", *BESIDE])
        return frame.astype(dict.fromkeys((*own[3:8], "intercept", *BESIDE), float))


BESIDE = (
    *("null_low", "null_median", "null_high", "p_value"),
    *("r_squared_null_low", "r_squared_null_median", "r_squared_null_high", "r_squared_p_value"),
    "null_records",
)
