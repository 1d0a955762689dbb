# SPDX-License-Identifier: Apache-2.0
"""A plot area of character cells: shades behind, fine strokes in braille dots over them, glyphs and words on top."""

from __future__ import annotations

import math
from collections.abc import Iterator

# Dots of a braille cell, two across and four down, as bits of U+2800 (Unicode, chapter 21.1)
_BITS = ((0x01, 0x08), (0x02, 0x10), (0x04, 0x20), (0x40, 0x80))
SHADES = "░▒▓"
_PLAIN = {
    **dict(zip("░▒▓█●○◆◇▲△■□·", ".:##*o*<A^##.", strict=True)),
    **dict(zip("─│┼├┤┬┴└┘┌┐╭╮╰╯┊┄┃━╌▸–−×…", "-|+++++++++++++:-|=->--x.", strict=True)),
    **dict(zip("⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "-0123456789", strict=True)),
}
# how many dots of a stroke are drawn and left out, in turn
PATTERNS: tuple[tuple[int, int], ...] = ((1, 0), (4, 3), (1, 2), (7, 2))


class Canvas:
    """``columns`` by ``rows`` cells; positions are shares of the area, (0, 0) at the lower left."""

    def __init__(self, columns: int, rows: int) -> None:
        self.columns, self.rows = columns, rows
        self._shade = [[0] * columns for _ in range(rows)]
        self._dots = [[0] * columns for _ in range(rows)]
        self._dot_ink = [[""] * columns for _ in range(rows)]
        self._glyph = [[""] * columns for _ in range(rows)]
        self._ink = [[""] * columns for _ in range(rows)]

    def column(self, x: float) -> int:
        """Cell column of a share; those a hair outside are pulled in."""
        return min(max(math.floor(x * self.columns), 0), self.columns - 1)

    def row(self, y: float) -> int:
        """Cell row of a share, counted from the top."""
        return min(max(math.floor((1 - y) * self.rows + 1e-9), 0), self.rows - 1)

    def shade(self, column: int, low: float, high: float, depth: int) -> None:
        """Shade a column of cells between two shares of the height; ``depth`` is a bit, so that two bands show where they overlap."""
        low, high = max(min(low, high), 0.0), min(max(low, high), 1.0)
        if high < low:
            return
        for row in range(self.row(high), self.row(max(low - 1e-12, 0.0)) + 1):
            self._shade[row][column] |= depth

    def stroke(self, points: list[tuple[float, float]], ink: str, pattern: int = 0, heavy: bool = False) -> None:
        """A line through shares, dot by dot, in one of PATTERNS, two dots thick where ``heavy``; parts outside the area are left out."""
        drawn, gap = PATTERNS[pattern % len(PATTERNS)]
        step = 0
        for (x0, y0), (x1, y1) in zip(points, points[1:], strict=False):
            if not all(map(math.isfinite, (x0, y0, x1, y1))):
                continue
            across, up = (x1 - x0) * self.columns * 2, (y1 - y0) * self.rows * 4
            steep = abs(up) > abs(across)
            aside, below = (1 / (self.columns * 2), 0.0) if steep else (0.0, 1 / (self.rows * 4))
            length = min(max(1, math.ceil(max(abs(across), abs(up)))), 20_000)
            for k in range(length):
                if step % (drawn + gap) < drawn:
                    x, y = x0 + (x1 - x0) * k / length, y0 + (y1 - y0) * k / length
                    self._dot(x, y, ink)
                    if heavy:
                        self._dot(x + aside, y - below, ink)
                step += 1

    def _dot(self, x: float, y: float, ink: str) -> None:
        if not (0 <= x <= 1 and 0 <= y <= 1):
            return
        i = min(int(x * self.columns * 2), self.columns * 2 - 1)
        j = min(int((1 - y) * self.rows * 4), self.rows * 4 - 1)
        self._dots[j // 4][i // 2] |= _BITS[j % 4][i % 2]
        self._dot_ink[j // 4][i // 2] = ink

    def bar(self, x0: float, x1: float, y0: float, y1: float, ink: str) -> None:
        """A thin level or upright bar from one share to another, drawn below glyphs."""
        level = y0 == y1
        x0, x1, y0, y1 = (min(max(v, 0.0), 1.0) for v in (min(x0, x1), max(x0, x1), min(y0, y1), max(y0, y1)))
        for row in range(self.row(y1), self.row(y0) + 1):
            for column in range(self.column(x0), self.column(x1) + 1):
                here = self._glyph[row][column]
                if here in ("", "─", "│", "┼", "┊", "┄"):
                    mine = "─" if level else "│"
                    self._glyph[row][column] = mine if here in ("", mine, "┊", "┄") else "┼"
                    self._ink[row][column] = ink

    def glyph(self, x: float, y: float, mark: str, ink: str) -> None:
        """One character at a share; nothing where it lies outside."""
        if 0 <= x <= 1 and 0 <= y <= 1:
            row, column = self.row(y), self.column(x)
            self._glyph[row][column], self._ink[row][column] = mark, ink

    def at(self, x: float, y: float) -> str:
        """The glyph that stands at a share, or an empty text."""
        return self._glyph[self.row(y)][self.column(x)]

    def words(self, row: int, column: int, text: str, ink: str) -> bool:
        """Text from a cell on, where all of it fits and no glyph stands; says whether it was written."""
        if not (0 <= row < self.rows and 0 <= column and column + len(text) <= self.columns):
            return False
        if any(self._glyph[row][column + k] for k in range(len(text))):
            return False
        for k, ch in enumerate(text):
            self._glyph[row][column + k], self._ink[row][column + k] = ch, ink
        return True

    def lines(self) -> Iterator[list[tuple[str, str]]]:
        """Rows from the top, each a list of (character, ink)."""
        for r in range(self.rows):
            row = []
            for c in range(self.columns):
                if self._glyph[r][c]:
                    row.append((self._glyph[r][c], self._ink[r][c]))
                elif self._dots[r][c]:
                    row.append((chr(0x2800 + self._dots[r][c]), self._dot_ink[r][c]))
                elif self._shade[r][c]:
                    row.append((SHADES[min(self._shade[r][c], 3) - 1], "null"))
                else:
                    row.append((" ", ""))
            yield row


def to_ascii(text: str) -> str:
    """The same drawing for a terminal that knows ASCII only."""
    out = []
    for ch in text:
        if "\u2800" <= ch <= "\u28ff":
            count = (ord(ch) - 0x2800).bit_count()
            out.append(" " if not count else "." if count < 3 else ":")
        elif ch.isascii():
            out.append(ch)
        else:
            out.append(_PLAIN.get(ch, "?"))
    return "".join(out)
