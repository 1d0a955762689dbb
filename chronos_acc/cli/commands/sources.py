# SPDX-License-Identifier: Apache-2.0
"""chronos-acc sources"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ..common import timeline
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...report.pages import sources_page
    from ...store.timeline import table

    out.page(sources_page(table(timeline(options), "sources")))
    return 0


COMMAND = Command(
    name="sources",
    about="Show the lists in the timeline: who compiled them and when, by which criterion, and how their rows fared.",
    example="chronos-acc sources",
    arguments=lambda parser: None,
    run=_run,
)
