# SPDX-License-Identifier: Apache-2.0
"""What a table is before it is drawn: a frame, the question it answers, and its columns in order of importance."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from . import numbers

if TYPE_CHECKING:
    import pandas as pd

KINDS = {
    "text": None,
    "number": numbers.number,
    "count": numbers.count,
    "p": numbers.p_value,
    "share": numbers.share,
    "span": numbers.span,
    "when": numbers.when,
    "yes": numbers.truth,
    "bar": None,
    "right": None,  # text set to the right: numbers that are formatted already
}


@dataclass(frozen=True)
class Column:
    """A column as drawn. ``rank`` says when it goes if the screen is narrow: 0 never, 9 first."""

    key: str
    header: str
    kind: str = "text"
    rank: int = 0


@dataclass(frozen=True)
class Table:
    """A frame with its name, the question it answers in plain words, columns (None: taken from the frame), and remarks below it.

    ``screen`` is what a person reads where that differs from the data of ``frame`` (titles for ids, a bar): same rows.
    """

    name: str
    frame: pd.DataFrame
    question: str = ""
    columns: tuple[Column, ...] | None = None
    below: tuple[str, ...] = ()
    empty: str = "nothing to show"
    screen: pd.DataFrame | None = None
    aside: bool = False  # not on the page; printed when asked for by name

    @property
    def shown(self) -> pd.DataFrame:
        """The frame for reading."""
        return self.frame if self.screen is None else self.screen


@dataclass(frozen=True)
class Page:
    """What a command answers with: one JSON document, and tables of which ``main`` is printed where one must be chosen.

    ``lead`` stands before the tables and ``close`` after them, in terminal tables and Markdown only.
    """

    document: Any
    tables: tuple[Table, ...] = ()
    main: str = ""
    lead: tuple[str, ...] = ()
    close: tuple[str, ...] = ()
    headings: Mapping[str, str] = field(default_factory=dict)

    def chosen(self, name: str | None) -> Sequence[Table]:
        """All tables, or the one of that name; raises KeyError."""
        if name is None:
            return [t for t in self.tables if not t.aside]
        found = [t for t in self.tables if t.name == name]
        if not found:
            raise KeyError(name)
        return found

    def main_table(self) -> Table | None:
        """The table printed by one-table formats."""
        for table in self.tables:
            if table.name == self.main:
                return table
        return self.tables[0] if self.tables else None


def columns_of(frame: pd.DataFrame) -> tuple[Column, ...]:
    """Columns for a frame that nobody laid out: by type, all of one rank."""
    import pandas as pd

    out = []
    for key in frame.columns:
        kind = "text"
        if pd.api.types.is_bool_dtype(frame[key]):
            kind = "yes"
        elif pd.api.types.is_integer_dtype(frame[key]):
            kind = "text"
        elif pd.api.types.is_float_dtype(frame[key]):
            kind = "number"
        out.append(Column(str(key), str(key).replace("_", " "), kind))
    return tuple(out)
