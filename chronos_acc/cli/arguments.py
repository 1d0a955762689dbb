# SPDX-License-Identifier: Apache-2.0
"""The command line: options that every command shares, before or after its name, and a parser that answers in one line."""

from __future__ import annotations

import argparse
import math
import re
from collections.abc import Iterable
from typing import Any, NoReturn

from ..errors import WrongUse
from .registry import COMMANDS, GROUPS, Command, Entry

FORMATS = ("table", "json", "csv", "markdown", "latex")
DEFAULTS: dict[str, Any] = {
    "db": None, "format": "table", "seed": 1, "draws": 2000, "present": None, "start": None, "sources": None, "min_support": None,
    "category": None, "table": None, "quiet": False, "for_spreadsheet": False,
}  # fmt: skip


class Parser(argparse.ArgumentParser):
    """argparse that raises WrongUse, and takes -500 and -1e9 for values, not options."""

    def __init__(self, *args: Any, **kwargs: Any) -> None:
        kwargs.setdefault("allow_abbrev", False)
        kwargs.setdefault("formatter_class", argparse.RawDescriptionHelpFormatter)
        super().__init__(*args, **kwargs)
        self._negative_number_matcher = re.compile(r"^-[\d.]")

    def error(self, message: str) -> NoReturn:
        """One line instead of the usage block."""
        raise WrongUse(f"{message}; see {self.prog} --help")


def year(text: str) -> float:
    """A decimal year, astronomical and signed."""
    try:
        value = float(text.replace("−", "-"))
    except ValueError:
        value = math.nan
    if not math.isfinite(value) or "_" in text:
        raise argparse.ArgumentTypeError(f"{text!r} is not a year; give a number such as 2024, 1851.2 or -9999")
    return value


def whole(low: int, high: int) -> Any:
    """A type for whole numbers within bounds."""

    def read(text: str) -> int:
        try:
            value = int(text)
        except ValueError:
            value = low - 1
        if not low <= value <= high or "_" in text:
            raise argparse.ArgumentTypeError(f"{text!r} is not allowed; give a whole number from {low}" + (f" to {high}" if high < 10**9 else " on"))
        return value

    return read


def number(low: float, high: float) -> Any:
    """A type for numbers within bounds."""

    def read(text: str) -> float:
        try:
            value = float(text)
        except ValueError:
            value = math.nan
        if not low <= value <= high:
            raise argparse.ArgumentTypeError(f"{text!r} is not allowed; give a number from {low:g} to {high:g}")
        return value

    return read


def names(text: str) -> list[str]:
    """Names with commas between."""
    found = [part.strip() for part in text.split(",") if part.strip()]
    if not found:
        raise argparse.ArgumentTypeError("no name given; give names with commas between, as in A,B")
    return found


def shared_options(parser: argparse.ArgumentParser) -> None:
    """The options of every command. No defaults here, so that one given before the command's name is not overwritten after it."""
    group = parser.add_argument_group("everywhere")
    none = argparse.SUPPRESS
    group.add_argument("--db", metavar="PATH", default=none, help="the timeline file (else CHRONOS_ACC_DB, else timeline.duckdb here)")
    group.add_argument("--format", choices=FORMATS, default=none, help="how to print the result (table)")
    group.add_argument("--table", metavar="NAME", default=none, help="of several tables, print this one")
    group.add_argument("--for-spreadsheet", action="store_true", default=none, help="in csv, put an apostrophe before cells that a spreadsheet would run as formulas")
    group.add_argument("--seed", type=whole(0, 2**63 - 1), metavar="N", default=none, help="seed of all randomness (1)")
    group.add_argument("--draws", type=whole(0, 10_000_000), metavar="N", default=none, help="draws from the datings (2000)")
    group.add_argument("--quiet", action="store_true", default=none, help="no remarks, no progress")
    record = parser.add_argument_group("the record")
    record.add_argument("--present", type=year, metavar="YEAR", default=none, help="the year ages count back from; 2024 is its first instant")
    record.add_argument("--start", type=year, metavar="YEAR", default=none, help="watch from this year on (else the first milestone opens the window)")
    record.add_argument("--sources", type=names, metavar="A,B", default=none, help="these lists only")
    record.add_argument("--min-support", type=whole(1, 1_000_000), metavar="K", default=none, help="milestones that K independent lists name at least")
    record.add_argument("--category", metavar="C", default=none, help="milestones of this category only")


def program_parser() -> Parser:
    """The parser of the program: shared options, its own, and the rest left to the command."""
    parser = Parser(prog="chronos-acc", usage="chronos-acc [OPTIONS] COMMAND …", description=_overview(), add_help=True,
                    epilog="example:\n  chronos-acc demo\n\n'chronos-acc COMMAND --help' explains one command.")  # fmt: skip
    parser.add_argument("--version", action="store_true", help="print the version")
    parser.add_argument("--completion", choices=("bash", "zsh", "fish"), metavar="SHELL", help="print a completion script for bash, zsh or fish")
    parser.add_argument("--check-install", action="store_true", help="say what is installed and which extras are missing")
    shared_options(parser)
    return parser


def command_parser(entry: Entry, command: Command) -> Parser:
    """The parser of one command."""
    parser = Parser(prog=f"chronos-acc {entry.name}", description=command.about, epilog=f"example:\n  {command.example}")
    command.arguments(parser)
    shared_options(parser)
    return parser


def _overview() -> str:
    lines = ["Merge compilers' dated lists into one timeline and ask whether its milestones come faster and faster,",
             "beside what honest null models of the making of the lists give."]  # fmt: skip
    for key, title in GROUPS.items():
        lines += ["", f"{title}:"]
        lines += [f"  {c.name:<11} {c.summary}" for c in COMMANDS if c.group == key]
    return "\n".join(lines)


VALUED = frozenset({"--db", "--format", "--table", "--seed", "--draws", "--present", "--start", "--sources", "--min-support", "--category", "--completion"})


def split(argv: list[str]) -> tuple[list[str], str | None, list[str]]:
    """The program's part, the command's name, and the command's part of a command line."""
    i = 0
    while i < len(argv):
        word = argv[i]
        if word == "--":
            return argv[:i], (argv[i + 1] if i + 1 < len(argv) else None), argv[i + 2 :]
        if not word.startswith("-") or word == "-":
            return argv[:i], word, argv[i + 1 :]
        i += 2 if word in VALUED else 1
    return argv, None, []


def with_defaults(*parts: argparse.Namespace | Iterable[tuple[str, Any]]) -> argparse.Namespace:
    """Defaults, overridden by what was given before the command's name, then after it."""
    values = dict(DEFAULTS)
    for part in parts:
        values.update(vars(part) if isinstance(part, argparse.Namespace) else dict(part))
    return argparse.Namespace(**values)
