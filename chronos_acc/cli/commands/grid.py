# SPDX-License-Identifier: Apache-2.0
"""chronos-acc grid"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ..arguments import whole
from ..common import chosen_context, chosen_record, command_line, timeline
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--choices", metavar="FILE.toml", help="your own choices; the file's hash is printed, so that it can be shown to be older than the result")
    parser.add_argument("--joint", type=whole(0, 100_000), metavar="B", default=499, help="null records for the joint test over all combinations (499); 0 leaves it out")
    parser.add_argument("--show-choices", action="store_true", help="print the default choices as a file to start from")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...bias.grid import default_choices, read_choices, run_grid
    from ...report.analysis_pages import grid_page
    from ...store.runs import record_run

    if options.show_choices:
        out.text(default_choices().to_toml())
        return 0
    from pathlib import Path

    choices = read_choices(Path(options.choices)) if options.choices else None
    record = chosen_record(options)
    context = chosen_context(options, record, out)
    grid = run_grid(context, choices=choices, joint=options.joint, tell=out.tell)
    record_run(timeline(options), command=command_line("grid", options), seed=options.seed, draws=options.draws, record=record.hash, result=grid.to_dict())
    out.page(grid_page(grid))
    return 0


COMMAND = Command(
    name="grid",
    about="Run every combination of choices that could be defended, on common random numbers: how many find speeding, how many the opposite, which choice\n"
    "moves the answer most, and how often a steady record would give as much. Arbitrary choices and choices that change the question are kept apart.",
    example="chronos-acc grid --joint 199 --draws 500",
    arguments=_arguments,
    run=_run,
)
