# SPDX-License-Identifier: Apache-2.0
"""The commands by name: a static tuple, so that help costs no import of the command itself.

Named tuples rather than dataclasses, whose import alone would double the time of --help.
"""

from __future__ import annotations

import argparse
from collections.abc import Callable
from importlib import import_module
from typing import TYPE_CHECKING, NamedTuple

if TYPE_CHECKING:
    from .output import Output


class Entry(NamedTuple):
    """A command as the program's help lists it; its module is ``chronos_acc.cli.commands.<module>``."""

    name: str
    group: str
    summary: str
    module: str

    def load(self) -> Command:
        """The command itself."""
        return import_module(f".commands.{self.module}", __package__).COMMAND  # type: ignore[no-any-return]


class Command(NamedTuple):
    """What a command's file defines: its own arguments, an example that runs, and what it does.

    ``run`` returns the exit status; heavy imports happen inside it.
    """

    name: str
    about: str
    example: str
    arguments: Callable[[argparse.ArgumentParser], None]
    run: Callable[[argparse.Namespace, Output], int]


COMMANDS: tuple[Entry, ...] = (
    Entry("load", "lists", "read compilers' lists into the timeline, every row accounted for", "load"),
    Entry("unload", "lists", "take one list out of the timeline", "unload"),
    Entry("sheet", "lists", "write a first sheet for a list: its columns, notation and provenance", "sheet"),
    Entry("sources", "lists", "show the lists in the timeline and how their rows fared", "sources"),
    Entry("rejects", "lists", "show every refused row with its reason", "rejects"),
    Entry("date", "lists", "say how a date text is read", "date"),
    Entry("link", "merge", "find the entries of different lists that are the same milestone", "link"),
    Entry("links", "merge", "show every scored pair and its state", "links"),
    Entry("review", "merge", "settle doubtful pairs: same or different", "review"),
    Entry("milestones", "merge", "show the merged milestones, or one with all its entries", "milestones"),
    Entry("intervals", "ask", "show the years from each milestone to the next", "intervals"),
    Entry("trend", "ask", "is it speeding up? tests, rate laws, regressions, each beside its nulls", "trend"),
    Entry("bias", "ask", "would the making of the lists produce this? one check a table", "bias"),
    Entry("grid", "ask", "every combination of defensible choices, and which choice matters most", "grid"),
    Entry("power", "ask", "what growth could a list of this size show?", "power"),
    Entry("query", "ask", "run a named query, or one SELECT of your own", "query"),
    Entry("chart", "show", "draw a chart in the terminal, or to a figure file", "chart"),
    Entry("report", "show", "write the whole analysis as one document", "report"),
    Entry("export", "show", "write the timeline as a folder that loads again", "export"),
    Entry("demo", "show", "run the main job on the shipped, invented scenario", "demo"),
)

GROUPS = {"lists": "Lists", "merge": "Merging", "ask": "Questions", "show": "Showing"}


def find(name: str) -> Entry | None:
    """The command of that name."""
    return next((c for c in COMMANDS if c.name == name), None)
