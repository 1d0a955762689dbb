# SPDX-License-Identifier: Apache-2.0
"""The command line: ``main`` reads it, makes the one Output, and turns what was refused into one line and an exit status."""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Sequence

from .. import __version__
from ..errors import ChronosError, WrongUse
from .arguments import command_parser, program_parser, split, with_defaults
from .output import Output
from .registry import COMMANDS, find

DONE, REFUSED, WRONG_USE, INTERRUPTED = 0, 1, 2, 130


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command line; returns the exit status."""
    words = list(sys.argv[1:] if argv is None else argv)
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")  # a terminal that lacks a character shows "?", never a traceback
    out = Output(quiet="--quiet" in words)
    try:
        status = _run(words, out)
        sys.stdout.flush()
        return status
    except ChronosError as refused:
        out.error(_one_line(refused))
        return refused.exit_status
    except KeyboardInterrupt:
        out.error("interrupted; nothing half-done was kept")
        return INTERRUPTED
    except BrokenPipeError:
        # The reader of our output went away (head, a pager): the rest is not wanted. Python would complain again at exit.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return DONE
    except RecursionError:
        out.error("the input is nested too deeply to read; flatten it and try again")
        return REFUSED
    except MemoryError:
        out.error("not enough memory for this; choose fewer lists with --sources, or fewer --draws")
        return REFUSED
    except RuntimeError as fault:
        if "interrupted" not in str(fault).lower():
            raise
        out.error("interrupted; nothing half-done was kept")
        return INTERRUPTED
    except OSError as fault:
        out.error(f"{fault.strerror or fault}{f': {fault.filename}' if fault.filename else ''}; check the path, its permissions and the free space")
        return REFUSED
    except Exception as fault:
        if os.environ.get("CHRONOS_ACC_DEBUG"):
            raise
        out.error(f"a fault of chronos-acc itself: {type(fault).__name__}: {_one_line(fault)[:300]}; CHRONOS_ACC_DEBUG=1 shows where; please report it")
        return REFUSED


def _run(words: list[str], out: Output) -> int:
    before, name, after = split(words)
    if name == "help":
        before, name, after = [*before, "--help"] if not after else before, after[0] if after else None, ["--help"]
    try:
        options = program_parser().parse_args(before)
        if name is None:
            shared = with_defaults(options)
            out.format, out.table = shared.format, shared.table
            return _program(options, out)
        entry = find(name)
        if entry is None:
            import difflib

            near = difflib.get_close_matches(name, [c.name for c in COMMANDS], 1)
            hint = f"did you mean {near[0]}?" if near else "see chronos-acc --help"
            raise WrongUse(f"no command {name!r}; {hint}")
        command = entry.load()
        given = command_parser(entry, command).parse_args(after)
    except SystemExit as done:  # argparse printed help
        return int(done.code or 0)
    options = with_defaults(options, given)
    out.format, out.table, out.quiet, out.for_spreadsheet = options.format, options.table, options.quiet, options.for_spreadsheet
    return command.run(options, out)


def _program(options: argparse.Namespace, out: Output) -> int:
    if options.version:
        out.text(f"chronos-acc {__version__}\n")
    elif options.completion:
        from .completion import script

        out.text(script(options.completion))
    elif options.check_install:
        from .installed import check

        return check(out)
    else:
        program_parser().print_help(out.stdout)
        return WRONG_USE
    return DONE


def _one_line(refused: Exception) -> str:
    return " ".join(str(refused).split())
