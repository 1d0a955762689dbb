# SPDX-License-Identifier: Apache-2.0
"""chronos-acc report"""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

from ...errors import WrongUse
from ..common import chosen_context, chosen_record, command_line, timeline
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output

ENDINGS = (".md", ".html", ".htm", ".tex")


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="OUT", help="OUT.md, OUT.html (one file that needs no network) or OUT.tex")
    parser.add_argument("--title", metavar="WORDS", help="the report's title")
    parser.add_argument("--no-grid", action="store_true", help="leave out the grid of choices, which takes longest")


def _run(options: argparse.Namespace, out: Output) -> int:
    path = Path(options.file)
    if path.suffix.lower() not in ENDINGS:
        raise WrongUse(f"{options.file!r} has no ending that is known; allowed are {', '.join(ENDINGS)}")
    if not path.parent.is_dir():
        raise WrongUse(f"there is no folder {path.parent}; make it first, or write the report elsewhere")

    from datetime import UTC, datetime
    from importlib import metadata
    from importlib.util import find_spec

    from ... import __version__
    from ...bias import run_checks
    from ...bias.grid import run_grid
    from ...intervals import interval_series
    from ...report.document import write_document
    from ...report.whole import Material, build
    from ...store.runs import record_run
    from ...store.timeline import table
    from ...trend.analysis import analyse

    db = timeline(options)
    record = chosen_record(options)
    context = chosen_context(options, record, out)
    command = command_line(f"report {path.name}", options)
    trend = analyse(record, seed=options.seed, draws=options.draws, command=command_line("trend", options), tell=out.tell)
    milestones = table(db, "milestones")
    sources = table(db, "sources")
    material = Material(
        title=options.title or f"Are the milestones of {', '.join(record.lists)} speeding up?",
        record=record,
        sources=sources[sources["source"].isin(record.lists)],
        rejects=table(db, "rejects").pipe(lambda f: f[f["source"].isin(record.lists)]),
        milestones=milestones[milestones["milestone"].isin(record.id.tolist())],
        links=table(db, "links"),
        decisions=table(db, "decisions"),
        intervals=interval_series(record, seed=options.seed, draws=options.draws, tell=out.tell),
        trend=trend,
        bias=run_checks(context),
        grid=None if options.no_grid else run_grid(context, joint=499, tell=out.tell),
        commands=tuple(command_line(name, options) for name in ("intervals", "trend", "bias", *(() if options.no_grid else ("grid",)), f"report {path.name}")),
        version=__version__,
        libraries=tuple((name, metadata.version(name)) for name in ("numpy", "pandas", "duckdb", "scipy", "statsmodels")),
        stamp=datetime.now(UTC).strftime("%Y-%m-%d %H:%M UTC"),
    )
    written = write_document(build(material, figures=find_spec("matplotlib") is not None), path)
    record_run(db, command=command, seed=options.seed, draws=options.draws, record=record.hash, result={"verdict": trend.to_dict()["verdict"], "written": str(path)})
    for each in written:
        out.remark(f"wrote {each}")
    return 0


COMMAND = Command(
    name="report",
    about="Write the whole analysis as one document: lists with citations, merging, series, trend, bias, grid, figures, a Methods paragraph with the\n"
    "published methods it used, cautions, and how it was made. Made again with the same seed it is the same but for the time stamp.",
    example="chronos-acc report result.html",
    arguments=_arguments,
    run=_run,
)
