# SPDX-License-Identifier: Apache-2.0
"""What a bias check is: a question, what it needs, and a function that answers it with rows."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Any

from ..merge.entries import Decision, Entries
from ..progress import Tell, silent
from ..record import Record

COLUMNS = ("check", "setting", "n", "estimate", "null", "null_low", "null_median", "null_high", "p_value", "stands")


@dataclass(frozen=True)
class Row:
    """One setting of one check beside its own null. ``more`` holds the columns that only this check has."""

    check: str
    setting: float | str
    n: int
    estimate: float | None  # growth of the log-linear rate, per year
    null: str
    null_low: float | None
    null_median: float | None
    null_high: float | None
    p_value: float | None
    stands: str  # yes, too few, weaker, no
    more: dict[str, Any] = field(default_factory=dict)


@dataclass(frozen=True)
class Context:
    """What every check is given. ``entries`` and ``milestone`` (entry position -> milestone id) only where the caller has them."""

    record: Record
    seed: int = 1
    draws: int = 2000
    replicates: int = 1999
    entries: Entries | None = None
    milestone: Any = None
    exposure: Any = None
    tell: Tell = silent
    decisions: Sequence[Decision] = ()  # what a person settled about pairs, for the checks that merge anew


@dataclass(frozen=True)
class Answer:
    """Rows of one check, the sentence for the summary page, and remarks; a check that cannot run has no rows and says why in ``notes``."""

    rows: tuple[Row, ...] = ()
    summary: str = ""
    report: str = ""  # what to report in print
    notes: tuple[str, ...] = ()
    headline: int | None = None  # position of the row that speaks for the check on the summary page
    shown: Row | None = None  # what speaks for it instead, where that is no row of its table


@dataclass(frozen=True)
class Check:
    """A member of the family: ``run(context)`` gives the Answer; ``needs`` is said in words where it cannot run."""

    name: str
    question: str
    needs: str
    run: Callable[[Context], Answer]
