# SPDX-License-Identifier: Apache-2.0
"""The records a grid asks: lists, support, importance, category and the dating where lists differ; and its combinations, spelled
out for one record.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import product
from typing import Any

import numpy as np
import numpy.typing as npt

from ...errors import WrongUse
from ...mixture import summary_of_parts
from ...record import Record, Window
from .choices import CHOICES, EACH_OUT, RATE_ENDS, Choices, Option
from .kernels import Frame

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.int64]
SUBSET = ("lists", "min_support", "min_importance", "category", "dates")  # what makes a record; the rest is how it is analysed
FEWEST_INTERVALS = 5
FEWEST_EVENTS = 5


@dataclass(frozen=True)
class Combination:
    """One combination: option of each choice, None where a choice does not apply to the response."""

    number: int
    options: Mapping[str, Option | None]
    own: bool = False

    @property
    def subset(self) -> tuple[Option | None, ...]:
        """What makes its record."""
        return tuple(self.options[k] for k in SUBSET)


@dataclass(frozen=True)
class Variant:
    """One record: its window and, for the joint test, the rank in the base window of each of its milestones (w,) and their age
    over the base age (w,).
    """

    record: Record
    window: Window
    rank: Ints
    stretch: Floats

    @property
    def floor(self) -> float:
        """Half the finest dating unit; a hair above zero where dates are exact."""
        return 0.5 * self.window.finest_unit if self.window.finest_unit > 0 else self.window.span * 1e-12

    def frame(self, young_end: Option | None) -> Frame:
        """How its rows are read."""
        w = self.window
        start = None if w.opened_by_milestone else w.start
        return Frame(start, None if young_end == "last" else w.present, w.opening, w.closing, self.floor)


def expanded(choices: Choices, record: Record) -> tuple[dict[str, tuple[Option, ...]], tuple[str, ...]]:
    """Options with words that stand for several spelled out for a record, and remarks on what does not apply to it."""
    options = dict(choices.options)
    notes = []
    lists: list[Option] = []
    for o in options["lists"]:
        if o == EACH_OUT:
            lists += [f"without {name}" for name in record.lists] if len(record.lists) > 1 else []
        elif o == "all" or (isinstance(o, str) and o.removeprefix("without ") in record.lists and len(record.lists) > 1):
            lists.append(o)
        else:
            raise WrongUse(
                f"choice lists: {o!r} is not possible; use 'all', {EACH_OUT!r}, or 'without NAME' with one of {', '.join(record.lists)}"
            )
    options["lists"] = tuple(dict.fromkeys(lists)) or ("all",)
    if len(record.lists) < 2:
        notes.append("one list only: no list is left out, and there is one way to date")
        options["dates"] = ("pooled",)
    known = sorted({c for c in record.category if c is not None})
    categories: list[Option] = []
    for o in options["category"]:
        if o == "each":
            categories += known
        elif o == "any" or o in known:
            categories.append(o)
        else:
            raise WrongUse(f"choice category: {o!r} is not in the record; it has {', '.join(known) or 'none'}")
    options["category"] = tuple(dict.fromkeys(categories)) or ("any",)
    return options, tuple(notes)


def combinations(options: Mapping[str, Sequence[Option]], own: Mapping[str, Option]) -> list[Combination]:
    """Every combination, response by response; a choice that does not apply to a response takes no part in it."""
    mine = {c.name: own.get(c.name, options[c.name][0]) for c in CHOICES}
    out: list[Combination] = []
    for response in options["response"]:
        names = [c.name for c in CHOICES if c.name != "response" and response in c.responses]
        levels = [_levels(n, response, options[n]) for n in names]
        for picked in product(*levels):
            chosen: dict[str, Option | None] = {c.name: None for c in CHOICES}
            chosen["response"] = response
            chosen.update(zip(names, picked, strict=True))
            is_own = response == mine["response"] and all(chosen[n] == _levels(n, response, [mine[n]])[0] for n in names)
            out.append(Combination(len(out) + 1, chosen, is_own))
    return out


def _levels(name: str, response: Option, options: Sequence[Option]) -> Sequence[Option]:
    if name == "young_end" and response == "rate":
        return tuple(o for o in options if o in RATE_ENDS) or ("open",)
    return options


def in_window(record: Record) -> Record:
    """Only the milestones inside the window, so that no variant brings others in."""
    keep = np.zeros(len(record), bool)
    keep[record.window.index] = True
    return record if keep.all() else record.only(keep=keep)


def variant(base: Record, options: Mapping[str, Option | None]) -> tuple[Variant | None, str]:
    """The record of a combination, or None and why it cannot be asked. ``base`` holds milestones of its window only."""
    record = base
    lists = options["lists"]
    if isinstance(lists, str) and lists != "all":
        gone = lists.removeprefix("without ")
        record = record.only(sources=[x for x in record.lists if x != gone])
    record = dated(record, str(options["dates"]))
    keep = np.ones(len(record), bool)
    support, importance, category = options["min_support"], options["min_importance"], options["category"]
    if isinstance(support, float):
        keep &= record.support >= support
    if isinstance(importance, float):
        with np.errstate(invalid="ignore"):
            keep &= record.importance >= importance
    if category != "any":
        keep &= np.array([c == category for c in record.category], dtype=bool)
    record = record.only(keep=keep) if not keep.all() else record
    window = record.window if len(record) else None
    if window is None or window.n < FEWEST_EVENTS or not window.span > 0:
        return None, f"{window.n if window else 0} counted milestones, {FEWEST_EVENTS} are needed"
    base_window = base.window
    place = {int(base.id[i]): k for k, i in enumerate(base_window.index)}
    ids = record.id[window.index]
    rank = np.array([place[int(i)] for i in ids], dtype=np.int64)
    base_age = np.maximum(base.present - base_window.times[rank], 1e-300)
    stretch = np.where(base.present > base_window.times[rank], (record.present - window.times) / base_age, 1.0)
    return Variant(record, window, rank, np.maximum(stretch, 0.0)), ""


def dated(record: Record, rule: str) -> Record:
    """Milestones at their pooled dating, or at the earliest or latest of their entries'."""
    if rule == "pooled":
        return record
    order = np.lexsort((record.mode if rule == "earliest" else -record.mode, record.owner))
    first = np.concatenate([[True], np.diff(record.owner[order]) > 0]) if len(order) else np.zeros(0, bool)
    pick = order[first]
    points = [
        summary_of_parts(np.ones(1), record.kind[p : p + 1], record.low[p : p + 1], record.mode[p : p + 1], record.high[p : p + 1])
        for p in pick
    ]
    best, earliest, latest, unit, sd = (np.array(c, dtype=float) for c in zip(*points, strict=True)) if points else (np.zeros(0),) * 5
    return replace(
        record,
        best=best,
        earliest=earliest,
        latest=latest,
        unit=unit,
        sd=sd,
        owner=record.owner[pick],
        source=record.source[pick],
        weight=np.ones(len(pick)),
        kind=record.kind[pick],
        low=record.low[pick],
        mode=record.mode[pick],
        high=record.high[pick],
    )


def words(options: Mapping[str, Option | None]) -> str:
    """A combination in words."""
    return ", ".join(
        f"{k.replace('_', ' ')} {v:g}" if isinstance(v, float) else f"{k.replace('_', ' ')} {v}"
        for k, v in options.items()
        if v is not None
    )


def question_of(options: Mapping[str, Any]) -> tuple[Option | None, ...]:
    """What a combination asks: its options of the choices that change the question."""
    return tuple(options[c.name] for c in CHOICES if c.group == "question")
