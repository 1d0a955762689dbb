# SPDX-License-Identifier: Apache-2.0
"""The tipping point: how fast would compilers have to forget a steady rate for this list to come out, and what would then be missing?

A steady rate half forgotten every h years draws the same curve as a log-linear rate with doubling time h; a steady rate remembered as
1/(1 + age/s) the same as a hyperbolic one with its singular date s after the present. So both are read off the fitted laws, and a list
alone cannot say which it was.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np
import numpy.typing as npt

from ..progress import Tell, silent
from ..record import Window
from .null_model import Null, youngest_floor
from .nulls import recall_decay
from .rate_laws import LawRow, LawsResult, fit_laws

if TYPE_CHECKING:
    import pandas as pd

Floats = npt.NDArray[np.float64]

LN2 = float(np.log(2.0))
SUFFICES_FROM = 0.05  # a form is adequate where the bootstrap of its fit gives at least this


@dataclass(frozen=True)
class ListedShare:
    """The share of all events of an age that the list would hold; low and high from the ends of the form's interval."""

    at: str  # oldest, tenth oldest, median
    age: float
    share: float
    low: float
    high: float


@dataclass(frozen=True)
class ForgottenBin:
    """One bin of age, in years: counted events listed in it, and how many would be missing. unlisted_high None: unbounded."""

    age_from: float
    age_to: float
    listed: int
    unlisted: float
    unlisted_low: float
    unlisted_high: float | None


@dataclass(frozen=True)
class TippingForm:
    """One form of forgetting. estimate, low, high in years (half_life of 2^(-age/h), scale of 1/(1 + age/s)); high None: no forgetting lies
    inside.

    critical: the slowest forgetting that already removes the significance, None where there is none to remove. fit_p: Anderson–Darling of
    the fitted positions, bootstrap with refitting; suffices: fit_p of 0.05 and more. total and unlisted: events in the window, listed or
    not, and those not listed; intervals by transforming that of the estimate. All None where no forgetting is needed.
    """

    form: str
    parameter: str
    needed: bool
    estimate: float | None = None
    low: float | None = None
    high: float | None = None
    critical: float | None = None
    fit_p: float | None = None
    suffices: bool | None = None
    total: float | None = None
    total_low: float | None = None
    total_high: float | None = None
    unlisted: float | None = None
    unlisted_low: float | None = None
    unlisted_high: float | None = None
    shares: tuple[ListedShare, ...] = ()
    bins: tuple[ForgottenBin, ...] = ()

    def listed_share(self, age: float | Floats) -> Floats:
        """Share of the events of an age that the list would hold, at the estimate; one where no forgetting is needed."""
        if self.estimate is None:
            return np.ones_like(np.asarray(age, dtype=float))
        return _share(self.form, self.estimate, np.asarray(age, dtype=float))

    def null(self) -> Null | None:
        """The fitted recall_decay null of this form, or None where no forgetting is needed."""
        if self.estimate is None:
            return None
        if self.form == "exponential":
            return recall_decay(half_life=self.estimate, fitted=True)
        return recall_decay(scale=self.estimate, fitted=True)


@dataclass(frozen=True)
class Tipping:
    """Both forms, exponential first, on n counted events."""

    n: int
    forms: tuple[TippingForm, ...]
    notes: tuple[str, ...] = field(default=())

    def form(self, name: str) -> TippingForm:
        """One form: exponential or power."""
        return next(f for f in self.forms if f.form == name)

    @property
    def adequate(self) -> TippingForm | None:
        """The form to name: the exponential where it suffices, else the power where it does, else None."""
        return next((f for f in self.forms if f.suffices), None)

    def nulls(self) -> tuple[Null, ...]:
        """The fitted recall_decay nulls, at most one a form."""
        return tuple(null for null in (f.null() for f in self.forms) if null is not None)

    def to_frame(self) -> pd.DataFrame:
        """One row a form, without shares and bins."""
        from .frames import frame

        return frame(self.forms, TippingForm).drop(columns=["shares", "bins"])

    def bins_frame(self) -> pd.DataFrame:
        """One row a form and bin of age."""
        return _long(self.forms, "bins", ForgottenBin)

    def shares_frame(self) -> pd.DataFrame:
        """One row a form and age at which the listed share is given."""
        return _long(self.forms, "shares", ListedShare)


def tipping(window: Window, *, laws: LawsResult | None = None, seed: int = 1, replicates: int = 499, tell: Tell = silent) -> Tipping:
    """Both forms of forgetting that would make a steady rate look like this window. ``laws`` spares fitting them again."""
    laws = fit_laws(window, seed=seed, replicates=replicates, tell=tell) if laws is None else laws
    exponential, power = laws.row("log_linear"), laws.row("hyperbolic")
    growth, lowest, highest = wider(exponential, "growth")
    t_star, nearest, farthest = wider(power, "t_star")
    forms = (
        _form(
            window,
            "exponential",
            "half_life",
            _half_life(growth, window),
            _half_life(highest, window),
            _half_life(lowest, window),
            exponential.fit_p_shape,
        ),
        _form(window, "power", "scale", _scale(t_star, window), _scale(nearest, window), _scale(farthest, window), power.fit_p_shape),
    )
    notes = []
    if any(f.needed for f in forms):
        notes.append(
            "the half-life equals the doubling time of the log-linear law, and the scale is t_star less the present: a list alone cannot "
            "say which it was"
        )
    return Tipping(window.n, forms, tuple(notes))


def wider(row: LawRow, name: str) -> tuple[float | None, float | None, float | None]:
    """Estimate and the wider of the two intervals of a law's parameter (Poisson and renewal-robust); None: unbounded or not computed."""
    low, high = row.low.get(name), row.high.get(name)
    if row.low_robust.get(name) is not None or row.high_robust.get(name) is not None:
        low_robust, high_robust = row.low_robust.get(name), row.high_robust.get(name)
        low = None if low is None or low_robust is None else min(low, low_robust)
        high = None if high is None or high_robust is None else max(high, high_robust)
    return row.parameters.get(name), low, high


def _half_life(growth: float | None, window: Window) -> float | None:
    # growth that is zero but for rounding needs no forgetting
    return LN2 / growth if growth is not None and growth * window.span > 1e-9 else None


def _scale(t_star: float | None, window: Window) -> float | None:
    return t_star - window.present if t_star is not None and t_star > window.present else None


def _form(
    window: Window, form: str, parameter: str, estimate: float | None, low: float | None, high: float | None, fit_p: float | None
) -> TippingForm:
    if estimate is None or not window.n:
        return TippingForm(form, parameter, needed=False, fit_p=None)
    low = 0.0 if low is None else low
    n, span = window.n, window.span
    total = n / _listed(form, estimate, span)
    total_low = float(n) if high is None else n / _listed(form, high, span)
    total_high = n / _listed(form, low, span) if low > 0 else None
    ages = window.ages
    places = [("oldest", float(ages[0]))]
    if len(ages) >= 10:
        places.append(("tenth oldest", float(ages[9])))
    places.append(("median", float(np.median(ages))))
    shares = tuple(
        ListedShare(
            at,
            age,
            float(_share(form, estimate, age)),
            float(_share(form, low, age)) if low > 0 else 0.0,
            1.0 if high is None else float(_share(form, high, age)),
        )
        for at, age in places
    )
    return TippingForm(
        form=form,
        parameter=parameter,
        needed=True,
        estimate=estimate,
        low=low,
        high=high,
        critical=high,
        fit_p=fit_p,
        suffices=None if fit_p is None else fit_p >= SUFFICES_FROM,
        total=total,
        total_low=total_low,
        total_high=total_high,
        unlisted=total - n,
        unlisted_low=total_low - n,
        unlisted_high=None if total_high is None else total_high - n,
        shares=shares,
        bins=_bins(window, form, estimate, low, high),
    )


def _bins(window: Window, form: str, estimate: float, low: float, high: float | None) -> tuple[ForgottenBin, ...]:
    """Powers of ten of age, the youngest bin from the present, the oldest to the start."""
    counted = window.present - window.counted
    youngest = max(float(counted.min()), youngest_floor(window), window.span * 1e-15)
    powers = 10.0 ** np.arange(np.floor(np.log10(youngest)) + 1, np.ceil(np.log10(window.span)))
    edges = np.concatenate([[0.0], powers[(powers > youngest) & (powers < window.span)], [window.span]])
    listed = np.histogram(counted, edges)[0]

    def missing(value: float | None) -> list[float | None]:
        """Steady events of each bin that the form loses, scaled so that the listed ones are the n counted."""
        if value is None:
            return [0.0] * (len(edges) - 1)
        if value <= 0:
            return [None] * (len(edges) - 1)
        kept = np.diff([_listed(form, value, float(a)) * a if a > 0 else 0.0 for a in edges])
        rate = window.n / (_listed(form, value, window.span) * window.span)
        return [float(x) for x in np.maximum(rate * (np.diff(edges) - kept), 0.0)]

    middle, fewest, most = missing(estimate), missing(high), missing(low)
    out = []
    for i in range(len(edges) - 1):
        some, few, many = middle[i], fewest[i], most[i]
        # within a bin the count need not run with the estimate: the ends are put in order
        ends = [x for x in (some, few, many) if x is not None]
        out.append(
            ForgottenBin(
                float(edges[i]),
                float(edges[i + 1]),
                int(listed[i]),
                float(some or 0.0),
                min(ends, default=0.0),
                None if many is None else max(ends),
            )
        )
    return tuple(out)


def _share(form: str, value: float, age: float | Floats) -> Floats:
    """Share of the events of an age that are listed."""
    a = np.asarray(age, dtype=float)
    return np.asarray(np.exp2(-a / value) if form == "exponential" else 1.0 / (1.0 + a / value))


def _listed(form: str, value: float, span: float) -> float:
    """Share listed of all events between the present and an age."""
    x = span / value
    if form == "exponential":
        x *= LN2
        return float(-np.expm1(-x) / x) if x > 1e-12 else 1.0
    return float(np.log1p(x) / x) if x > 1e-12 else 1.0


def _long(forms: tuple[TippingForm, ...], part: str, kind: type) -> pd.DataFrame:
    import pandas as pd

    from .frames import frame

    frames = []
    for f in forms:
        rows = frame(getattr(f, part), kind)
        rows.insert(0, "form", f.form)
        frames.append(rows)
    filled = [f for f in frames if len(f)] or frames[:1]
    return pd.concat(filled, ignore_index=True)
