# SPDX-License-Identifier: Apache-2.0
"""chronos-acc link"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ...errors import WrongUse
from ..arguments import number
from ..common import timeline
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output

POOLING = ("mixture", "inverse_variance", "random_effects", "paule_mandel", "preferred")


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--accept", type=number(0, 1), metavar="P", default=None, help="join pairs from this probability on (0.5, or what the last link used)")
    parser.add_argument("--doubt", type=number(0, 1), metavar="P", default=None, help="between this probability and the other, ask for review (0.1, or what the last link used)")
    parser.add_argument("--prefer", metavar="LIST", help="the list whose titles name the milestones")
    parser.add_argument("--pooling", choices=POOLING, default=None, help="how the datings of one milestone become one (mixture, or what the last link used)")
    parser.add_argument("--orders", metavar="FILE.csv", help="known orders (columns earlier,later: two titles a row); draws then respect them, a circle is refused")
    parser.add_argument("--check", metavar="GOLD.csv", help="compare with a gold file (source,title,milestone): precision, recall, and the threshold curve")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...merge.entries import LinkOptions
    from ...report.pages import gold_page, link_page
    from ...store.linking import relink, stored

    before = stored(timeline(options))  # what the last link used stands until it is changed
    chosen = LinkOptions(
        accept=before.accept if options.accept is None else options.accept,
        review=before.review if options.doubt is None else options.doubt,
        prefer=options.prefer or before.prefer,
        pooling=options.pooling or before.pooling,
    )
    if options.check:
        from pathlib import Path

        from ...store.gold import check_gold

        out.page(gold_page(check_gold(timeline(options), Path(options.check))))
        return 0
    if options.orders:
        from pathlib import Path

        from ...store.orders import state_orders

        out.remark(f"{state_orders(timeline(options), Path(options.orders))} known orders stated")
    if chosen.review > chosen.accept:
        raise WrongUse(f"--doubt {chosen.review:g} lies above --accept {chosen.accept:g}; pairs between the two wait for review, so --doubt must be the lower")
    done = relink(timeline(options), options=chosen, tell=out.tell)
    out.page(link_page(done))
    return 0


COMMAND = Command(
    name="link",
    about="Find the entries of different lists that are the same milestone, by title and date; every pair gets a probability and a state.\n"
    "Your decisions always hold. With --check, nothing is changed: the present links are compared with a gold file.",
    example="chronos-acc link --accept 0.6",
    arguments=_arguments,
    run=_run,
)
