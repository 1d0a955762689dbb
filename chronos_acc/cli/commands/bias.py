# SPDX-License-Identifier: Apache-2.0
"""chronos-acc bias"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ..arguments import names
from ..common import chosen_context, chosen_record
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--checks", type=names, metavar="A,B", help="these checks only")
    parser.add_argument("--full", action="store_true", help="every table of every check, not the summary alone")
    parser.add_argument("--exposure", metavar="FILE.csv", help="year,exposure for the exposure check")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...bias import run_checks
    from ...report.analysis_pages import bias_page

    record = chosen_record(options)
    exposure = None
    if options.exposure:
        from pathlib import Path

        from ...trend.exposure import read_exposure

        exposure = read_exposure(Path(options.exposure))
    context = chosen_context(options, record, out, exposure)
    bias = run_checks(context, names=options.checks)
    out.page(bias_page(bias, full=options.full or options.checks is not None))
    return 0


COMMAND = Command(
    name="bias",
    about="Would the making of the lists produce this? Each check changes one thing about how the record came to be and shows the growth beside the null\n"
    "for that very setting. The summary comes first: one row a check.",
    example="chronos-acc bias --checks recall_decay,support",
    arguments=_arguments,
    run=_run,
)
