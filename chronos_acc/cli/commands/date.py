# SPDX-License-Identifier: Apache-2.0
"""chronos-acc date"""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING, Any

from ...errors import DateRefused
from ..arguments import whole
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("texts", nargs="+", metavar="TEXT", help="a date text, quoted if it has spaces")
    parser.add_argument("--compiled", type=whole(-10000, 9999), metavar="YEAR", help="the year from which 'ago' counts")
    parser.add_argument("--sheet", metavar="FILE.toml", help="read by the settings of this sheet")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...dating import read
    from ...dating.settings import Settings
    from ...report.pages import date_page

    settings = Settings(compiled=options.compiled)
    if options.sheet:
        from pathlib import Path

        from ...store.sheets import read_sheet

        sheet = Path(options.sheet)
        settings = read_sheet(sheet, stem=sheet.stem, compiled=options.compiled).settings
    rows: list[dict[str, Any]] = []
    for text in options.texts:
        try:
            r = read(text, settings)
            rows.append({"text": text, "notation": r.notation, "earliest": r.dating.earliest, "best": r.dating.best, "latest": r.dating.latest,
                         "shape": r.dating.shape, "words": r.words, "defaults": list(r.defaults), "remarks": list(r.remarks)})  # fmt: skip
        except DateRefused as refused:
            rows.append({"text": text, "error": " ".join(str(refused).split())})
    out.page(date_page(rows))
    return int(any("error" in row for row in rows))


COMMAND = Command(
    name="date",
    about="Say how date texts are read: notation, bounds and best value in decimal years (1 BCE is 0), the words behind them, and the defaults used.",
    example="chronos-acc date '450–400 BCE' '66.0 ± 0.05 Ma' 'c. 1850' --compiled 2019",
    arguments=_arguments,
    run=_run,
)
