# SPDX-License-Identifier: Apache-2.0
"""chronos-acc query"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from ...errors import WrongUse
from ..common import timeline
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("query", nargs="?", metavar="NAME|SELECT", help="a named query, or one SELECT of your own in quotes; nothing: list the named ones")
    parser.add_argument("--set", dest="settings", action="append", default=[], metavar="NAME=VALUE", help="a parameter of the query; may be given again")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...report.pages import query_page, queries_page
    from ...store.query import find, named, remarks, run

    if options.query is None:
        out.page(queries_page(named()))
        return 0
    settings: dict[str, str] = {}
    for pair in options.settings:
        name, sign, value = pair.partition("=")
        if not sign or not name.isidentifier():
            raise WrongUse(f"--set {pair!r} is not allowed; give NAME=VALUE, as in --set epoch=100")
        settings[name] = value
    known = find(options.query)
    for key in ("present", "start", "min_support", "category"):
        value = getattr(options, key)
        if value is None:
            continue
        if known is None or key in known.parameters:
            settings.setdefault(key, str(value))
        else:
            raise WrongUse(f"the query {known.name} takes no {key.replace('_', '-')}; its parameters are {', '.join(known.parameters) or 'none'}")
    frame = run(timeline(options), options.query, settings)
    for note in remarks(timeline(options)):
        out.remark(note)
    out.page(query_page(frame, known.question if known else ""))
    return 0


COMMAND = Command(
    name="query",
    about="Run a named query, or one SELECT of your own over the timeline's views (SHOW TABLES lists them). The file is opened for reading only;\n"
    "nothing else can be read or written from SQL. Without a name, the named queries are listed with their questions and parameters.",
    example="chronos-acc query \"SELECT title, best FROM milestones WHERE support >= 2 ORDER BY best\"",
    arguments=_arguments,
    run=_run,
)
