# SPDX-License-Identifier: Apache-2.0
"""chronos-acc sheet"""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

from ...errors import Refused
from ..registry import Command

if TYPE_CHECKING:
    from ..output import Output


def _arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", metavar="FILE", help="a list")
    parser.add_argument("--write", action="store_true", help="write it to FILE.toml beside the list instead of printing it; never over one that is there")


def _run(options: argparse.Namespace, out: Output) -> int:
    from ...store.propose import propose_sheet

    text = propose_sheet(Path(options.file))
    if not options.write:
        out.text(text)
        return 0
    target = Path(options.file).with_suffix(".toml")
    try:
        with target.open("x", encoding="utf-8") as file:
            file.write(text)
    except FileExistsError:
        raise Refused(f"{target} is there already and may hold your own words; move it away, or print the proposal without --write") from None
    out.remark(f"wrote {target}; fill in what its comments ask for, then: chronos-acc load {options.file}")
    return 0


COMMAND = Command(
    name="sheet",
    about="Propose a sheet for a list: which columns mean what, which notation its dates are in, and how many rows each choice would read.",
    example="chronos-acc sheet museum.csv --write",
    arguments=_arguments,
    run=_run,
)
