# SPDX-License-Identifier: Apache-2.0
"""What every format gives: a header, and rows of text that are all accounted for."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field
from pathlib import Path

RAW_LIMIT = 1_000_000  # characters of a refused row that are kept; a longer one is cut and says so


@dataclass(frozen=True, slots=True)
class Line:
    """One row of a list as it stands in the file.

    ``row`` is the number of the line on which it begins (delimited text, NDJSON; the first line is 1), the row of the worksheet (Excel), or
    the number of the record from 1 (JSON, Parquet). ``cells`` has one text or None for each column of the header; it is None where the
    row cannot be read, and ``reason`` then says why. ``rest`` is JSON for the columns that no other column holds, where the format has it.
    """

    row: int
    raw: str
    cells: Sequence[str | None] | None
    reason: str = ""
    rest: str | None = None


@dataclass(frozen=True)
class Fast:
    """A way for the database to read the whole file by itself.

    ``query`` gives the columns of the header in their order, as text, in the order of the file; its parameters are ``parameters``. The row
    number of the first row is ``first``. The file must give ``rows`` rows (None: any number), else it is read line by line instead.
    """

    query: str
    parameters: tuple[object, ...]
    first: int
    rows: int | None


@dataclass(frozen=True)
class Table:
    """A list as its format gives it.

    ``lines(used, kept)`` reads row by row: ``used`` are the positions of the columns that are understood, ``kept``
    those that go to ``rest``. ``raw(rows)`` gives the raw text of rows (sorted numbers) that the fast way has read. ``unit`` is what a row
    number counts, for messages.
    """

    header: tuple[str, ...]
    lines: Callable[[frozenset[int], frozenset[int]], Iterator[Line]]
    unit: str = "line"
    fast: Fast | None = None
    raw: Callable[[Sequence[int]], dict[int, str]] | None = None
    encoding: str = "utf-8"
    notes: tuple[str, ...] = field(default=())


@dataclass(frozen=True)
class Asked:
    """What a format needs to know: the encoding that was named, and how to tell that a header will do.

    ``fits(header)`` is the number of needed columns that it has (title and date: 2). ``name`` is how messages call the file.
    ``header_at(rows)`` is the position of the header among the first rows that are not empty: 0, or lower down below a heading.
    ``scratch`` is a folder for files that live only while the list is read.
    """

    name: str
    fits: Callable[[Sequence[str]], int]
    scratch: Path
    encoding: str | None = None
    header_at: Callable[[Sequence[Sequence[str]]], int] = field(default=lambda rows: 0)


def clip(raw: str) -> str:
    """A raw row as it is kept: NULs made visible, lone surrogates written as escapes, and cut where it is huge."""
    if len(raw) > RAW_LIMIT:
        raw = f"{raw[:RAW_LIMIT]}… ({len(raw):,} characters)"
    if "\0" in raw:
        raw = raw.replace("\0", "\\0")
    return raw if sound(raw) else raw.encode("utf-8", "backslashreplace").decode("utf-8")


def sound(text: str) -> bool:
    """Whether a text can be written as UTF-8."""
    if text.isascii():
        return True
    try:
        text.encode("utf-8")
    except UnicodeEncodeError:
        return False
    return True


def trouble(cells: Sequence[str | None]) -> str:
    """Why the text of a row cannot be kept, or nothing."""
    for cell in cells:
        if cell is None:
            continue
        if "\0" in cell:
            return "the row holds a NUL character; take it out, or mend the file"
        if not sound(cell):
            return "the row holds half of a surrogate pair, which is no character; mend the text"
    return ""


def quoted(name: str) -> str:
    """A text as an SQL literal."""
    return "'" + name.replace("'", "''") + "'"


def plain_number(value: float) -> str:
    """A float as people write it: whole numbers without a point, others in the shortest form that reads back."""
    return str(int(value)) if value == int(value) and abs(value) < 1e18 else repr(value)


@dataclass(frozen=True)
class Format:
    """A member of the family of formats: how lists of one kind of file are read.

    ``read(path, asked)`` gives the Table; it raises ListRefused where the file is none of this format.
    """

    name: str
    suffixes: tuple[str, ...]
    words: str
    read: Callable[[Path, Asked], Table]
