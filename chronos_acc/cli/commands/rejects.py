# SPDX-License-Identifier: Apache-2.0
"""chronos-acc rejects"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ..common import timeline
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...report.pages import rejects_page
    from ...store.timeline import table

    frame = table(timeline(options), "rejects")
    if options.sources:
        frame = frame[frame["source"].isin(options.sources)]
    out.page(rejects_page(frame))
    return 0


COMMAND = Command(
    name="rejects",
    about="Show every refused row: its list, row number, the row as it came, and the reason. Mend the file and load it again.",
    example="chronos-acc rejects --format csv",
    arguments=lambda parser: None,
    run=_run,
)
