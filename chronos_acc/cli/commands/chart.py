# SPDX-License-Identifier: Apache-2.0
"""chronos-acc chart"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ..arguments import whole
from ..common import chosen_context, chosen_record, command_line
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("kind", nargs="?", metavar="KIND", help="interval_age, cumulative, recall, completeness, lists, grid or support; nothing: list the kinds")
    parser.add_argument("--to", metavar="FILE", help="write a figure for print instead: FILE.png, .svg or .pdf (needs the extra figures)")
    parser.add_argument("--height", type=whole(8, 200), metavar="ROWS", default=26, help="rows of the terminal chart (26)")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...report.charts import CHARTS, chart, to_figure, to_terminal
    from ...report.pages import charts_page

    if options.kind is None:
        out.page(charts_page(CHARTS))
        return 0
    record = chosen_record(options, out)
    grid = None
    if options.kind == "grid":
        from ...bias.grid import run_grid

        grid = run_grid(chosen_context(options, record, out), joint=499, tell=out.tell)
    data = chart(options.kind, record=record, grid=grid, seed=options.seed, draws=options.draws)
    if options.to:
        path = to_figure(data, options.to)
        out.remark(f"wrote {path}")
        return 0
    if options.format == "table":
        out.text(to_terminal(data, width=min(out.width, 140), height=options.height, colour=out.colour) + "\n")
    elif options.format == "json":
        import json

        out.text(json.dumps({**data.to_dict(), "made": command_line(f"chart {options.kind}", options)}, ensure_ascii=False, indent=1, allow_nan=False) + "\n")
    else:
        from ...report.pages import frame_page

        out.page(frame_page("chart", data.to_frame(), data.question))
    return 0


COMMAND = Command(
    name="chart",
    about="Draw a chart in the terminal, or with --to as a figure fit for print. In csv or json the numbers behind it are printed instead.",
    example="chronos-acc chart interval_age",
    arguments=_arguments,
    run=_run,
)
