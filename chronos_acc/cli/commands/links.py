# SPDX-License-Identifier: Apache-2.0
"""chronos-acc links"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ..common import timeline
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output

STATES = ("linked", "implied", "review", "blocked", "same", "different")


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--state", choices=STATES, help="pairs of this state only")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...report.pages import links_page
    from ...store.timeline import table

    frame = table(timeline(options), "links")
    if options.state:
        frame = frame[frame["state"] == options.state]
    if options.sources:
        frame = frame[frame["source_a"].isin(options.sources) & frame["source_b"].isin(options.sources)]
    out.page(links_page(frame, options.state))
    return 0


COMMAND = Command(
    name="links",
    about="Show all scored pairs of every state, with the parts of each score. States: linked (scored pair inside a milestone), implied (in the same\n"
    "milestone, not joined directly), review (waits for you), blocked (a rival or a decision stands against it), same and different (your decisions).",
    example="chronos-acc links --state review --format csv",
    arguments=_arguments,
    run=_run,
)
