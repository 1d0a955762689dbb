# SPDX-License-Identifier: Apache-2.0
"""chronos-acc review"""

from __future__ import annotations

import argparse
import getpass
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from ...errors import WrongUse
from ..arguments import whole
from ..common import timeline
from ..registry import Command

if TYPE_CHECKING:
    from ...store.decisions import Pair
    from ..output import Output

KEYS = "s same · d different · k skip · u undo · q stop"
WORDS = {"s": "same", "same": "same", "d": "different", "different": "different", "k": "skip", "skip": "skip", "u": "undo", "undo": "undo", "q": "stop", "stop": "stop", "quit": "stop"}


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", nargs="?", metavar="FILE.csv", help="decisions from a spreadsheet: what 'links --state review --format csv' wrote, with same or different in the column state")
    parser.add_argument("--state", choices=("review", "linked", "implied", "blocked"), default="review", help="look at pairs of this state (review); linked ones can be taken apart")
    parser.add_argument("--pair", nargs=2, type=whole(0, 2**62), metavar=("ENTRY", "ENTRY"), help="settle this pair of entry ids; with --verdict without asking")
    parser.add_argument("--verdict", choices=("same", "different"), help="the verdict for --pair")
    parser.add_argument("--list", action="store_true", help="list all decisions and whether each still holds")
    parser.add_argument("--withdraw", type=whole(0, 2**62), metavar="N", help="withdraw decision N")
    parser.add_argument("--who", metavar="NAME", help="who decides (your login name)")
    parser.add_argument("--why", metavar="WORDS", help="why, kept with each decision of this sitting")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...report.pages import decisions_page, frame_page
    from ...store import decisions
    from ...store.linking import relink

    db = timeline(options)
    who = options.who or _login()
    if options.verdict and not options.pair:
        raise WrongUse("--verdict goes with --pair ENTRY ENTRY; chronos-acc links shows the ids")
    if options.list:
        out.page(decisions_page(decisions.listing(db)))
        return 0
    if options.withdraw is not None:
        decisions.withdraw(db, options.withdraw)
        relink(db, tell=out.tell)
        out.page(decisions_page(decisions.listing(db)))
        return 0
    if options.file:
        import pandas as pd

        read = decisions.read_file(db, Path(options.file), who=who)
        linked = relink(db, tell=out.tell) if read.decided else None
        row = {"rows": read.rows, "decided": read.decided, "unchanged": read.unchanged, "skipped": read.skipped, "milestones": linked.milestones if linked else None}
        below = ("skipped: rows whose state is neither same nor different",) if read.skipped else ()
        out.page(frame_page("review", pd.DataFrame([row]), "What was decided?", below=below))
        return 0
    if options.pair and options.verdict:
        pair = decisions.pair(db, *options.pair)
        if options.verdict == "same" and pair.a.source == pair.b.source:
            out.remark(f"both are entries of the list {pair.a.source}: joined all the same, as you say")
        decisions.decide(db, options.pair[0], options.pair[1], options.verdict, who=who, why=options.why)
        relink(db, tell=out.tell)
        out.page(decisions_page(decisions.listing(db)))
        return 0
    pairs = (decisions.pair(db, *options.pair),) if options.pair else decisions.pending(db, options.state)
    if not pairs:
        out.text(f"no pair waits in state {options.state}\n")
        return 0
    made = _sitting(options, out, pairs, who)
    if made:
        linked = relink(db, tell=out.tell)
        out.text(f"{made} decided; {linked.entries:,} entries make {linked.milestones:,} milestones\n")
    return 0


def _login() -> str:
    try:
        return getpass.getuser()
    except (OSError, KeyError, ImportError):  # no such user, no home
        return "unnamed"


def _sitting(options: argparse.Namespace, out: Output, pairs: tuple[Pair, ...], who: str) -> int:
    """Ask about one pair after the other; each answer is stored at once. Returns how many decisions stand."""
    from ...store import decisions

    db = timeline(options)
    made: list[tuple[int, int]] = []  # (position, decision)
    i = 0
    while i < len(pairs):
        out.text(_shown(pairs[i], i, len(pairs), min(out.width, 100)))
        while True:
            out.text(f"  {KEYS} > ")
            line = sys.stdin.readline() if sys.stdin is not None else ""
            word = WORDS.get(line.strip().lower(), "") if line else "stop"
            if word in ("same", "different"):
                made.append((i, decisions.decide(db, pairs[i].a.entry, pairs[i].b.entry, word, who=who, why=options.why)))
                out.text(f"  settled as {word}\n")
                i += 1
            elif word == "skip":
                i += 1
            elif word == "undo" and made:
                i, last = made.pop()
                decisions.undo(db, last)
                out.text("  taken back\n")
            elif word == "stop":
                out.text("\n")
                return len(made)
            else:
                out.text("  nothing to undo\n" if word == "undo" else f"  {line.strip()[:40]!r} is none of the keys\n")
                continue
            break
    return len(made)


def _shown(pair: Pair, at: int, of: int, width: int) -> str:
    from ...report.numbers import number, p_value, when
    from ...report.plain import plain

    score = "never compared" if pair.score is None else f"probability {p_value(pair.score)}"
    lines = ["", "─" * width, f"pair {at + 1} of {of} · {score} · {pair.state}"]
    for side in (pair.a, pair.b):
        lines += [f"  {plain(side.title, 300)}", f"    {plain(side.source)}, row {side.row}: {plain(side.date_text or '', 100)}  →  {when(side.earliest)} to {when(side.latest)}, best {when(side.best)}"]
        extra = [plain(t, 200) for t in (side.category, side.note) if t]
        if extra:
            lines.append(f"    {' · '.join(extra)}")
    parts = [f"{name.replace('_', ' ')} {number(value, 3)}" for name, value in pair.parts.items() if value is not None]
    if parts:
        lines.append("  " + " · ".join(parts))
    return "\n".join(lines) + "\n"


COMMAND = Command(
    name="review",
    about="Settle doubtful pairs, one at a time: both rows, both date texts, and the parts of the score. A decision is stored at once with who, when and why,\n"
    "and survives reloading. For a spreadsheet: links --state review --format csv > FILE.csv, fill in same or different, review FILE.csv.",
    example="chronos-acc review --list",
    arguments=_arguments,
    run=_run,
)
