# SPDX-License-Identifier: Apache-2.0
"""Pages for the questions: trend, bias, grid, power. What each table asks, and its columns by importance."""

from __future__ import annotations

from collections.abc import Mapping
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
    "regression_nulls": "What do the other regressions give when the list is made by a null? (records: null records behind a row)",
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
        C("law", "law"), C("parameter", "parameter"), C("estimate", "estimate", "right"), C("low", "low", "right", 1), C("high", "high", "right", 1),
        C("low_robust", "low robust", "right", 5), C("high_robust", "high robust", "right", 5), C("weight", "weight", "p", 2), C("aicc", "AICc", "number", 4),
        C("log_likelihood", "log L", "number", 6), C("bic", "BIC", "number", 9), C("fit_p_shape", "fit: shape p", "p", 3), C("fit_p_clustering", "fit: spacing p", "p", 5),
        C("doubling_time", "doubling", "span", 4), C("same_curve_as", "same curve as", "text", 7), C("lr_p", "LR p", "p", 6),
    ),
    "age_exponent": (C("era", "era"), C("estimate", "exponent", "number"), C("low", "low", "number"), C("high", "high", "number"), C("n", "n", "count")),
    "regressions": (
        C("predictor", "on"), C("estimator", "estimator", "text", 4), C("slope", "slope", "number"), C("low", "low", "number", 3), C("high", "high", "number", 3),
        C("std_error", "std error", "number", 5), C("r_squared", "R²", "number", 1), C("n", "n", "count", 3), C("null", "null", "text", 4),
        C("null_low", "null low", "number", 1), C("null_median", "null median", "number", 1), C("null_high", "null high", "number", 1), C("p_value", "p (null)", "p"),
        C("r_squared_null_median", "R² null median", "number", 6), C("r_squared_null_high", "R² null high", "number", 4), C("r_squared_p_value", "p (R² null)", "p", 3),
        C("null_records", "null records", "count", 7),
    ),
    "nulls": (
        C("null", "null model"), C("setting", "with", "text", 4), C("statistic", "statistic"), C("observed", "observed", "number"), C("low", "null low", "number", 1), C("median", "null median", "number", 2),
        C("high", "null high", "number", 1), C("difference", "difference", "number", 5), C("p_value", "p", "p"),
    ),
    "lists": (
        C("list", "list"), C("n", "n", "count"), C("slope", "slope", "number", 2), C("slope_low", "slope low", "number", 4), C("slope_high", "slope high", "number", 4),
        C("age_exponent", "age exponent", "number", 3), C("age_exponent_low", "exponent low", "number", 5), C("age_exponent_high", "exponent high", "number", 5),
        C("growth", "growth per yr", "number", 1), C("growth_low", "growth low", "number", 3), C("growth_high", "growth high", "number", 3), C("p_value", "p", "p", 1),
    ),
}  # fmt: skip


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
    """One row a parameter, the law's own columns on its first row; calendar years written as such."""
    rows: list[dict[str, Any]] = []
    for row in frame.to_dict("records"):
        parameters = row.get("parameters") or {}
        for i, key in enumerate(parameters or {"": None}):
            one = {k: v for k, v in row.items() if k not in ("parameters", *_ENDS)} if i == 0 else {"law": ""}
            write = numbers.when if key in ("t_star", "year") else numbers.number
            one.update(parameter=key, estimate=write(parameters.get(key)))
            for end in _ENDS:
                bounds = row.get(end)
                one[end] = write(bounds.get(key)) if isinstance(bounds, Mapping) and key in bounds else "–"
            rows.append(one)
    return pd.DataFrame(rows)


def _null_name(null: str, setting: str | None) -> str:
    """recall_decay with its form and whether that was given or fitted, without the number: a row must say which it is on a narrow screen too."""
    if not setting:
        return null
    form = "half-life" if "half-life" in setting else "1/(1 + age/s)"
    return f"{null} ({form}, {'given' if 'given' in setting else 'fitted'})"


_ENDS = ("low", "high", "low_robust", "high_robust")
SHOWN = ("record", "tests", "rate_laws", "age_exponent", "regressions", "nulls", "lists", "next", "track_record")
NULL_STATISTICS = ("slope", "r_squared", "age_exponent")


def trend_tables(trend: Any, full: bool) -> tuple[Table, ...]:
    """All tables of a trend in reading order; those that bias shows in full stand aside unless ``full``."""
    document, frames = trend.to_dict(), trend.tables()
    tables = []
    for name, frame in sorted(frames.items(), key=lambda item: SHOWN.index(item[0]) if item[0] in SHOWN else len(SHOWN)):
        screen, below = None, []
        if name == "record":
            screen = _record_frame(document["record"])
        elif name == "rate_laws" and not frame.empty:
            screen = _law_rows(frame)
            below.append("growth and doubling time describe a curve; a singular date (t_star) is a property of a curve, not a forecast")
        elif name == "tests":
            below.append("p exact: by simulation given n, two-sided except anderson_darling: the one to cite; uneven spacing can move the asymptotic p far from it")
            below.append("p adjusted: step-down over the tests")
        elif name == "regressions" and not frame.empty:
            screen = frame[frame["estimator"] == "ols_hc3"]
            below.append("the null is picking evenly per decade of age: on log10 age it gives a slope of 1, but for rounded dates; p: upper tail of the slope")
            below.append("more estimators beside it: --table regressions; the other nulls: --table regression_nulls")
        elif name == "nulls" and not frame.empty:
            screen = frame[frame["statistic"].isin(NULL_STATISTICS)].assign(null=lambda f: [_null_name(n, w) for n, w in zip(f["null"], f["setting"], strict=True)])
            below.append("each null makes whole lists with the same datings; p: share of them at least as far out (upper tail for slope and R²)")
            below.append("every statistic: --table nulls")
        if full and name in ("regressions", "nulls"):
            screen = None
        aside = (name not in SHOWN and not full) or (frame.empty and name in ("lists", "next", "track_record"))
        tables.append(Table(name, frame, TREND_QUESTIONS.get(name, name.replace("_", " ").capitalize()), TREND_COLUMNS.get(name), tuple(below), screen=screen, aside=aside))
    return tuple(tables)


def _verdict_heading(document: Mapping[str, Any]) -> str:
    """VERDICT with its code and clauses, the words that the README explains."""
    return f"VERDICT: {' + '.join([document['verdict_code'], *document['verdict_clauses']])}"


def trend_page(trend: Any, full: bool = False) -> Page:
    """Everything ``trend`` says; the verdict stands last so that it stays on the screen."""
    document = trend.to_dict()
    close = [*(f"note: {n}" for n in document["notes"]), *([""] if document["notes"] else []), _verdict_heading(document), document["verdict"]]
    return Page(document, trend_tables(trend, full), "tests", close=tuple(close))


ROW = (
    C("setting", "setting"), C("n", "n", "count"), C("estimate", "growth per yr", "number"), C("null", "null", "text", 6), C("null_low", "null low", "number", 3),
    C("null_median", "null median", "number", 5), C("null_high", "null high", "number", 3), C("p_value", "p", "p", 1), C("stands", "stands"),
)  # fmt: skip


def bias_tables(bias: Any, full: bool) -> tuple[Table, ...]:
    """All tables of the bias checks that could run, the summary first; the others stand aside unless ``full``."""
    from ..bias import CHECKS

    questions = {c.name: c.question for c in CHECKS}
    questions["summary"] = "Would the making of the lists produce this? One row a check"
    tables = []
    for name, frame in bias.tables().items():
        if name == "summary":
            columns: tuple[Column, ...] | None = (
                C("check", "check"), C("question", "question", "text", 4), C("published", "as published", "number", 2), C("estimate", "under the check", "number", 1),
                C("stands", "stands"), C("finding", "what was found"), C("report", "what to report", "text", 6),
            )  # fmt: skip
        else:
            columns = (*ROW, *(C(str(k), str(k).replace("_", " "), _kind(frame, str(k)), 7) for k in frame.columns if str(k) not in {c.key for c in ROW} | {"check"}))
        if frame.empty and name != "summary":
            continue
        tables.append(Table(name, frame, questions.get(name, name), columns, aside=not full and name != "summary"))
    return tuple(tables)


def _kind(frame: pd.DataFrame, key: str) -> str:
    if key.startswith("share") or key.endswith("_share"):
        return "share"
    if key in ("half_life", "doubling_time", "h_crit") or key.endswith(("half_life", "_years")):
        return "span"
    if pd.api.types.is_bool_dtype(frame[key]):
        return "yes"
    return "number" if pd.api.types.is_float_dtype(frame[key]) else "text"


def bias_page(bias: Any, full: bool = False) -> Page:
    """The summary, then (if ``full``) a table a check, then what could not run."""
    document = bias.to_dict()
    notes = document.get("notes", [])
    return Page(document, bias_tables(bias, full), "summary", close=tuple(f"note: {n}" for n in notes))


def grid_tables(grid: Any) -> tuple[Table, ...]:
    """The tables of a grid; every combination stands aside."""
    questions = {
        "summary": "How many defensible combinations find speeding, and how many the opposite?",
        "joint": "How often would a null record give as much?",
        "variance": "Which choice moves the answer most?",
        "extremes": "Which combinations stand at the ends?",
        "choices": "What was varied?",
        "invalid": "Which combinations make no sense, and why?",
        "own": "Where do your own choices lie?",
    }
    tables = []
    for name, frame in grid.tables().items():
        tables.append(Table(name, frame, questions.get(name, name.replace("_", " ").capitalize()), None, aside=name == "combinations" or frame.empty))
    return tuple(tables)


def grid_page(grid: Any) -> Page:
    """What the combinations say together."""
    document = grid.to_dict()
    return Page(document, grid_tables(grid), "combinations", close=(*(f"note: {n}" for n in document.get("notes", [])), "", grid.sentence))


def counts_page(counts: Any) -> Page:
    """The rate laws fitted to counts a bin."""
    frame = counts.to_frame()
    screen = frame.copy()
    for key in ("estimate", *_ENDS):
        write = [numbers.when if p in ("t_star", "year") else numbers.number for p in frame["parameter"]]
        screen[key] = [w(v) for w, v in zip(write, frame[key], strict=True)]
    columns = (
        C("law", "law"), C("parameter", "parameter"), C("estimate", "estimate", "right"), C("low", "low", "right", 1), C("high", "high", "right", 1),
        C("low_robust", "low robust", "right", 3), C("high_robust", "high robust", "right", 3), C("dispersion", "dispersion", "number", 2),
        C("log_likelihood", "log L", "number", 4), C("aicc", "AICc", "number", 4), C("lr_p", "LR p", "p", 5), C("same_curve_as", "same curve as", "text", 7),
    )  # fmt: skip
    below = (
        f"{counts.n:,} events in {counts.bins:,} bins; dispersion: Pearson's, 1 for independent events; robust intervals allow for it",
        "counts alone have no nulls of the list's making: growth here may be forgetting, which is the same curve",
        *counts.notes,
    )
    return Page({"rows": frame, "n": counts.n, "bins": counts.bins, "notes": list(counts.notes)}, (Table("counts", frame, "Which simple law of the rate fits the counts?", columns, below, screen=screen),), "counts")
