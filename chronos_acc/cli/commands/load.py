# SPDX-License-Identifier: Apache-2.0
"""chronos-acc load"""

from __future__ import annotations

import argparse
import sys
from typing import TYPE_CHECKING

from ...errors import ListRefused
from ..arguments import whole
from ..common import timeline
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("files", nargs="+", metavar="FILE", help="lists (CSV, TSV, JSON, NDJSON, Parquet, Excel, each also .gz), folders of lists, an exported timeline, or - for standard input")
    parser.add_argument("--compiled", type=whole(-10000, 9999), metavar="YEAR", help="the year the lists were compiled, where no sheet says so")
    parser.add_argument("--as", dest="as_format", metavar="FORMAT", help="the format, where the file's name does not tell: csv, tsv, json, ndjson, parquet, excel")
    parser.add_argument("--encoding", metavar="NAME", help="the files' character encoding, where it is not UTF-8")
    parser.add_argument("--strict", action="store_true", help="exit status 1 if any row was refused")
    parser.add_argument("--no-link", action="store_true", help="leave merging for later (a million rows); run chronos-acc link before any analysis")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...report.pages import load_page
    from ...store.load import load

    try:
        loaded = load(timeline(options), options.files, compiled=options.compiled, as_format=options.as_format, link=not options.no_link,
                      strict=options.strict, stdin=sys.stdin.buffer if "-" in options.files and sys.stdin is not None else None, encoding=options.encoding, tell=out.tell)  # fmt: skip
    except ListRefused as refused:
        if refused.loaded:  # one list was refused; what came of the others is said before
            out.page(load_page(refused.loaded))
        raise
    out.page(load_page(loaded))
    if any(l.rows_loaded == 0 for l in loaded):
        return 1
    return int(options.strict and any(l.rows_rejected for l in loaded))


COMMAND = Command(
    name="load",
    about="Read compilers' lists into the timeline. Every row is loaded or refused with its reason; a list goes in whole or not at all.\n"
    "A sheet (FILE.toml beside FILE.csv) says which columns mean what and how dates are written; without one the columns are title and date.",
    example="chronos-acc load museum.csv survey.csv",
    arguments=_arguments,
    run=_run,
)
