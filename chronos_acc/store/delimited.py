# SPDX-License-Identifier: Apache-2.0
"""Text with a delimiter: comma, tab, semicolon, bar. Two ways to read it, one meaning.

The database reads a well-formed file by itself. A file with anything out of the ordinary (a row too long or too short, a line break inside
quotes, blank lines, bytes that are no UTF-8, mixed line ends) is read line by line here, and every line is accounted for.

Rules (after RFC 4180): a field may stand in double quotes, inside which a doubled quote is one quote; spaces outside the quotes do not
count; a quote inside an unquoted field is an ordinary character. Blank lines are no rows. Cells beyond the header are let pass when they
are empty; any other row whose cells do not match the header is refused. A quote that is opened and never rightly closed spoils its own
line only.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import partial
from itertools import islice
from pathlib import Path

from ..errors import ListRefused
from .headers import LOOK, said
from .table import Asked, Fast, Line, Table, clip, trouble
from .text import Text, text_of

DELIMITERS = ",\t;|"
NAMES = {",": "comma", "\t": "tab", ";": "semicolon", "|": "bar"}
ROW_LIMIT = 2_097_152  # bytes or characters of one row
LINES_LIMIT = 10_000  # lines of one row
NEEDED = 2  # columns that a header must have, title and date: it has them where it was found below a heading


@dataclass(frozen=True)
class _Broken(Exception):
    """A row whose quotes do not close."""

    reason: str


class _Cutter:
    """Cuts a row into cells."""

    def __init__(self, delimiter: str) -> None:
        self.delimiter = delimiter
        d = re.escape(delimiter)
        self.quoted = re.compile(rf' *"((?:[^"]|"")*+)" *({d}|\Z)')
        self.opened = re.compile(r' *"(?:[^"]|"")*+\Z')
        self.opens = re.compile(rf'(?:^|{d}) *"')
        self.bare = re.compile(rf"([^{d}]*+)({d}|\Z)")

    def cut(self, text: str) -> list[str] | None:
        """The cells of a row; None where a quote is still open. Raises _Broken."""
        if '"' not in text or not self.opens.search(text):
            return text.split(self.delimiter)
        cells, at = [], 0
        while True:
            found = self.quoted.match(text, at)
            if found:
                cells.append(found[1].replace('""', '"'))
            else:
                quote = text[at:].lstrip(" ")[:1] == '"'
                if quote and self.opened.match(text, at):
                    return None
                if quote:
                    raise _Broken("a quoted field goes on after its closing quote; double the quotes inside it")
                found = self.bare.match(text, at)
                if found is None:  # pragma: no cover - the pattern matches anything
                    raise _Broken("the row cannot be cut into cells")
                cells.append(found[1])
            if not found[2]:
                return cells
            at = found.end()


def _records(lines: Sequence[str], cutter: _Cutter, begin: int) -> Iterator[tuple[int, str, list[str] | str]]:
    """(number of the first line, raw text, cells or the reason there are none) of every row from line ``begin`` (counted from 0)."""
    at, count = begin, len(lines)
    while at < count:
        raw = lines[at]
        if not raw.strip(" "):
            at += 1
            continue
        size, end, parts = len(raw), at + 1, [raw]
        cells: list[str] | str | None
        try:
            cells = cutter.cut(raw) if size <= ROW_LIMIT else f"the row has {size:,} characters; at most {ROW_LIMIT:,} are read"
            while cells is None:
                # Only a line with a quote can close the field, so the row is cut again at such lines alone.
                while end < count and '"' not in lines[end] and size <= ROW_LIMIT and end - at < LINES_LIMIT:
                    parts.append(lines[end])
                    size += len(lines[end]) + 1
                    end += 1
                if end >= count or size > ROW_LIMIT or end - at >= LINES_LIMIT:
                    raise _Broken("a quote is opened here and never closed")
                parts.append(lines[end])
                size += len(lines[end]) + 1
                end += 1
                cells = cutter.cut("\n".join(parts))
        except _Broken as broken:
            yield at + 1, raw, broken.reason
            at += 1
            continue
        yield at + 1, "\n".join(parts), cells
        at = end


def _lines(text: Text, cutter: _Cutter, width: int, begin: int, used: frozenset[int], kept: frozenset[int]) -> Iterator[Line]:
    for row, raw, cells in _records(text.lines, cutter, begin):
        reason = text.fault(raw)
        if not reason and isinstance(cells, str):
            reason = cells
        if reason or isinstance(cells, str):
            yield Line(row, clip(raw), None, reason)
            continue
        if len(cells) > width and not any(cell.strip() for cell in cells[width:]):
            del cells[width:]
        if len(cells) != width:
            reason = f"the row has {_cells(len(cells))}, the header {width}; check the delimiter and the quotes"
        else:
            reason = trouble(cells)
        yield Line(row, clip(raw) if reason else raw, None if reason else cells, reason)


def _cells(count: int) -> str:
    return "1 cell" if count == 1 else f"{count:,} cells"


def read(path: Path, asked: Asked, first: str = ",") -> Table:
    """The list in a delimited file; the header tells the delimiter. Raises ListRefused."""
    text = text_of(path, asked)
    begin = next((i for i, line in enumerate(text.head) if line.strip(" ")), None)
    if begin is None:
        raise ListRefused(f"{asked.name}: the file is empty; a list has a header row and one row for each event")
    best: tuple[int, int, list[str], _Cutter, int, str] | None = None
    for delimiter in sorted(DELIMITERS, key=lambda d: d != first):
        cutter = _Cutter(delimiter)
        rows = _first_rows(text.head, cutter, begin)
        place = asked.header_at([names for names, _, _ in rows]) if len(rows[0][0]) == 1 else 0
        names, row, after = rows[place]
        score = (NEEDED if place else asked.fits(names), len(names))
        if best is None or score > best[:2]:
            best = (*score, names, cutter, after, said("line", row, place) if place else "")
    if best is None:  # pragma: no cover - there are delimiters
        raise ListRefused(f"{asked.name}: no delimiter")
    names, cutter, after, found = best[2:]
    return Table(
        header=tuple(names),
        lines=partial(_lines, text, cutter, len(names), after),
        fast=_fast(text, cutter.delimiter, len(names), after),
        raw=text.raw_lines,
        encoding=text.encoding,
        notes=(*text.notes, found) if found else tuple(text.notes),
    )


def _first_rows(head: Sequence[str], cutter: _Cutter, begin: int) -> list[tuple[list[str], int, int]]:
    """The first rows as (cells without empty ones at the end, number of the first line, position of the line after it); at least one."""
    rows = []
    for row, raw, cells in islice(_records(head, cutter, begin), LOOK):
        broken = isinstance(cells, str)
        names = [clip(cell.strip()) for cell in (raw.split(cutter.delimiter) if broken else cells)]
        while len(names) > 1 and not names[-1]:
            names.pop()
        rows.append((names, row, row if broken else row + raw.count("\n")))
    return rows or [([], begin + 1, begin + 1)]


def _fast(text: Text, delimiter: str, width: int, after: int) -> Fast | None:
    """How the database reads the file; None where it is not plain enough to be trusted to it."""
    if not text.plain or after != 1:
        return None
    columns = ", ".join(f"'c{i}': 'VARCHAR'" for i in range(width))
    newline = "" if text.newline == "\r\n" else ", new_line = '\\n'"  # naming \r\n in strict mode makes DuckDB 2.0 find no row at all
    query = (
        f"SELECT * FROM read_csv(?, auto_detect = false, columns = {{{columns}}}, header = true, delim = '{delimiter}', quote = '\"', "
        f"escape = '\"', strict_mode = true, null_padding = false, nullstr = '', max_line_size = {ROW_LIMIT}{newline})"
    )
    return Fast(query, (str(text.path),), first=2, rows=text.count - 1)
