# SPDX-License-Identifier: Apache-2.0
"""Excel: the first worksheet of a workbook that has cells. Needs openpyxl, the extra ``excel``."""

from __future__ import annotations

import datetime as dt
import json
import warnings
from collections.abc import Iterator
from functools import partial
from pathlib import Path
from typing import Any

from ...errors import ListRefused
from ..headers import LOOK, said
from ..table import Asked, Format, Line, Table, clip, plain_number, trouble


def text_of_cell(value: Any) -> str | None:
    """A cell as a text: whole numbers without a point, a time at midnight as the day."""
    if value is None:
        return None
    if isinstance(value, str):
        return value
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int):
        return str(value)
    if isinstance(value, float):
        return plain_number(value)
    if isinstance(value, dt.datetime):
        midnight = value.time() == dt.time()
        return value.date().isoformat() if midnight else value.isoformat(timespec="seconds")
    if isinstance(value, dt.date):
        return value.isoformat()
    return str(value)


def _lines(rows: list[tuple[int, list[str | None]]], width: int, used: frozenset[int], kept: frozenset[int]) -> Iterator[Line]:
    for row, cells in rows:
        padded = (cells + [None] * (width - len(cells)))[:width]
        raw = json.dumps(cells, ensure_ascii=False)
        beyond = any(cell is not None and cell.strip() for cell in cells[width:])
        reason = f"the row has cells beyond the {width} columns of the header" if beyond else trouble(padded)
        yield Line(row, clip(raw) if reason else raw, None if reason else padded, reason)


def _rows(worksheet: Any) -> list[tuple[int, list[str | None]]]:
    """(row number, cells) of each row that has a cell; cells empty at its end are left off."""
    rows = []
    for number, values in enumerate(worksheet.iter_rows(values_only=True), 1):
        cells = [text_of_cell(value) for value in values]
        while cells and (cells[-1] is None or not cells[-1].strip()):
            cells.pop()
        if cells:
            rows.append((number, cells))
    return rows


def read(path: Path, asked: Asked) -> Table:
    """The list in a workbook. Raises ListRefused."""
    try:
        import openpyxl
    except ImportError:
        raise ListRefused(f"{asked.name}: reading Excel needs openpyxl; install it with: pip install 'chronos-acc[excel]'") from None
    rows: list[tuple[int, list[str | None]]] = []
    used, unread = "", []
    try:
        with warnings.catch_warnings(), path.open("rb") as file:
            warnings.simplefilter("ignore")
            book = openpyxl.load_workbook(file, read_only=True, data_only=True)
            for worksheet in book.worksheets:
                worksheet.reset_dimensions()  # some programs write a wrong size into the file
                if rows:
                    unread.append(worksheet.title)
                else:
                    rows, used = _rows(worksheet), worksheet.title
            book.close()
    except Exception as error:  # a damaged workbook fails in as many ways as there are parts in it
        told = " ".join(str(error).split())[:120] or type(error).__name__
        raise ListRefused(f"{asked.name}: no workbook that can be read ({told}); save it again as .xlsx, or as CSV") from None
    if not rows:
        raise ListRefused(f"{asked.name}: the workbook is empty; a list has a header row and one row for each event")
    place = asked.header_at([[(cell or "").strip() for cell in cells] for _, cells in rows[:LOOK]])
    number, cells = rows[place]
    header = tuple((cell or "").strip() for cell in cells)
    notes = [f"worksheet {used!r} was read; not read: {', '.join(map(repr, unread))}"] if unread else []
    if place:
        notes.append(said("row", number, place))
    return Table(header, partial(_lines, rows[place + 1 :], len(header)), unit="row", encoding="", notes=tuple(notes))


FORMAT = Format("excel", (".xlsx", ".xlsm"), "the first worksheet with cells; needs the extra excel", read)
