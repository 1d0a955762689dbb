# SPDX-License-Identifier: Apache-2.0
"""A page for each command of lists and merging: its document, its tables, the question each answers, its columns by importance."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict, is_dataclass
from typing import TYPE_CHECKING, Any

import pandas as pd

from .tables import Column, Page, Table

if TYPE_CHECKING:
    from ..record import Record


def frame_page(name: str, frame: pd.DataFrame, question: str, columns: tuple[Column, ...] | None = None, below: Sequence[str] = (), empty: str = "nothing to show") -> Page:
    """A page of one table, whose document is its rows."""
    return Page(frame, (Table(name, frame, question, columns, tuple(below), empty),), name)


def load_page(loaded: Sequence[Any]) -> Page:
    """What ``load`` did: one row a list, then the notes and the linking."""
    rows = [{"source": l.source, "rows_read": l.rows_read, "rows_loaded": l.rows_loaded, "rows_rejected": l.rows_rejected, "added": l.added,
             "changed": l.changed, "gone": l.gone, "duplicates": l.duplicates, "notes": list(l.notes)} for l in loaded]  # fmt: skip
    frame = pd.DataFrame(rows)
    columns = (
        Column("source", "list"), Column("rows_read", "read", "count"), Column("rows_loaded", "loaded", "count"), Column("rows_rejected", "refused", "count"),
        Column("added", "added", "count", 4), Column("changed", "changed", "count", 5), Column("gone", "gone", "count", 5), Column("duplicates", "duplicates", "count", 6),
    )  # fmt: skip
    below = [f"{l.source}: {note}" for l in loaded for note in l.notes]
    if any(l.rows_rejected for l in loaded):
        below.append("refused rows with their reasons: chronos-acc rejects")
    linked = next((l.linked for l in reversed(loaded) if getattr(l, "linked", None) is not None), None)
    if linked is not None:
        below.append(_linked_words(linked))
    return Page(rows, (Table("load", frame, "What was read, and is every row accounted for?", columns, tuple(below)),), "load")


def _linked_words(summary: Any) -> str:
    words = f"linked: {summary.entries:,} entries make {summary.milestones:,} milestones"
    if summary.to_review:
        words += f"; {summary.to_review:,} pairs are doubtful: chronos-acc review"
    return words


def sources_page(frame: pd.DataFrame) -> Page:
    """The lists."""
    columns = (
        Column("source", "list"), Column("compiled", "compiled", "text"), Column("rows_read", "read", "count", 3), Column("rows_loaded", "loaded", "count"),
        Column("rows_rejected", "refused", "count"), Column("criterion", "criterion", "text", 4), Column("title", "title", "text", 5),
        Column("derives_from", "derives from", "text", 7), Column("citation", "citation", "text", 6), Column("file", "file", "text", 8),
    )  # fmt: skip
    return frame_page("sources", frame, "Which lists are in the timeline?", columns, empty="no list yet; chronos-acc load FILE brings one in")


def rejects_page(frame: pd.DataFrame) -> Page:
    """The refused rows."""
    columns = (Column("source", "list"), Column("row", "row", "count"), Column("raw", "as it came"), Column("reason", "why it was refused"))
    return frame_page("rejects", frame, "Which rows were refused, and why?", columns, empty="every row was loaded")


def date_page(rows: list[dict[str, Any]]) -> Page:
    """How texts are read."""
    frame = pd.DataFrame(rows, columns=["text", "notation", "earliest", "best", "latest", "shape", "words", "defaults", "remarks", "error"])
    if not frame["error"].notna().any():
        frame = frame.drop(columns="error")
    columns = (
        Column("text", "text"), Column("notation", "notation"), Column("earliest", "earliest"), Column("best", "best"), Column("latest", "latest"),
        Column("shape", "shape", "text", 3), Column("words", "understood as", "text", 1), Column("defaults", "defaults used", "text", 5),
        Column("remarks", "remarks", "text", 4), Column("error", "why it is refused"),
    )  # fmt: skip
    shown = frame.copy()
    for key in ("earliest", "best", "latest"):
        shown[key] = [None if v is None or v != v else _exact_year(v) for v in frame[key]]
    below = ("decimal years, astronomical: 1 BCE is 0, 2 BCE is −1",)
    return Page(rows, (Table("date", frame, "How is each text read?", columns, below, screen=shown),), "date")


def _exact_year(value: float) -> str:
    text = f"{value:.4f}".rstrip("0").rstrip(".")
    return text.replace("-", "−")


def link_page(summary: Any) -> Page:
    """What ``link`` did."""
    document = {"entries": summary.entries, "pairs_scored": summary.pairs_scored, "linked": summary.linked, "to_review": summary.to_review,
                "milestones": summary.milestones}  # fmt: skip
    frame = pd.DataFrame([document])
    columns = (Column("entries", "entries", "count"), Column("pairs_scored", "pairs scored", "count"), Column("linked", "linked", "count"),
               Column("to_review", "to review", "count"), Column("milestones", "milestones", "count"))  # fmt: skip
    below = list(summary.notes)
    used = summary.options
    if used is not None:
        below.insert(0, f"joined from probability {used.accept:g} on, doubtful from {used.review:g} on; datings pooled by {used.pooling.replace('_', ' ')}")
    if summary.to_review:
        below.append("doubtful pairs: chronos-acc review")
    return Page(document, (Table("link", frame, "How many milestones do the lists share?", columns, tuple(below)),), "link")


def links_page(frame: pd.DataFrame, state: str | None = None) -> Page:
    """All pairs, or those of one state."""
    columns = (
        Column("title_a", "title"), Column("source_a", "list", "text", 1), Column("date_a", "date", "text", 4), Column("title_b", "title"),
        Column("source_b", "list", "text", 1), Column("date_b", "date", "text", 4), Column("score", "score", "p"), Column("state", "state"),
    )  # fmt: skip
    return frame_page("links", frame, "Which entries are the same milestone, and how sure is it?", columns, empty=f"no pair is in state {state}" if state else "no pair of entries came close enough to be scored")


def gold_page(check: Any) -> Page:
    """Linking against a gold file."""
    summary = {"precision": check.precision, "recall": check.recall, "f1": check.f1}
    for key in ("pairs", "gold_pairs", "right"):
        if hasattr(check, key):
            summary[key] = getattr(check, key)
    head = pd.DataFrame([summary])
    document = {**summary, "curve": check.curve, "notes": list(getattr(check, "notes", ()))}
    columns = tuple(Column(k, k.replace("_", " "), "p" if k in ("precision", "recall", "f1") else "count") for k in summary)
    curve_columns = tuple(Column(str(k), str(k).replace("_", " "), "p" if str(k) in ("threshold", "accept", "precision", "recall", "f1") else "count") for k in check.curve.columns)
    tables = (
        Table("check", head, "How well do the links agree with the gold file? (pairs inside milestones)", columns, tuple(getattr(check, "notes", ()))),
        Table("curve", check.curve, "What would other thresholds give?", curve_columns),
    )
    return Page(document, tables, "check")


def milestones_page(frame: pd.DataFrame) -> Page:
    """The merged milestones."""
    columns = (
        Column("milestone", "id", "text", 2), Column("title", "milestone"), Column("best", "when", "when"), Column("earliest", "earliest", "when", 1),
        Column("latest", "latest", "when", 1), Column("support", "support", "count"), Column("entries", "entries", "count", 4), Column("category", "category", "text", 5),
        Column("importance", "importance", "number", 6), Column("disjoint", "disjoint", "yes", 3), Column("birge", "Birge ratio", "number", 7),
        Column("i2", "I²", "share", 8),
    )  # fmt: skip
    below = ("support: independent lists that name it; disjoint: some of its datings do not overlap",)
    return frame_page("milestones", frame, "Which milestones do the lists make together?", columns, below)


def milestone_page(found: Any) -> Page:
    """One milestone in full: ``found`` maps table names to frames, "milestone" and "entries" first."""
    tables = []
    questions = {"milestone": "Which milestone is this?", "entries": "Which entries make it, and how is each dated?", "links": "Why were they joined?"}
    items = asdict(found) if is_dataclass(found) and not isinstance(found, type) else dict(found)
    for name, frame in items.items():
        if isinstance(frame, pd.DataFrame):
            tables.append(Table(name, frame, questions.get(name, ""), _known(frame)))
    return Page({k: v for k, v in items.items()}, tuple(tables), "milestone")


_WHEN = {"best", "earliest", "latest", "year", "start", "present"}
_COUNT = {"support", "entries", "n", "rows", "milestones", "lists"}


def _known(frame: pd.DataFrame) -> tuple[Column, ...]:
    """Columns of a frame whose names are ours: dates drawn as dates."""
    out = []
    for rank, key in enumerate(map(str, frame.columns)):
        numeric = pd.api.types.is_numeric_dtype(frame[key]) and not pd.api.types.is_bool_dtype(frame[key])
        kind = "when" if key.removesuffix("_a").removesuffix("_b") in _WHEN and numeric else "count" if key in _COUNT and numeric else "text"
        if kind == "text" and pd.api.types.is_float_dtype(frame[key]):
            kind = "number"
        out.append(Column(key, key.replace("_", " "), kind, rank))
    return tuple(out)


def intervals_page(frame: pd.DataFrame, record: Record) -> Page:
    """The interval series with a bar of log length."""
    shown = frame.assign(bar=frame["interval"])
    columns = (
        Column("title", "milestone"), Column("year", "when", "when"), Column("age", "age", "span", 3), Column("interval", "interval", "span"),
        Column("bar", "log length", "bar", 1), Column("interval_low", "low", "span", 2), Column("interval_high", "high", "span", 2),
        Column("swap_chance", "swap chance", "share", 5), Column("support", "support", "count", 6), Column("next_milestone", "next", "text", 7),
        Column("open", "open", "yes", 4), Column("milestone", "id", "text", 8),
    )  # fmt: skip
    below = (
        f"ages count back from {record.present:g} ({record.present_from}); low and high: 95 % of draws from the datings; the open interval is not finished",
        "shrinking bars alone prove nothing: any list picked evenly per decade of age shrinks like this (chronos-acc trend shows the nulls)",
    )
    names = dict(zip(frame["milestone"].tolist(), frame["title"].tolist(), strict=True))
    shown["next_milestone"] = [names.get(v, "") for v in frame["next_milestone"].tolist()]
    table = Table("intervals", frame, "How long from each milestone to the next?", columns, below, "no milestone inside the window", shown)
    return Page(frame, (table,), "intervals")


def interval_sets_page(by: str, sets: dict[str, pd.DataFrame], record: Record) -> Page:
    """One series after the other: each list's, each level of support's, or each category's."""
    frames = [frame.assign(**{by: name}) for name, frame in sets.items()]
    whole = pd.concat(frames, ignore_index=True) if frames else pd.DataFrame(columns=[by])
    whole = whole[[by, *(c for c in whole.columns if c != by)]]
    tables = []
    for name, frame in sets.items():
        (table,) = intervals_page(frame, record).tables
        asked = {"list": f"in the list {name} alone", "support": f"among milestones that {name} lists or more name", "category": f"in the category {name}"}[by]
        tables.append(Table(name, frame, f"How long from each milestone to the next {asked}?", table.columns, (), table.empty, table.screen))
    return Page(whole, (Table("intervals", whole, "", None, aside=True), *tables), "intervals")


def queries_page(queries: Sequence[Any]) -> Page:
    """The named queries."""
    rows = [{"name": q.name, "question": q.question, "parameters": q.parameters, "columns": q.columns} for q in queries]
    frame = pd.DataFrame(rows, columns=["name", "question", "parameters", "columns"])
    screen = frame.assign(parameters=[", ".join(q.parameters) for q in queries])
    columns = (Column("name", "query"), Column("question", "question"), Column("parameters", "parameters", "text", 2))
    below = ("run one: chronos-acc query NAME --set PARAMETER=VALUE; what parameters and columns mean: chronos-acc query --format json",)
    return Page(rows, (Table("queries", frame, "What can be asked by name?", columns, below, screen=screen),), "queries")


def query_page(frame: pd.DataFrame, question: str) -> Page:
    """The rows of a query."""
    return frame_page("query", frame, question, _known(frame) if question else None, empty="no row")


def decisions_page(frame: pd.DataFrame) -> Page:
    """What people settled."""
    columns = (
        Column("decision", "no.", "text"), Column("title_a", "title"), Column("source_a", "list", "text", 2), Column("title_b", "title"), Column("source_b", "list", "text", 2),
        Column("verdict", "verdict"), Column("status", "status"), Column("who", "who", "text", 3), Column("decided_at", "when", "text", 4), Column("why", "why", "text", 5),
    )  # fmt: skip
    return frame_page("decisions", frame, "What has been settled, and does it hold?", columns, empty="nothing has been settled yet; chronos-acc review shows what waits")


def charts_page(charts: Sequence[Any]) -> Page:
    """The kinds of chart."""
    rows = [{"kind": c.name, "question": c.question, "needs": c.needs} for c in charts]
    columns = (Column("kind", "kind"), Column("question", "question it answers"), Column("needs", "needs", "text", 2))
    return Page(rows, (Table("charts", pd.DataFrame(rows), "What can be drawn?", columns, ("in the terminal: chronos-acc chart KIND; for print: --to FILE.svg",)),), "charts")
