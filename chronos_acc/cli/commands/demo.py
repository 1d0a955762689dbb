# SPDX-License-Identifier: Apache-2.0
"""chronos-acc demo"""

from __future__ import annotations

import argparse
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from ..common import chosen_context
from ..registry import Command

if TYPE_CHECKING:
    from ...record import Record
    from ...report.tables import Page, Table
    from ..output import Output

SCENARIO = "ondrel"
LISTS = ("survey.csv", "museum.csv", "yearbook.csv", "school.csv")
TAIL = 14


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--dir", metavar="DIR", default=".", help="where to put demo.duckdb (this folder)")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ... import files
    from ...bias import run_checks
    from ...errors import Refused
    from ...intervals import interval_series
    from ...report.analysis_pages import bias_page, trend_page
    from ...report.pages import intervals_page, load_page, milestones_page, query_page, rejects_page
    from ...report.tables import Page
    from ...store import load, query, timeline
    from ...trend.analysis import analyse

    folder = Path(options.dir)
    if folder.exists() and not folder.is_dir():
        raise Refused(f"{folder} is a file; --dir takes a folder, which is made if it is not there")
    folder.mkdir(parents=True, exist_ok=True)
    db = Path(options.db) if options.db else folder / "demo.duckdb"
    story = files.datasets() / SCENARIO

    pages: dict[str, Page] = {}
    pages["load"] = load_page(load.load(db, [story / name for name in LISTS], tell=out.tell))
    pages["rejects"] = rejects_page(timeline.table(db, "rejects"))
    record = timeline.record(db, present=options.present, start=options.start, sources=options.sources, min_support=options.min_support, category=options.category)
    milestones = timeline.table(db, "milestones")
    shared = milestones[milestones["support"] >= 3]
    pages["milestones"] = _renamed(milestones_page(shared), "Which milestones do three lists or more share?", f"all {len(milestones)}: chronos-acc milestones --db {db}")
    series = interval_series(record, seed=options.seed, draws=options.draws, tell=out.tell)
    whole = intervals_page(series.to_frame(), record)
    pages["intervals"] = _tail(whole, TAIL, f"the last {TAIL} of {len(record.window.times)}; all of them: chronos-acc intervals --db {db}")
    pages["overlap"] = query_page(query.run(db, "overlap", {}), "How much do the lists share? (a named query; chronos-acc query lists the others)")
    options.db = str(db)
    bias = run_checks(chosen_context(options, record, out))
    pages["lists"] = _alone(record, options.seed)
    pages["bias"] = bias_page(bias)
    trend = analyse(record, seed=options.seed, draws=options.draws, tell=out.tell)
    pages["trend"] = trend_page(trend)

    tables: list[Table] = []
    for name, page in pages.items():
        tables += [replace(t, name=t.name if t.name == name else f"{name}_{t.name}") for t in page.tables]
    lead = ("Ondrel is an invented region, and so are its four lists; how they were made is told in datasets/ondrel/story.md.", "")
    said = {line.partition(": ")[2].partition(": ")[2] for line in pages["bias"].close}  # what a check said need not be said again
    close = (*pages["bias"].close, *(line for line in pages["trend"].close if line.removeprefix("note: ") not in said), "", f"The timeline is {db}: any DuckDB client opens it. Your own lists: chronos-acc load FILE.csv")
    document: dict[str, Any] = {name: page.document for name, page in pages.items()}
    document["intervals"] = whole.document
    out.page(Page(document, tuple(tables), "trend_tests", lead, close))
    return 0


def _alone(record: Record, seed: int) -> Page:
    """What each list says alone, in short: fewer null records and draws than ``trend`` uses."""
    import pandas as pd

    from ...errors import RecordRefused
    from ...report.tables import Column, Page, Table
    from ...trend.analysis import analyse

    rows = []
    for name in record.lists:
        try:
            trend = analyse(record.only(sources=[name]), seed=seed, draws=0, replicates=199, bootstrap=99)
        except RecordRefused:
            continue
        head = trend.to_dict()["headline"]
        rows.append({"list": name, "n": trend.to_dict()["record"]["n"], "p_laplace": head["p_laplace"], "doublings": head["doublings"], "half_life": head["half_life"],
                     "verdict_code": trend.verdict_code, "clauses": ", ".join(trend.verdict_clauses)})  # fmt: skip
    frame = pd.DataFrame(rows)
    columns = (
        Column("list", "list"), Column("n", "n", "count"), Column("p_laplace", "p laplace", "p"), Column("doublings", "doublings", "number"),
        Column("half_life", "same as half forgotten in", "span"), Column("verdict_code", "verdict"), Column("clauses", "and", "text", 1),
    )  # fmt: skip
    below = ("forgetting: a steady past, forgotten at that pace, gives the same curve; the story tells for which list that is the truth",)
    return Page(frame, (Table("lists", frame, "What would each list say alone?", columns, below),), "lists")


def _renamed(page: Page, question: str, below: str) -> Page:
    (table,) = page.tables
    return replace(page, tables=(replace(table, question=question, below=(*table.below, below)),))


def _tail(page: Page, rows: int, below: str) -> Page:
    (table,) = page.tables
    shown = table.shown.tail(rows)
    return replace(page, tables=(replace(table, screen=shown, below=(below, *table.below)),))


COMMAND = Command(
    name="demo",
    about="Run the main job on the shipped scenario: four invented lists become one timeline, one interval series, and an answer. Leaves demo.duckdb.",
    example="chronos-acc demo --dir try",
    arguments=_arguments,
    run=_run,
)
