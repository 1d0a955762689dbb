# SPDX-License-Identifier: Apache-2.0
"""chronos-acc trend"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ..common import chosen_record, command_line
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--full", action="store_true", help="every table: all nulls and estimators, leverage, forgetting, completeness")
    parser.add_argument("--next", dest="next_event", action="store_true", help="the waiting time to the next milestone under each law, with its track record")
    parser.add_argument("--counts", metavar="FILE.csv", help="fit the rate laws to counts a bin instead of a timeline (columns from,to,count: decimal years, bins that join)")
    parser.add_argument("--exposure", metavar="FILE.csv", help="year,exposure: count time in people, scholars or publications instead of years")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...report.analysis_pages import trend_page
    from ...trend.analysis import analyse

    if options.counts:
        from pathlib import Path

        from ...report.analysis_pages import counts_page
        from ...trend.counts import fit_counts, read_counts

        out.page(counts_page(fit_counts(*read_counts(Path(options.counts)), seed=options.seed)))
        return 0
    record = chosen_record(options)
    exposure = None
    if options.exposure:
        from pathlib import Path

        from ...trend.exposure import read_exposure

        exposure = read_exposure(Path(options.exposure))
    trend = analyse(record, seed=options.seed, draws=options.draws, exposure=exposure, next_event=options.next_event, command=command_line("trend", options),
                    tell=out.tell)  # fmt: skip
    out.page(trend_page(trend, full=options.full or out.table is not None))  # a table asked for by name comes whole
    if trend.verdict_code == "too_few":
        out.error("too few milestones to tell; the verdict says what such a list could show")
        return 1
    return 0


COMMAND = Command(
    name="trend",
    about="Is it speeding up? Five trend tests, rate laws, the age exponent and regressions on log time, each beside what null models of the making of the\n"
    "list give, and a verdict. One list cannot tell a faster pace from forgetting; where that matters the verdict says so.",
    example="chronos-acc trend --start 1500",
    arguments=_arguments,
    run=_run,
)
