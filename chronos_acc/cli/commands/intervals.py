# SPDX-License-Identifier: Apache-2.0
"""chronos-acc intervals"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ..common import chosen_record
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--by", choices=("list", "support", "category"), help="one series for each list alone, each level of support, or each category")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...intervals import interval_series, interval_sets
    from ...report.pages import interval_sets_page, intervals_page

    record = chosen_record(options, out)
    if options.by:
        sets = interval_sets(record, options.by, seed=options.seed, draws=options.draws, tell=out.tell)
        out.page(interval_sets_page(options.by, {name: series.to_frame() for name, series in sets.items()}, record))
        return 0
    series = interval_series(record, seed=options.seed, draws=options.draws, tell=out.tell)
    out.page(intervals_page(series.to_frame(), record))
    return 0


COMMAND = Command(
    name="intervals",
    about="Show the years from each milestone to the next, oldest first, on best dates, with 95 % ranges from draws of the datings.\n"
    "The last interval is open: it runs to the present and is not finished.",
    example="chronos-acc intervals --min-support 2 --format csv",
    arguments=_arguments,
    run=_run,
)
