# SPDX-License-Identifier: Apache-2.0
"""Recall decay: what remains of the growth if listing forgets with age, and how fast forgetting would have to be.

The estimate of a row is the growth left beside a listed share of 2^(-age/h), or of 1/(1 + age/s). Steady listing forgotten at
that speed is the null. At the fitted speed nothing is left by construction, so that row carries no p: the fitted half-life equals
the doubling time, and one list cannot say which of the two it is. Rows by range of age show the growth within the range, and what
forgetting at the fitted speed would have left unlisted there.
"""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import numpy.typing as npt

from ..record import Window
from ..trend.capture import against_forgetting, corrected_growth
from ..trend.forgetting import Tipping, TippingForm, tipping
from .check import Answer, Check, Context, Row
from .growth import Growth, growth
from .offset import offset
from .rows import record_row, row, stands, years

Floats = npt.NDArray[np.float64]
GIVEN = (2.0, 1.0, 0.5, 0.25)  # half-lives as shares of the window
FITS = 499
WORDS = {"exponential": "half-life", "power": "scale"}


def run(context: Context) -> Answer:
    window = context.record.window
    published = growth(window)
    if published.estimate is None or window.n < 2:
        return Answer(notes=("recall_decay: needs two counted milestones",))
    found = tipping(window, seed=context.seed, replicates=min(FITS, context.replicates))
    rows: list[Row] = []
    for form in found.forms:
        if form.estimate is None:
            continue
        rows.append(_row(context, window, published, form.form, form.estimate, "fitted", f"{form.form}, fitted", form))
        if form.critical is not None:
            rows.append(
                _row(context, window, published, form.form, form.critical, "critical", f"{form.form}, just ends the significance", form)
            )
    for share in GIVEN:
        half_life = share * window.span
        rows.append(_row(context, window, published, "exponential", half_life, "given", f"half-life {years(half_life)} years", None))
    named = found.adequate or next((f for f in found.forms if f.needed), None)
    refused = [f.fit_p for f in found.forms if f.needed and f.fit_p is not None]
    if named is not None and found.adequate is None and refused:
        rows.append(_refused(window, published, max(refused)))
    if named is not None:
        rows.extend(_by_age(context, published, named))
    notes = tuple(f"recall_decay: {n}" for n in found.notes)
    said = against_forgetting(corrected_growth(context.record, interval=False), found) if named is not None else ""
    against = f"; {said}" if said else ""
    if found.adequate is None and refused:
        return Answer(
            tuple(rows),
            _sentence(found) + against,
            "that no form of forgetting tried gives this shape, and which were tried",
            notes,
            _position(rows, "shape"),
        )
    at = next((i for i, r in enumerate(rows) if named is not None and r.more["kind"] == "fitted" and r.more["form"] == named.form), 0)
    return Answer(
        tuple(rows),
        _sentence(found) + against,
        "the half-life of forgetting that would suffice, the listed share it implies, and the unlisted number",
        notes,
        at,
    )


def _position(rows: list[Row], kind: str) -> int:
    return next(i for i, r in enumerate(rows) if r.more["kind"] == kind)


def _refused(window: Window, published: Growth, p: float) -> Row:
    """No form suffices: the growth stands as published, with the larger p of the fits (Anderson-Darling, refitted in each replicate)."""
    return Row(
        "recall_decay",
        "no form tried suffices",
        window.n,
        published.estimate,
        "recall_decay, shape of the best fit",
        None,
        None,
        None,
        p,
        stands(published.estimate, p, published.estimate),
        {"form": "both", "kind": "shape", "fit_p": p},
    )


def _sentence(found: Tipping) -> str:
    needed = [f for f in found.forms if f.needed]
    if not needed:
        return "no forgetting needed: the record does not speed up"
    form = found.adequate
    if form is None or form.estimate is None:
        return "no form tried suffices: forgetting of these forms alone does not give this shape"
    oldest = next((s for s in form.shares if s.at == "oldest"), None)
    speed = (
        f"half forgotten every {years(form.estimate)} years"
        if form.form == "exponential"
        else f"remembered as 1/(1 + age/{years(form.estimate)})"
    )
    share = "" if oldest is None else f", {oldest.share:.2g} of the oldest listed and {years(form.unlisted or 0.0)} unlisted"
    if form.form == "exponential":
        return f"a steady rate {speed} gives the same record{share}; this equals the doubling time, and a list alone cannot say which"
    return f"a steady rate {speed} gives the same record{share}; a list alone cannot tell this from growth of the same curve"


def _share(form: str, parameter: float, age: Floats) -> Floats:
    return np.asarray(np.exp2(-age / parameter) if form == "exponential" else 1.0 / (1.0 + age / parameter))


def _row(
    context: Context, window: Window, published: Growth, form: str, parameter: float, kind: str, setting: str, fitted: TippingForm | None
) -> Row:
    """Growth left beside a listed share, with the listed and unlisted numbers it implies."""
    ages = np.sort(window.present - window.counted)
    known = offset(window.span, float(ages[0]), lambda a: _share(form, parameter, a))
    rng = np.random.default_rng([context.seed, 7201])
    left = known.growth(float(ages.mean()), window.n, rng=rng, size=context.replicates)
    if kind == "fitted":
        left = replace(left, null_low=None, null_median=None, null_high=None, p_value=None)
    total = window.n * window.span / known.total
    more: dict[str, Any] = {
        "form": form,
        "kind": kind,
        "parameter": parameter,
        "parameter_low": None,
        "parameter_high": None,
        "fit_p": None,
        "suffices": None,
    }
    oldest_first = np.sort(window.ages)[::-1]
    more["share_oldest"] = float(_share(form, parameter, oldest_first[0]))
    more["share_tenth_oldest"] = float(_share(form, parameter, oldest_first[9])) if len(oldest_first) >= 10 else None
    more["share_median"] = float(_share(form, parameter, np.array(np.median(oldest_first))))
    more.update(
        listed=window.n, total=total, total_low=None, total_high=None, unlisted=total - window.n, unlisted_low=None, unlisted_high=None
    )
    if kind == "fitted" and fitted is not None:
        for name in ("fit_p", "suffices", "total", "total_low", "total_high", "unlisted", "unlisted_low", "unlisted_high"):
            more[name] = getattr(fitted, name)
        more.update(parameter_low=fitted.low, parameter_high=fitted.high)
    name = f"recall_decay ({WORDS[form]} {years(parameter)}, {'fitted to this' if kind == 'fitted' else 'given'})"
    return row("recall_decay", setting, left, published, name, **more)


def _by_age(context: Context, published: Growth, form: TippingForm) -> list[Row]:
    window = context.record.window
    rows = []
    for b in form.bins:
        start, present = max(window.start, window.present - b.age_to), window.present - b.age_from
        if not start < present or (form.bins and len(form.bins) == 1):
            continue
        part = context.record.only(start=start, present=present) if b.age_to < window.span else context.record.only(present=present)
        if not part.window.span > 0:
            continue
        rows.append(
            record_row(
                "recall_decay",
                f"ages {years(b.age_from)} to {years(b.age_to)}",
                part,
                published,
                form=form.form,
                kind="age range",
                parameter=form.estimate,
                listed=b.listed,
                total=b.listed + b.unlisted,
                unlisted=b.unlisted,
                unlisted_low=b.unlisted_low,
                unlisted_high=b.unlisted_high,
            )
        )
    return rows


CHECK = Check("recall_decay", "Would forgetting of the old alone produce the trend?", "two counted milestones", run)
