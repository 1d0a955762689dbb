# SPDX-License-Identifier: Apache-2.0
"""How long until the next milestone, under each rate law, never without how such statements would have fared before.

Given a fitted law the number of events up to a wait w after the present is Poisson with mean M(w), the law's rate cumulated; the
wait passes w with probability exp(-M(w)). The track record refits every law at every past milestone, the window closed by it, and
looks at the wait that followed: share of waits inside the 50 and 95 % ranges, mean log density (the log score), and the probability
integral transform, uniform for a law that is right. Nothing is tuned in hindsight.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import asdict, dataclass, replace
from typing import TYPE_CHECKING

import numpy as np
from scipy.special import kolmogorov

from ..progress import Tell, silent
from ..record import Window
from . import kernels
from .curves import CURVES
from .positions import Positions, positions
from .rate_laws import Fit, fit_curve

if TYPE_CHECKING:
    import pandas as pd

FEWEST = 5  # counted events before a past milestone from which its wait is forecast
MOST = 200  # past milestones looked at, the latest ones
CAUTION = (
    "These waits say what a fitted curve would give if nothing about the making of milestones or of the list changed; they leave out that "
    "the latest milestones are not yet recognised, that the curve was chosen on the same record, and the error of its parameters. Read no "
    "row without its track record."
)


@dataclass(frozen=True)
class NextRow:
    """Wait from the present to the next milestone under one law, in years: median, 50 % and 95 % ranges (None: longer than any time
    with that probability). rate_now per year; chance_never: probability that no further milestone comes at all; waited: years since
    the last milestone.
    """

    law: str
    rate_now: float | None
    median: float | None
    low_50: float | None
    high_50: float | None
    low_95: float | None
    high_95: float | None
    chance_never: float
    waited: float | None


@dataclass(frozen=True)
class TrackRow:
    """How a law's earlier forecasts fared: forecasts made, shares of waits inside the 50 and 95 % ranges, mean log density of the
    wait that came (log_score, years; None where a wait was impossible under the law), its gain over the steady law, mean of the
    probability integral transform (above one half: waits longer than forecast), Kolmogorov-Smirnov p of its uniformity, and how
    many waits the law had ruled out.
    """

    law: str
    forecasts: int
    coverage_50: float | None
    coverage_95: float | None
    log_score: float | None
    gain_over_steady: float | None
    pit_mean: float | None
    pit_p: float | None
    ruled_out: int


@dataclass(frozen=True)
class ForecastRow:
    """One earlier forecast: at which year, under which law, its 50 and 95 % ranges, the wait that came, its log density and its
    transform.
    """

    year: float
    law: str
    low_50: float | None
    high_50: float | None
    low_95: float | None
    high_95: float | None
    wait: float
    log_density: float | None
    pit: float


@dataclass(frozen=True)
class NextEvent:
    """Waits under each law, their track record, and every forecast behind it."""

    rows: tuple[NextRow, ...]
    track_record: tuple[TrackRow, ...]
    forecasts: tuple[ForecastRow, ...]
    notes: tuple[str, ...]

    def tables(self) -> dict[str, pd.DataFrame]:
        """Frames next, track_record and forecasts."""
        import pandas as pd

        out = {}
        parts = (
            ("next", self.rows, NextRow),
            ("track_record", self.track_record, TrackRow),
            ("forecasts", self.forecasts, ForecastRow),
        )
        for name, rows, kind in parts:
            out[name] = pd.DataFrame([asdict(r) for r in rows], columns=list(kind.__dataclass_fields__))
        return out

    def to_frame(self, table: str = "next") -> pd.DataFrame:
        """One of the tables."""
        return self.tables()[table]


@dataclass(frozen=True)
class _Wait:
    """One law after the present: inverse(m) is the wait at which m events are expected (inf: never), expected(w) and log_rate(w)
    its opposite.
    """

    rate: float
    inverse: Callable[[float], float]
    expected: Callable[[float], float]
    log_rate: Callable[[float], float]
    total: float  # events ever expected

    def quantile(self, p: float) -> float | None:
        wait = self.inverse(-float(np.log1p(-p)))
        return wait if np.isfinite(wait) else None


def next_event(window: Window, *, seed: int = 1, tell: Tell = silent) -> NextEvent:
    """The next milestone after the present, with its track record. Nothing here is random: the seed is taken like everywhere and
    not used.
    """
    events = positions(window)
    laws = [c for c in CURVES if not (c.name == "power_law" and window.opened_by_milestone)]
    rows = []
    waited = float(window.present - window.times[-1]) if len(window.times) else None
    for curve in laws:
        fit = fit_curve(curve, events)
        if fit is None:
            continue
        wait = _wait(fit)
        rows.append(
            NextRow(
                curve.name,
                wait.rate,
                wait.quantile(0.5),
                wait.quantile(0.25),
                wait.quantile(0.75),
                wait.quantile(0.025),
                wait.quantile(0.975),
                float(np.exp(-wait.total)) if np.isfinite(wait.total) else 0.0,
                waited,
            )
        )
    forecasts = _forecasts(window, [c.name for c in laws], tell)
    track = tuple(_track(curve.name, forecasts) for curve in laws)
    notes = [CAUTION]
    if not forecasts:
        notes.append(f"No track record: a forecast needs {FEWEST} counted events before a milestone and a later one after it.")
    if window.opened_by_milestone:
        notes.append("power_law is left out: its origin is --start, and here the first milestone opened the window.")
    return NextEvent(tuple(rows), track, tuple(forecasts), tuple(notes))


def _wait(fit: Fit) -> _Wait:
    n, span = fit.place.n, fit.place.span
    mean = n / span
    name = fit.curve.name
    if name == "log_linear":
        k = float(fit.theta[0])
        log_now = float(np.log(mean) + fit.curve.log_density(fit.theta, np.ones(1), np.zeros(1))[0])
        return _exponential(log_now, k / span) if abs(k) >= 1e-9 else _constant(float(np.exp(log_now)))
    if name == "power_law":
        b = float(fit.theta[0])
        return _Wait(
            mean * b,
            lambda m: float(span * np.expm1(np.log1p(m / n) / b)),
            lambda w: float(n * np.expm1(b * np.log1p(w / span))) if b * np.log1p(w / span) < 650.0 else np.inf,
            lambda w: float(np.log(mean * b) + (b - 1) * np.log1p(w / span)),
            np.inf,
        )
    if name == "hyperbolic" and np.isfinite(fit.theta[0]):
        ahead = span * float(np.exp(fit.theta[0]))
        scale = n / float(np.logaddexp(0.0, -fit.theta[0]))
        return _Wait(
            scale / ahead if ahead > 0 else np.inf,
            lambda m: float(-ahead * np.expm1(-m / scale)),
            lambda w: float(-scale * np.log1p(-w / ahead)) if w < ahead else np.inf,
            lambda w: float(np.log(scale) - np.log(ahead - w)) if w < ahead else -np.inf,
            np.inf,
        )
    after = fit.parameters["after"] if name == "step" else mean
    return _constant(mean if after is None else after)


def _exponential(log_now: float, growth: float) -> _Wait:
    """A rate exp(log_now + growth w), in logarithms throughout: a steep law may stand at a rate that underflows, or leave it at once."""
    steep = float(np.log(abs(growth)))

    def inverse(m: float) -> float:
        z = float(np.log(m)) + steep - log_now
        if growth > 0:
            return float(np.logaddexp(0.0, z)) / growth
        return float(np.log1p(-np.exp(z))) / growth if z < 0 else np.inf

    def expected(w: float) -> float:
        if growth > 0:
            z = log_now - steep + growth * w + float(np.log(-np.expm1(-growth * w)))
        else:
            z = log_now - steep + float(np.log(-np.expm1(growth * w)))
        return float(np.exp(z)) if z < 700.0 else np.inf

    total = np.inf if growth > 0 else float(np.exp(log_now - steep))
    return _Wait(float(np.exp(log_now)), inverse, expected, lambda w: log_now + growth * w, total)


def _constant(rate: float) -> _Wait:
    return _Wait(rate, lambda m: m / rate, lambda w: rate * w, lambda w: float(np.log(rate)), np.inf)


def _forecasts(window: Window, laws: list[str], tell: Tell) -> list[ForecastRow]:
    """Every law refitted at every past milestone, the window closed by it; milestones of one date are one occasion."""
    dates = np.unique(window.times)
    occasions = [i for i in range(len(dates) - 1) if (window.times < dates[i]).sum() - window.opening >= FEWEST][-MOST:]
    out = []
    for done, i in enumerate(occasions):
        tell("forecasts from past milestones", done / len(occasions))
        past = _until(window, float(dates[i]))
        wait_seen = float(dates[i + 1] - dates[i])
        for curve in CURVES:
            if curve.name not in laws:
                continue
            fit = fit_curve(curve, past)
            if fit is None:
                continue
            wait = _wait(fit)
            expected = wait.expected(wait_seen)
            density = wait.log_rate(wait_seen) - expected
            out.append(
                ForecastRow(
                    float(dates[i]),
                    curve.name,
                    wait.quantile(0.25),
                    wait.quantile(0.75),
                    wait.quantile(0.025),
                    wait.quantile(0.975),
                    wait_seen,
                    density if np.isfinite(density) else None,
                    float(-np.expm1(-expected)),
                )
            )
    return out


def _until(window: Window, date: float) -> Positions:
    """The window as it stood when this milestone came: it closes the window and is not counted."""
    seen = window.times <= date
    cut = replace(
        window,
        index=window.index[seen],
        times=window.times[seen],
        present=date,
        closing=int((window.times == date).sum()),
        unit=window.unit[seen] if len(window.unit) == len(window.times) else window.unit,
    )
    return positions(cut)


def _track(law: str, forecasts: list[ForecastRow]) -> TrackRow:
    own = [f for f in forecasts if f.law == law]
    if not own:
        return TrackRow(law, 0, None, None, None, None, None, None, 0)
    pit = np.array([f.pit for f in own])
    scores = [f.log_density for f in own if f.log_density is not None]
    ruled_out = len(own) - len(scores)
    steady = {f.year: f.log_density for f in forecasts if f.law == "steady"}
    gain = None
    if not ruled_out:
        gain = float(np.mean([(f.log_density or 0.0) - (steady[f.year] or 0.0) for f in own]))
    distance = float(kernels.kolmogorov_smirnov(np.sort(pit)))
    m = len(own)
    return TrackRow(
        law=law,
        forecasts=m,
        coverage_50=float(((pit >= 0.25) & (pit <= 0.75)).mean()),
        coverage_95=float(((pit >= 0.025) & (pit <= 0.975)).mean()),
        log_score=float(np.mean(scores)) if not ruled_out else None,
        gain_over_steady=gain,
        pit_mean=float(pit.mean()),
        # limit law with the finite-sample argument of Stephens 1970
        pit_p=float(kolmogorov((np.sqrt(m) + 0.12 + 0.11 / np.sqrt(m)) * distance)),
        ruled_out=ruled_out,
    )
