# SPDX-License-Identifier: Apache-2.0
"""Pages for the questions: trend, bias, grid, power. What each table asks, and its columns by importance."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import pandas as pd

from . import numbers
from .tables import Column, Page, Table

C = Column

TREND_QUESTIONS: dict[str, str] = {
    "record": "What was looked at?",
    "tests": "Do the events crowd towards the present, or is the rate steady?",
    "rate_laws": "Which simple law of the rate fits, and how well?",
    "age_exponent": "How fast does the density of milestones fall with age? (0 steady, 1 picked evenly per decade of age)",
    "regressions": "How does the interval shrink on log axes? (read it only beside the next table)",
    "nulls": "What would the making of the list give by itself?",
    "lists": "Does each list say the same?",
    "next": "How long until the next milestone, and how good were such statements in the past?",
    "track_record": "How good were such statements in the past?",
}

TREND_COLUMNS: dict[str, tuple[Column, ...]] = {
    "record": (C("what", "what"), C("value", "value")),
    "tests": (
        C("test", "test"), C("null", "against", "text", 6), C("statistic", "statistic", "number", 1), C("z", "z", "number", 5), C("direction", "direction"),
        C("p_exact", "p exact", "p"), C("p_value", "p asymptotic", "p", 4), C("p_adjusted", "p adjusted", "p", 2), C("p_holm", "p Holm", "p", 7),
        C("sensitive_to", "sensitive to", "text", 8),
    ),
    "rate_laws": (
        C("law", "law"), C("parameter", "parameter"), C("estimate", "estimate", "number"), C("low", "low", "number", 1), C("high", "high", "number", 1),
        C("low_robust", "low robust", "number", 5), C("high_robust", "high robust", "number", 5), C("weight", "weight", "p", 2), C("aicc", "AICc", "number", 4),
        C("log_likelihood", "log L", "number", 6), C("bic", "BIC", "number", 9), C("fit_p_shape", "fit: shape p", "p", 3), C("fit_p_clustering", "fit: spacing p", "p", 5),
        C("doubling_time", "doubling", "span", 4), C("same_curve_as", "same curve as", "text", 7), C("lr_p", "LR p", "p", 6),
    ),
    "age_exponent": (C("era", "era"), C("estimate", "exponent", "number"), C("low", "low", "number"), C("high", "high", "number"), C("n", "n", "count")),
    "regressions": (
        C("predictor", "on"), C("estimator", "estimator"), C("slope", "slope", "number"), C("low", "low", "number"), C("high", "high", "number"),
        C("std_error", "std error", "number", 5), C("r_squared", "R²", "number", 1), C("n", "n", "count", 3), C("null", "null", "text", 2),
        C("null_low", "null low", "number", 2), C("null_median", "null median", "number", 2), C("null_high", "null high", "number", 2), C("p_value", "p (null)", "p", 2),
    ),
    "nulls": (
        C("null", "null model"), C("statistic", "statistic"), C("observed", "observed", "number"), C("low", "null low", "number"), C("median", "null median", "number"),
        C("high", "null high", "number"), C("difference", "difference", "number", 5), C("p_value", "p", "p"),
    ),
    "lists": (
        C("list", "list"), C("n", "n", "count"), C("slope", "slope", "number", 2), C("slope_low", "low", "number", 4), C("slope_high", "high", "number", 4),
        C("age_exponent", "age exponent", "number", 3), C("age_exponent_low", "low", "number", 5), C("age_exponent_high", "high", "number", 5),
        C("growth", "growth per yr", "number", 1), C("growth_low", "low", "number", 3), C("growth_high", "high", "number", 3), C("p_value", "p", "p", 1),
    ),
}  # fmt: skip


def _laid_out(name: str, frame: pd.DataFrame, columns: Mapping[str, tuple[Column, ...]], questions: Mapping[str, str], below: Sequence[str] = ()) -> Table:
    return Table(name, frame, questions.get(name, ""), columns.get(name), tuple(below))


def _record_frame(record: Mapping[str, Any]) -> pd.DataFrame:
    """The record's facts in words, one a row."""
    r = record
    rows = [
        ("milestones in the window", numbers.count(r["milestones"])),
        ("counted events (n)", numbers.count(r["n"])),
        ("closed intervals", f"{numbers.count(r['intervals'])}" + (f", {r['joined']} of them of zero length (joined in regressions)" if r.get("joined") else "")),
        ("start of the window", f"{numbers.when(r['start'])} ({r['start_from']})"),
        ("present", f"{r['present']:g} ({r['present_from']})" if r.get("present") is not None else "–"),
        ("left outside the window", numbers.count(r["outside"])),
        ("tied with the start", numbers.count(r["tied_with_start"])),
        ("finest dating", numbers.span(r["finest_unit"])),
    ]
    return pd.DataFrame(rows, columns=["what", "value"])


def _law_rows(frame: pd.DataFrame) -> pd.DataFrame:
    """One row a parameter, the law's own columns on its first row."""
    rows: list[dict[str, Any]] = []
    for row in frame.to_dict("records"):
        parameters = row.get("parameters") or {}
        for i, key in enumerate(parameters or {"": None}):
            one = {k: v for k, v in row.items() if k not in ("parameters", "low", "high", "low_robust", "high_robust")} if i == 0 else {"law": ""}
            one.update(parameter=key, estimate=parameters.get(key))
            for end in ("low", "high", "low_robust", "high_robust"):
                bounds = row.get(end)
                one[end] = bounds.get(key) if isinstance(bounds, Mapping) else None
            rows.append(one)
    return pd.DataFrame(rows)


def trend_tables(trend: Any) -> tuple[Table, ...]:
    """All tables of a trend, in reading order."""
    document, frames = trend.to_dict(), trend.tables()
    tables = []
    for name in ("record", "tests", "rate_laws", "age_exponent", "regressions", "nulls", "lists"):
        frame = frames.get(name, pd.DataFrame())
        screen = None
        below: list[str] = []
        if name == "record":
            screen = _record_frame(document["record"])
        elif name == "rate_laws" and not frame.empty:
            screen = _law_rows(frame)
            below.append("growth and doubling time describe a curve; a singular date (t_star) is a property of a curve, not a forecast")
        elif name == "tests":
            below.append("p exact: by simulation given n, two-sided except anderson_darling; p adjusted: step-down over the tests")
        elif name == "nulls":
            below.append("each null makes whole lists with the same datings; p: share of them at least as far out (upper tail for slope and R²)")
        elif name == "lists" and frame.empty:
            continue
        table = _laid_out(name, frame, TREND_COLUMNS, TREND_QUESTIONS, below)
        tables.append(Table(name, frame, table.question, table.columns, table.below, screen=screen))
    for name, frame in frames.items():
        if name not in TREND_QUESTIONS or name in ("next", "track_record"):
            if name not in {t.name for t in tables}:
                tables.append(Table(name, frame, TREND_QUESTIONS.get(name, name.replace("_", " ").capitalize())))
    return tuple(tables)


def trend_page(trend: Any) -> Page:
    """Everything ``trend`` says; the verdict stands last so that it stays on the screen."""
    document = trend.to_dict()
    close = [*(f"note: {n}" for n in document["notes"]), *([""] if document["notes"] else []), "VERDICT", document["verdict"]]
    return Page(document, trend_tables(trend), "tests", close=tuple(close))


ROW = (
    C("setting", "setting"), C("n", "n", "count"), C("estimate", "growth per yr", "number"), C("null", "null", "text", 6), C("null_low", "null low", "number", 3),
    C("null_median", "null median", "number", 5), C("null_high", "null high", "number", 3), C("p_value", "p", "p", 1), C("stands", "stands"),
)  # fmt: skip


def bias_tables(bias: Any) -> tuple[Table, ...]:
    """All tables of the bias checks that could run, the summary first."""
    from ..bias import CHECKS

    questions = {c.name: c.question for c in CHECKS}
    questions["summary"] = "Would the making of the lists produce this? One row a check"
    tables = []
    for name, frame in bias.tables().items():
        if name == "summary":
            columns: tuple[Column, ...] | None = (
                C("check", "check"), C("question", "question", "text", 4), C("published", "as published", "number", 2), C("estimate", "under the check", "number", 1),
                C("stands", "stands"), C("report", "what to report", "text", 0),
            )  # fmt: skip
        else:
            columns = (*ROW, *(C(str(k), str(k).replace("_", " "), _kind(frame, str(k)), 7) for k in frame.columns if str(k) not in {c.key for c in ROW} | {"check"}))
        if frame.empty and name != "summary":
            continue
        tables.append(Table(name, frame, questions.get(name, name), columns))
    return tuple(tables)


def _kind(frame: pd.DataFrame, key: str) -> str:
    if key.startswith("share") or key.endswith("_share"):
        return "share"
    if key in ("half_life", "doubling_time", "h_crit") or key.endswith(("half_life", "_years")):
        return "span"
    if pd.api.types.is_bool_dtype(frame[key]):
        return "yes"
    return "number" if pd.api.types.is_float_dtype(frame[key]) else "text"


def bias_page(bias: Any) -> Page:
    """The summary, then a table a check, then what could not run."""
    document = bias.to_dict()
    notes = document.get("notes", [])
    return Page(document, bias_tables(bias), "summary", close=tuple(f"note: {n}" for n in notes))
