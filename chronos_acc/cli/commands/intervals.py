# SPDX-License-Identifier: Apache-2.0
"""chronos-acc intervals"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ..common import chosen_record
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...intervals import interval_series
    from ...report.pages import intervals_page

    record = chosen_record(options, out)
    series = interval_series(record, seed=options.seed, draws=options.draws, tell=out.tell)
    out.page(intervals_page(series.to_frame(), record))
    return 0


COMMAND = Command(
    name="intervals",
    about="Show the years from each milestone to the next, oldest first, on best dates, with 95 % ranges from draws of the datings.\n"
    "The last interval is open: it runs to the present and is not finished.",
    example="chronos-acc intervals --min-support 2 --format csv",
    arguments=lambda parser: None,
    run=_run,
)
