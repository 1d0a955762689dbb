# SPDX-License-Identifier: Apache-2.0
"""chronos-acc export"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ..common import timeline
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("folder", metavar="DIR", help="an empty or new folder")


def _run(options: argparse.Namespace, out: Output) -> int:
    from pathlib import Path

    from ...report.pages import frame_page
    from ...store.exchange import export

    done = export(timeline(options), Path(options.folder), tell=out.tell)
    out.page(frame_page("export", done.to_frame(), f"What was written to {options.folder}?", below=(f"bring it back with: chronos-acc load {options.folder}",)))
    return 0


COMMAND = Command(
    name="export",
    about="Write the timeline as a folder: Parquet tables, sheets, decisions, and a manifest with hashes. Loading the folder brings the same timeline back.",
    example="chronos-acc export backup-2026",
    arguments=_arguments,
    run=_run,
)
