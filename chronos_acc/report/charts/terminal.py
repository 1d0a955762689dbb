# SPDX-License-Identifier: Apache-2.0
"""A chart in a terminal: characters only, readable without colour, in a pipe and at any width from about 40 columns."""

from __future__ import annotations

import math
import textwrap
import unicodedata
from collections.abc import Iterable

from ..plain import plain
from .canvas import SHADES, Canvas, to_ascii
from .data import Axis, ChartData, Panel, Series
from .ticks import ticks

_GLYPHS = {"data": "●▲■◆", "open": "◇", "mark": "◆", "law": "○", "null": "×", "faint": "·"}
_STROKES = ("──", "╌╌", "┄┄", "─╌")
_SGR = {
    "data": "1", "open": "1;33", "null": "2", "faint": "2", "mark": "1;31", "axis": "2", "title": "1",
    "law0": "36", "law1": "35", "law2": "33", "law3": "34",
}  # fmt: skip
_CROWD = "·░▒▓█"
_LEAST_ROWS = 8


def to_terminal(data: ChartData, width: int = 80, height: int = 24, colour: bool = False, ascii_only: bool = False) -> str:
    """The chart as lines of text, at most ``width`` columns wide and, where its panels allow, ``height`` lines high.

    ``colour`` adds ANSI colours (nothing is said by colour alone); ``ascii_only`` keeps to ASCII.
    """
    width = max(width, 40)
    head = [[(line, "title")] for line in _wrap(f"▸ {data.question}", width)]
    key = _legend(data, width)
    foot = [[(line, "axis")] for text in (data.reading, *data.notes) if text for line in _wrap(text, width)]
    over = len(head) + len(key) + len(foot) + 3 + len(data.panels)  # axis, its labels and title; a title line a panel
    margin = max(max((_cells(t) for _, t in _marks(p.y, 99, width)), default=0) for p in data.panels)
    columns = width - margin - 2
    body: list[list[tuple[str, str]]] = []
    for panel, rows in zip(data.panels, _share_rows(data.panels, max(height - over, _LEAST_ROWS)), strict=True):
        body.append([(_cut(plain(panel.y.title), width), "axis")])
        body += _draw(data.x, panel, columns, rows, margin, width)
    lines = [*head, *body, *_bottom(data.x, columns, margin), *key, *foot]
    return "".join(_line(line, colour, ascii_only) + "\n" for line in lines)


def _share_rows(panels: tuple[Panel, ...], rows: int) -> list[int]:
    """Rows of each panel: names have one each and no more than two; the rest is shared."""
    named = [len(p.y.names) for p in panels]
    free = max(rows - sum(named), _LEAST_ROWS)
    weight = sum(p.share for p in panels if not p.y.names) or 1.0
    if all(named):
        return [n * (2 if rows >= 2 * sum(named) else 1) for n in named]
    return [n or max(4, round(free * p.share / weight)) for n, p in zip(named, panels, strict=True)]


def _marks(axis: Axis, rows: int, width: int) -> list[tuple[float, str]]:
    most = max(3, min(round(rows / 2.5), 8))
    return [(v, _cut(plain(t), max(width // 3, 8))) for v, t in ticks(axis, most)]


def _height(axis: Axis, value: float) -> float:
    """Place on an upright axis; names stand in the middle of their rows, the first on top."""
    return 1 - (value + 0.5) / len(axis.names) if axis.names else axis.place(value)


def _along(axis: Axis, value: float) -> float:
    return (value + 0.5) / len(axis.names) if axis.names else axis.place(value)


def _draw(x: Axis, panel: Panel, columns: int, rows: int, margin: int, width: int) -> list[list[tuple[str, str]]]:
    canvas = Canvas(columns, rows)
    bands = laws = dots = 0
    for s in panel.series:
        if s.mark == "band":
            _band(canvas, x, panel.y, s, bands)
            bands += 1
    for s in panel.series:
        if s.mark in ("line", "steps"):
            _stroke(canvas, x, panel.y, s, *_style(panel, s, laws))
            laws += s.role == "law"
        elif s.mark == "rule":
            _rule(canvas, x, panel.y, s)
    for s in panel.series:
        if s.mark == "dots":
            _dots(canvas, x, panel.y, s, dots)
            dots += s.role == "data"
        elif s.mark == "ticks":
            _ticks(canvas, x, panel.y, s)
    at = {canvas.row(_height(panel.y, v)): t for v, t in _marks(panel.y, rows, width) if 0 <= _height(panel.y, v) <= 1}
    out = []
    for row, cells in enumerate(canvas.lines()):
        label = at.get(row, "")
        out.append([(" " * (margin - _cells(label)) + label, "axis"), (" ┤" if label else " │", "axis"), *cells])
    return out


def _style(panel: Panel, s: Series, laws: int) -> tuple[str, int]:
    """Ink and pattern of a line: the data's own line is the solid one, laws beside it are broken."""
    if s.role != "law":
        return s.role, 0
    beside = any(t.mark in ("line", "steps") and t.role == "data" for t in panel.series)
    return f"law{laws % 4}", (laws + beside) % 4


def _band(canvas: Canvas, x: Axis, y: Axis, s: Series, index: int) -> None:
    points = sorted((_along(x, a), _height(y, b), _height(y, c)) for a, b, c in zip(s.x, s.y_low, s.y_high, strict=True))
    for (x0, a0, b0), (x1, a1, b1) in zip(points, points[1:], strict=False):
        if not all(map(math.isfinite, (x0, x1, a0, a1, b0, b1))):
            continue
        first, last = math.ceil(x0 * canvas.columns - 0.5), math.floor(x1 * canvas.columns - 0.5)
        for column in range(max(first, 0), min(last, canvas.columns - 1) + 1):
            t = ((column + 0.5) / canvas.columns - x0) / (x1 - x0) if x1 > x0 else 0.5
            canvas.shade(column, a0 + (a1 - a0) * t, b0 + (b1 - b0) * t, 1 << min(index, 1))


def _stroke(canvas: Canvas, x: Axis, y: Axis, s: Series, ink: str, pattern: int) -> None:
    points = [(_along(x, a), _height(y, b)) for a, b in zip(s.x, s.y, strict=True)]
    if s.mark == "steps":
        points = [q for (a, b), (c, d) in zip(points, points[1:], strict=False) for q in ((a, b), (c, b), (c, d))] or points
    canvas.stroke(points, ink, pattern, heavy=s.role == "data")


def _rule(canvas: Canvas, x: Axis, y: Axis, s: Series) -> None:
    for i in range(len(s)):
        place = _along(x, s.x[i]) if s.x else _height(y, s.y[i])
        if not 0 <= place <= 1:
            continue
        label = plain(s.label[i]) if s.label else ""
        if s.x:
            for row in range(canvas.rows):
                canvas.glyph(place, 1 - (row + 0.5) / canvas.rows, "┊", s.role)
            column = canvas.column(place)
            row = next((r for r in range(canvas.rows) if canvas.words(r, column + 2, label, s.role)), -1)
            if row < 0:
                next((r for r in range(canvas.rows) if canvas.words(r, column - len(label) - 1, label, s.role)), -1)
        else:
            for column in range(canvas.columns):
                canvas.glyph((column + 0.5) / canvas.columns, place, "┄", s.role)
            canvas.words(max(canvas.row(place) - 1, 0), canvas.columns - len(label) - 1, label, s.role)


def _dots(canvas: Canvas, x: Axis, y: Axis, s: Series, index: int) -> None:
    for i in range(len(s)):
        a, b = _along(x, s.x[i]), _height(y, s.y[i])
        if s.x_low and math.isfinite(s.x_low[i]) and math.isfinite(s.x_high[i]):
            ends = [_clip(_along(x, v), a) for v in (s.x_low[i], s.x_high[i])]
            if canvas.column(ends[0]) != canvas.column(ends[1]):
                canvas.bar(ends[0], ends[1], b, b, "faint")
        if s.y_low and math.isfinite(s.y_low[i]) and math.isfinite(s.y_high[i]):
            ends = [_clip(_height(y, v), 0.0) for v in (s.y_low[i], s.y_high[i])]
            if canvas.row(min(ends)) != canvas.row(max(ends)):
                canvas.bar(a, a, ends[0], ends[1], "faint")
    for i in range(len(s)):
        a, b = _along(x, s.x[i]), _height(y, s.y[i])
        if math.isfinite(a) and math.isfinite(b):
            own = s.label[i] if s.label and len(s.label[i]) == 1 and s.label[i].isprintable() else _glyph(s.role, index)
            canvas.glyph(a, b, own, s.role)


def _ticks(canvas: Canvas, x: Axis, y: Axis, s: Series) -> None:
    if len(s) > 2 * canvas.columns or (y.names and _ranks(x) > 3 * canvas.columns):
        _crowd(canvas, x, y, s)
        return
    for i in range(len(s)):
        a, b = _along(x, s.x[i]), _height(y, s.y[i])
        if s.x_low and math.isfinite(s.x_low[i]) and math.isfinite(s.x_high[i]):
            ends = [_clip(_along(x, v), a) for v in (s.x_low[i], s.x_high[i])]
            if canvas.column(ends[0]) != canvas.column(ends[1]):
                canvas.bar(ends[0], ends[1], b, b, "faint")
    for a, b in zip(s.x, s.y, strict=True):
        place = _along(x, a), _height(y, b)
        if all(map(math.isfinite, place)):
            canvas.glyph(*place, "┃" if canvas.at(*place) in ("│", "┃") else "│", s.role)


def _ranks(x: Axis) -> float:
    """How many whole numbers a linear axis counts."""
    return x.high - x.low if x.scale == "linear" else 0.0


def _crowd(canvas: Canvas, x: Axis, y: Axis, s: Series) -> None:
    """Ticks too many to part: each cell as dark as the share of its width that they fill."""
    count: dict[tuple[int, int], int] = {}
    for a, b in zip(s.x, s.y, strict=True):
        place = _along(x, a), _height(y, b)
        if all(map(math.isfinite, place)):
            at = canvas.row(place[1]), canvas.column(place[0])
            count[at] = count.get(at, 0) + 1
    # whole numbers along a linear axis fill a cell when each stands there; elsewhere the fullest cell is the measure
    full = (x.high - x.low) / canvas.columns if x.scale == "linear" else max(count.values(), default=1)
    for (row, column), k in count.items():
        mark = _CROWD[min(int(k / full * len(_CROWD)), len(_CROWD) - 1)]
        canvas.glyph((column + 0.5) / canvas.columns, 1 - (row + 0.5) / canvas.rows, mark, s.role)


def _clip(place: float, otherwise: float) -> float:
    return min(max(place, 0.0), 1.0) if math.isfinite(place) else otherwise


def _glyph(role: str, index: int) -> str:
    marks = _GLYPHS[role]
    return marks[index % len(marks)]


def _bottom(x: Axis, columns: int, margin: int) -> list[list[tuple[str, str]]]:
    """The axis with its ticks, their labels where there is room, and its title."""
    rule, labels = ["─"] * columns, [" "] * columns
    end = -1
    placed = sorted((_along(x, v), t) for v, t in ticks(x, max(2, columns // 11)))
    for place, label in placed:
        if not 0 <= place <= 1:
            continue
        column = min(max(math.floor(place * columns), 0), columns - 1)
        label = plain(label)
        first = min(max(column - len(label) // 2, 0), columns - len(label))
        if first <= end or first < 0:
            continue
        rule[column] = "┬"
        labels[first : first + len(label)] = label
        end = first + len(label)
    pad = " " * margin
    title = plain(x.title)
    return [
        [(f"{pad} └{''.join(rule)}", "axis")],
        [(f"{pad}  {''.join(labels)}", "axis")],
        [(_cut(title, columns + margin + 2).rjust(columns + margin + 2), "axis")],
    ]


def _legend(data: ChartData, width: int) -> list[list[tuple[str, str]]]:
    """What each mark stands for, as many as fit on a line."""
    items: list[tuple[str, str, str]] = []
    seen = set()
    for panel in data.panels:
        bands = laws = dots = 0
        for s in panel.series:
            mark, ink = "", str(s.role)
            if s.mark == "band":
                mark, bands = SHADES[min(bands, 1)] * 2, bands + 1
            elif s.mark in ("line", "steps"):
                ink, pattern = _style(panel, s, laws)
                mark = "━━" if s.role == "data" else _STROKES[pattern]
                laws += s.role == "law"
            elif s.mark == "dots":
                single = {t for t in s.label if len(t) == 1}
                mark = _glyph(s.role, dots) if not single else "".join(sorted(single)[:1]) + "…" if len(single) > 1 else single.pop()
                dots += s.role == "data"
            elif s.mark == "rule":
                mark = "┊" if s.x else "┄"
            elif s.mark == "ticks":
                mark = _CROWD[-1] if panel.y.names and _ranks(data.x) > 3 * width else "│"
            if s.name and s.name not in seen and len(s):
                seen.add(s.name)
                items.append((mark, plain(s.name), ink))
    if sum(s.mark == "band" for s in data.series) > 1:
        items.append((SHADES[2] * 2, "both bands", "null"))
    lines: list[list[tuple[str, str]]] = [[]]
    used = 0
    for mark, name, ink in items:
        size = len(mark) + 1 + _cells(name)
        if used and used + 3 + size > width:
            lines.append([])
            used = 0
        if used:
            lines[-1].append(("   ", ""))
        lines[-1] += [(mark, ink), (f" {_cut(name, width - len(mark) - 1)}", "")]
        used += size + (3 if used else 0)
    return [line for line in lines if line]


def _wrap(text: str, width: int) -> list[str]:
    return textwrap.wrap(plain(text), width, break_long_words=True) or [""]


def _cells(text: str) -> int:
    """Columns a text takes: wide East Asian characters two, combining marks none (Unicode Standard Annex 11)."""
    return sum(0 if unicodedata.combining(c) else 2 if unicodedata.east_asian_width(c) in "WF" else 1 for c in text)


def _cut(text: str, width: int) -> str:
    if _cells(text) <= width:
        return text
    out = ""
    for ch in text:
        if _cells(out + ch) > width - 1:
            break
        out += ch
    return out + "…"


def _line(pieces: Iterable[tuple[str, str]], colour: bool, ascii_only: bool) -> str:
    """One line: neighbouring pieces of one ink are written together, spaces at the end dropped."""
    runs: list[list[str]] = []
    for text, ink in pieces:
        if runs and runs[-1][1] == ink:
            runs[-1][0] += text
        else:
            runs.append([text, ink])
    while runs and not runs[-1][0].strip():
        runs.pop()
    if runs:
        runs[-1][0] = runs[-1][0].rstrip()
    if ascii_only:
        runs = [[to_ascii(text), ink] for text, ink in runs]
    if not colour:
        return "".join(text for text, _ in runs)
    return "".join(f"\x1b[{_SGR[ink]}m{text}\x1b[0m" if ink in _SGR and text.strip() else text for text, ink in runs)
