# SPDX-License-Identifier: Apache-2.0
"""chronos-acc unload"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ..common import timeline
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("names", nargs="+", metavar="NAME", help="lists, by the names that 'sources' shows")
    parser.add_argument("--no-link", action="store_true", help="leave merging for later")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...report.pages import frame_page
    from ...store.exchange import unload

    import pandas as pd

    gone = [unload(timeline(options), name, link=not options.no_link, tell=out.tell) for name in options.names]
    rows = [{"source": g.source, "entries_removed": g.entries, "rejects_removed": g.rejects, "milestones": g.milestones} for g in gone]
    out.page(frame_page("unload", pd.DataFrame(rows), "What left the timeline?"))
    for g in gone:
        for note in g.notes:
            out.remark(note)
    return 0


COMMAND = Command(
    name="unload",
    about="Take lists out of the timeline, and link the rest again. Decisions about their entries are kept and shown as adrift until the list comes back.",
    example="chronos-acc unload school",
    arguments=_arguments,
    run=_run,
)
