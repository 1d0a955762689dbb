# SPDX-License-Identifier: Apache-2.0
"""Names that columns go by, and which row of a file holds them: the first, or one that stands below a heading."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence

from .sheets import COLUMNS, match_columns

LOOK = 10  # rows among which the names of the columns are looked for
HEADERS: Mapping[str, tuple[str, ...]] = {
    "title": ("title", "event", "milestone", "name", "what", "headline", "label", "description", "entry", "item"),
    "date": ("date", "year", "when", "time", "age", "dated", "years ago", "date text", "ma", "ka", "bp"),
    "unit": ("unit", "units", "time unit", "era"),
    "sigma": ("sigma", "sigmas", "sigma level"),
    "plus_minus": ("plus_minus", "plus minus", "±", "+/-", "error", "uncertainty", "sd", "std", "err"),
    "earliest": ("earliest", "from", "start", "not before", "begin", "lower", "oldest"),
    "latest": ("latest", "to", "end", "until", "not after", "upper", "youngest"),
    "category": ("category", "field", "kind", "type", "domain", "class", "subject"),
    "importance": ("importance", "weight", "rank", "score", "rating", "significance"),
    "level": ("level", "granularity", "depth"),
    "parent": ("parent", "part of", "belongs to"),
    "note": ("note", "notes", "comment", "comments", "remark", "remarks"),
}
_BRACKETS = re.compile(r"\([^()]*\)|\[[^\[\]]*\]")


def plain(name: str) -> str:
    """A header without letter case, underscores and hyphens."""
    return " ".join(name.casefold().replace("_", " ").replace("-", " ").split())


_KEYS = {plain(word): key for key in COLUMNS for word in HEADERS[key]}


def header_at(rows: Sequence[Sequence[str]], columns: Mapping[str, str]) -> int:
    """The position of the row that names the columns: 0, unless the first names none and one of the next names title and date.

    ``rows`` are the cells of the first rows that are not empty, ``columns`` the names that the list's sheet gives.
    """
    if not rows or _named(rows[0], columns):
        return 0
    for place, row in enumerate(rows[1:LOOK], 1):
        found = _named(row, columns)
        if "title" in found and ("date" in found or {"earliest", "latest"} <= found):
            return place
    return 0


def _named(row: Sequence[str], columns: Mapping[str, str]) -> set[str]:
    """The columns that a row names, by the sheet or by a usual name; what stands in brackets, such as a unit, does not count."""
    usual = (_KEYS.get(plain(_BRACKETS.sub(" ", cell))) for cell in row)
    return {*match_columns(row, columns), *(key for key in usual if key is not None)}


def said(unit: str, row: int, above: int) -> str:
    """The remark on a header that was found below ``above`` rows."""
    what = "the line above it is no row" if above == 1 else f"the {above} lines above it are no rows"
    return f"the header was found in {unit} {row}; {what}"
