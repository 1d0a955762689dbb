# SPDX-License-Identifier: Apache-2.0
"""chronos-acc milestones"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ..arguments import whole
from ..common import chosen_record, timeline
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("id", nargs="?", type=whole(0, 2**62), metavar="ID", help="one milestone, with all its entries and why they were joined")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...report.pages import milestone_page, milestones_page
    from ...store.timeline import milestone, table

    if options.id is not None:
        out.page(milestone_page(milestone(timeline(options), options.id)))
        return 0
    record = chosen_record(options, out)
    frame = table(timeline(options), "milestones")
    inside = frame[frame["milestone"].isin(record.id.tolist())].copy()
    if options.sources:  # fewer lists: pooled dates and support as that choice gives them
        found = {int(i): k for k, i in enumerate(record.id)}
        at = [found[int(i)] for i in inside["milestone"]]
        for key, values in (("earliest", record.earliest), ("best", record.best), ("latest", record.latest), ("support", record.support)):
            inside[key] = values[at]
        inside = inside.sort_values(["best", "milestone"])
    out.page(milestones_page(inside))
    return 0


COMMAND = Command(
    name="milestones",
    about="Show the merged milestones with their pooled dates and the number of independent lists that name them; or one milestone in full.",
    example="chronos-acc milestones --min-support 2",
    arguments=_arguments,
    run=_run,
)
