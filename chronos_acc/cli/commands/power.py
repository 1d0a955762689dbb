# SPDX-License-Identifier: Apache-2.0
"""chronos-acc power"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ..arguments import number, whole
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--events", type=whole(1, 100_000), metavar="N", help="plan for a list of this size (else the size of the record)")
    parser.add_argument("--doublings", type=number(-100, 100), action="append", metavar="D", help="growth over the window; may be given again (1, 2, 4)")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...report.pages import frame_page
    from ...report.tables import Column
    from ...trend.power import power
    from ..common import chosen_record

    events = options.events
    if events is None:
        events = chosen_record(options, out).window.n
    frame = power(events, doublings=tuple(options.doublings or (1.0, 2.0, 4.0)), seed=options.seed).to_frame()
    columns = tuple(
        Column(str(k), str(k).replace("_", " "), "share" if str(k) in ("power", "share", "low", "high") or str(k).startswith("p_") else "text") for k in frame.columns
    )
    out.page(frame_page("power", frame, f"How often would {events} events show a growth of so many doublings?", columns))
    return 0


COMMAND = Command(
    name="power",
    about="What growth could a list of this size show? The share of simulated records of n events in which each test finds it at 5 %.",
    example="chronos-acc power --events 40 --doublings 1 --doublings 3",
    arguments=_arguments,
    run=_run,
)
