# SPDX-License-Identifier: Apache-2.0
"""Frames as terminal tables. The only file that knows rich.

A narrow screen drops the columns of the highest rank, and says which, so that nothing is cut in the middle.
"""

from __future__ import annotations

import io
from collections.abc import Sequence
from typing import Any

from rich.box import Box
from rich.cells import cell_len
from rich.console import Console
from rich.padding import Padding
from rich.table import Table as Grid
from rich.text import Text

from . import numbers
from .plain import plain
from .tables import KINDS, Column, Page, Table, columns_of

# A rule under the header; nothing between columns but space.
_BOX = Box("    \n    \n ── \n    \n    \n    \n    \n    \n")
_GAP = 2
_TITLE_MIN, _TEXT_MIN, _CELL_LIMIT = 20, 14, 400


def draw(page: Page, width: int, colour: bool, only: str | None = None) -> str:
    """The whole page as text, ``width`` columns wide."""
    buffer = io.StringIO()
    console = Console(
        file=buffer, width=width, force_terminal=colour, no_color=not colour, color_system="standard" if colour else None,
        highlight=False, markup=False, emoji=False, legacy_windows=False,
    )  # fmt: skip
    tables = page.chosen(only)
    if only is None:
        for line in page.lead:
            console.print(Text(plain(line)))
    for i, table in enumerate(tables):
        if i or (only is None and page.lead):
            console.print()
        if table.name in page.headings and only is None:
            console.print(Text(page.headings[table.name].upper(), style="bold"))
            console.print()
        _draw_table(console, table, width)
    asides = [t.name for t in page.tables if t.aside]
    if only is None and asides:
        console.print()
        console.print(Text(f"more, by name: --table {' · '.join(asides)}", style="dim"))
    if only is None and page.close:
        console.print()
        for line in page.close:
            console.print(Text(plain(line)))
    return "\n".join(line.rstrip() for line in buffer.getvalue().splitlines()) + "\n"


def _draw_table(console: Console, table: Table, width: int) -> None:
    if table.question:
        console.print(Text("▸ ", style="bold cyan") + Text(plain(table.question), style="bold"))
    frame = table.shown
    if frame.empty:
        console.print(Padding(Text(table.empty, style="dim"), (0, 0, 0, 2)))
    else:
        columns, dropped, cells = fitting(table, width)
        grid = Grid(box=_BOX, show_edge=False, pad_edge=False, padding=(0, _GAP - 1, 0, 0), header_style="dim", expand=False)
        for c in columns:
            left = c.kind == "bar" or (c.kind == "text" and not _numeric(frame[c.key]))
            grid.add_column(Text(plain(c.header)), justify="left" if left else "right", overflow="fold", no_wrap=not left or c.kind == "bar",
                            min_width=_least(c, cells[c.key]))  # fmt: skip
        for i in range(len(frame)):
            grid.add_row(*(Text(cells[c.key][i]) for c in columns))
        console.print(grid)
        if dropped:
            names = ", ".join(plain(c.header) for c in dropped)
            console.print(Padding(Text(f"not shown at this width: {names}", style="dim"), (0, 0, 0, 1)))
    for line in table.below:
        console.print(Padding(Text(plain(line), style="dim"), (0, 0, 0, 1)))


def fitting(table: Table, width: int) -> tuple[tuple[Column, ...], list[Column], dict[str, list[str]]]:
    """The columns that fit into ``width`` characters, those that do not, and every cell as text by column."""
    columns = table.columns if table.columns is not None else columns_of(table.shown)
    columns = tuple(c for c in columns if c.key in table.shown.columns)
    cells = {c.key: _cells(table.shown[c.key].tolist(), c) for c in columns}
    return (*_fitting(columns, cells, width), cells)


def _cells(values: Sequence[Any], column: Column) -> list[str]:
    if column.kind == "bar":
        return _bars(values)
    form = KINDS[column.kind]
    if form is not None:
        return [form(v) if not isinstance(v, str) else plain(v, _CELL_LIMIT) for v in values]
    return ["" if numbers.is_missing(v) else plain(_text(v), _CELL_LIMIT) for v in values]


def _text(value: Any) -> str:
    if isinstance(value, bool):
        return numbers.truth(value)
    if isinstance(value, float):
        return str(int(value)) if value.is_integer() and abs(value) < 1e15 else numbers.number(value)
    if isinstance(value, list | tuple):
        return ", ".join(_text(v) for v in value)
    if isinstance(value, dict):
        return ", ".join(f"{k} {_text(v)}" for k, v in value.items())
    return str(value)


def _bars(values: Sequence[Any], cells: int = 12) -> list[str]:
    """Bars whose length is the logarithm of the value, so that shrinking over many decades shows."""
    import math

    known = [math.log10(float(v)) for v in values if not numbers.is_missing(v) and float(v) > 0]
    if not known:
        return [""] * len(values)
    low, high = min(known), max(known)
    reach = high - low or 1.0
    out = []
    for v in values:
        if numbers.is_missing(v) or float(v) <= 0:
            out.append("")
            continue
        eighths = 1 + round((cells * 8 - 1) * (math.log10(float(v)) - low) / reach)
        out.append("█" * (eighths // 8) + " ▏▎▍▌▋▊▉"[eighths % 8].strip())
    return out


def _numeric(series: Any) -> bool:
    return getattr(series.dtype, "kind", "O") in "iuf"


def _natural(column: Column, cells: Sequence[str]) -> int:
    return max([cell_len(plain(column.header)), *(cell_len(c) for c in cells)])


def _least(column: Column, cells: Sequence[str]) -> int:
    natural = _natural(column, cells)
    if column.kind != "text":
        return natural
    words = max((cell_len(w) for c in cells for w in c.split()), default=0)
    return min(natural, max(_TEXT_MIN if column.rank else _TITLE_MIN, min(words, 24)))


def _fitting(columns: tuple[Column, ...], cells: dict[str, list[str]], width: int) -> tuple[tuple[Column, ...], list[Column]]:
    kept, dropped = list(columns), []
    while len(kept) > 1 and sum(_least(c, cells[c.key]) + _GAP for c in kept) + 2 > width:
        worst = max(kept, key=lambda c: (c.rank, kept.index(c)))
        kept.remove(worst)
        dropped.append(worst)
    dropped.sort(key=columns.index)
    return tuple(kept), dropped
