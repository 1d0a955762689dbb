# SPDX-License-Identifier: Apache-2.0
"""One policy for everything that is printed: payload to stdout, remarks to stderr, progress only to a terminal."""

from __future__ import annotations

import os
import sys
import time
from typing import TYPE_CHECKING, TextIO

if TYPE_CHECKING:
    from ..report.tables import Page

PIPE_WIDTH = 160  # no terminal: wide enough for every table of ours, so that nothing is dropped


class Output:
    """Where things go and how. Made once, in ``main``."""

    def __init__(self, *, quiet: bool = False, stdout: TextIO | None = None, stderr: TextIO | None = None) -> None:
        self.format = "table"
        self.table: str | None = None
        self.quiet = quiet
        self.for_spreadsheet = False
        self.stdout = stdout or sys.stdout
        self.stderr = stderr or sys.stderr
        self._begun = time.monotonic()
        self._shown = 0.0
        self._drawn = False

    @property
    def width(self) -> int:
        """Columns to draw in: COLUMNS, else the terminal's, else ``PIPE_WIDTH``."""
        given = os.environ.get("COLUMNS", "")
        if given.isdigit() and int(given) > 0:
            return max(int(given), 20)
        if self._is_terminal(self.stdout):
            import shutil

            return max(shutil.get_terminal_size((80, 24)).columns, 20)
        return PIPE_WIDTH

    @property
    def colour(self) -> bool:
        """Bold and dim on a terminal, unless NO_COLOR is set."""
        return self._is_terminal(self.stdout) and not os.environ.get("NO_COLOR") and os.environ.get("TERM") != "dumb"

    def page(self, page: Page) -> None:
        """Print a page in the chosen format."""
        from ..report.formats import write

        if self.format in ("csv", "markdown", "latex") and self.table is None and len(page.tables) > 1:
            main = page.main_table()
            rest = ", ".join(t.name for t in page.tables if main is not None and t.name != main.name)
            self.remark(f"this is the table {main.name if main is not None else ''}; the others by --table: {rest}; everything at once: --format json")
        self.text(write(page, form=self.format, only=self.table, width=self.width, colour=self.colour, for_spreadsheet=self.for_spreadsheet))

    def text(self, text: str) -> None:
        """Payload as it is."""
        self._clear()
        self.stdout.write(text)
        self.stdout.flush()

    def remark(self, text: str) -> None:
        """One line about the work, not part of the result."""
        if not self.quiet:
            self._line(text)

    def error(self, text: str) -> None:
        """One line for what went wrong; not silenced."""
        self._line(f"chronos-acc: {text}")

    def tell(self, what: str, share: float) -> None:
        """Progress: shown on a terminal once the work has taken two seconds, with the time left; nothing in a pipe."""
        if self.quiet or not self._is_terminal(self.stderr):
            return
        now = time.monotonic()
        if now - self._begun < 2 or now - self._shown < 0.1:
            return
        self._shown = now
        left = (now - self._begun) * (1 - share) / share if share > 0.02 else None
        tail = f", about {left:.0f} s left" if left is not None and share < 1 else ""
        self.stderr.write(f"\r\x1b[K{what}: {share:.0%}{tail}")
        self.stderr.flush()
        self._drawn = True

    def _line(self, text: str) -> None:
        from ..report.plain import plain

        self._clear()
        self.stderr.write(plain(text) + "\n")
        self.stderr.flush()

    def _clear(self) -> None:
        if self._drawn:
            self.stderr.write("\r\x1b[K")
            self._drawn = False

    @staticmethod
    def _is_terminal(stream: TextIO) -> bool:
        try:
            return stream.isatty()
        except ValueError:  # closed
            return False
