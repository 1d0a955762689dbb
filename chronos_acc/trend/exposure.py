# SPDX-License-Identifier: Apache-2.0
"""Exposure: time counted in people, scholars or publications instead of years.

With e(t) the exposure of year t, operational time runs at the speed e(t). A process that is steady per unit of exposure is steady
in operational time, so every test, law and null of the package answers "is it speeding up beyond the exposure?" when it is given
the record in operational time (the time-rescaling theorem; Brown et al. 2002).
"""

from __future__ import annotations

import csv
from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np
import numpy.typing as npt

from ..dating.dating import Z975
from ..errors import ListRefused, RecordRefused, WrongUse
from ..mixture import NORMAL
from ..record import Record

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True)
class Exposure:
    """years (q,) increasing decimal years, values (q,) exposure per year, above zero.

    Where every row is one year after the one before, a row is the exposure of its calendar year [Y, Y + 1); otherwise rows are
    instants and the exposure runs straight between them. Past the last row it stays as it is, for one more step between rows at
    most.
    """

    years: Floats
    values: Floats

    @classmethod
    def of(cls, years: Sequence[float] | Floats, values: Sequence[float] | Floats) -> Exposure:
        """Checked and put in order of time. Raises WrongUse."""
        t, e = np.asarray(years, dtype=float), np.asarray(values, dtype=float)
        if t.ndim != 1 or t.shape != e.shape or len(t) < 2:
            raise WrongUse("exposure needs two or more rows of year and exposure")
        if not (np.isfinite(t).all() and np.isfinite(e).all()) or not (e > 0).all():
            raise WrongUse("every exposure and every year must be a finite number, and every exposure above zero")
        order = np.argsort(t, kind="stable")
        t, e = t[order], e[order]
        if (np.diff(t) <= 0).any():
            raise WrongUse(f"the year {t[1:][np.diff(t) <= 0][0]:g} stands twice in the exposure; give one row a year")
        return cls(t, e)

    @property
    def yearly(self) -> bool:
        """Whether rows are calendar years."""
        return bool((np.diff(self.years) == 1).all())

    @property
    def covers(self) -> tuple[float, float]:
        """First and last decimal year that the rows speak of, the continued last step included."""
        return float(self.years[0]), float(self.years[-1] + (self.years[-1] - self.years[-2]))

    def cumulated(self, t: npt.ArrayLike) -> Floats:
        """Exposure from the first row to t, t (...) in decimal years; straight on with the nearest value outside the rows."""
        at = np.asarray(t, dtype=float)
        years, values = self.years, self.values
        gaps = np.diff(years)
        pieces = gaps * (values[:-1] if self.yearly else 0.5 * (values[:-1] + values[1:]))
        known = np.concatenate([[0.0], np.cumsum(pieces)])
        i = np.clip(np.searchsorted(years, at, side="right") - 1, 0, len(years) - 1)
        past = at - years[i]
        slope = np.append(np.zeros(len(gaps)) if self.yearly else np.diff(values) / gaps, 0.0)
        before = at < years[0]
        return np.asarray(known[i] + values[i] * past + np.where(before, 0.0, 0.5 * slope[i] * past**2))


def operational(record: Record, exposure: Exposure | tuple[Sequence[float], Sequence[float]] | Any) -> Record:
    """The record in operational time, scaled so that the window keeps its present and its length: its years are mean years of
    exposure.

    exposure: whatever ``exposure_of`` reads. Datings go along by their bounds.
    Raises RecordRefused where the rows do not cover the window. Log-likelihoods of laws are then per operational year: they compare
    laws, not a run with exposure and one without.
    """
    series = exposure_of(exposure)
    window = record.window
    first, last = series.covers
    if not window.span > 0:
        raise RecordRefused("the window has no length: exposure cannot be applied; choose a later --present")
    if window.start < first or window.present > last:
        raise RecordRefused(
            f"the exposure covers {first:g} to {last:g}, the window {window.start:g} to {window.present:g}; add rows, or narrow the window "
            "with --start and --present"
        )
    total = float(series.cumulated(window.present) - series.cumulated(window.start))
    scale = window.span / total

    def run(t: Floats) -> Floats:
        # counted back from the present, so that the last years keep their digits
        return window.present - scale * (float(series.cumulated(window.present)) - series.cumulated(t))

    best, earliest, latest = run(record.best), run(record.earliest), run(record.latest)
    unit = run(record.best + record.unit / 2) - run(record.best - record.unit / 2)
    normal = np.zeros(len(record), dtype=bool)
    normal[record.owner[record.kind == NORMAL]] = True
    # what stands exactly at the ends of the window stays there exactly
    best = np.where(record.best == window.start, window.start, best)
    note = (
        f"Time runs in exposure, {len(series.years)} rows from {series.years[0]:g} to {series.years[-1]:g}: {total:.4g} in all, "
        f"scaled to the {window.span:g} years of the window."
    )
    more = (
        (f"Past {series.years[-1]:g} the last exposure is taken to go on.",)
        if window.present > series.years[-1] + series.yearly
        else ()
    )
    return replace(
        record,
        best=best,
        earliest=earliest,
        latest=latest,
        unit=unit,
        sd=np.where(record.sd > 0, (latest - earliest) / (2 * Z975), 0.0),
        low=run(record.low),
        mode=run(record.mode),
        high=run(record.high),
        notes=(*record.notes, note, *more),
    )


def exposure_of(given: Any) -> Exposure:
    """The exposure as given, or from a pair (years, values), a table with columns year and exposure, or an array of two columns or
    two rows.

    Raises WrongUse for anything else.
    """
    if isinstance(given, Exposure):
        return given
    if isinstance(given, tuple) and len(given) == 2:
        return Exposure.of(*given)
    try:
        years, values = given["year"], given["exposure"]
    except (KeyError, TypeError, IndexError, ValueError):
        years, values = _two_columns(given)
    return Exposure.of(np.asarray(years, dtype=float), np.asarray(values, dtype=float))


def _two_columns(given: Any) -> tuple[Floats, Floats]:
    wrong = "exposure must be two columns, year and exposure"
    try:
        array = np.asarray(given, dtype=float)
    except (TypeError, ValueError) as error:
        raise WrongUse(wrong) from error
    if array.ndim != 2 or 2 not in array.shape:
        raise WrongUse(wrong)
    years, values = array.T if array.shape[1] == 2 else array
    return years, values


def read_exposure(path: Path) -> Exposure:
    """Read a CSV file with columns year and exposure. Raises ListRefused, naming the line."""
    try:
        with path.open(encoding="utf-8-sig", newline="") as file:
            rows = list(csv.DictReader(file))
    except (OSError, UnicodeDecodeError, csv.Error) as error:
        raise ListRefused(f"{path}: not a readable CSV file; give one with columns year and exposure") from error
    if not rows or "year" not in rows[0] or "exposure" not in rows[0]:
        raise ListRefused(f"{path}: no columns year and exposure, or no rows; the first line must name them")
    years, values = [], []
    for line, row in enumerate(rows, start=2):
        try:
            years.append(float(row["year"]))
            values.append(float(row["exposure"]))
        except (TypeError, ValueError) as error:
            raise ListRefused(f"{path}, line {line}: year {row['year']!r} and exposure {row['exposure']!r} must be numbers") from error
    try:
        return Exposure.of(years, values)
    except WrongUse as error:
        raise ListRefused(f"{path}: {error}") from error
