# SPDX-License-Identifier: Apache-2.0
"""How results show in a notebook: their tables, each under its name, after a sentence where there is one."""

from __future__ import annotations

import html
from typing import Any

MOST_ROWS = 60


class ShowsInNotebook:
    """Gives a result with ``tables()`` or ``to_frame()`` the ``_repr_html_`` that notebooks look for; numbers to six significant digits."""

    def _repr_html_(self) -> str:
        out = []
        for name in ("verdict", "sentence"):
            text = getattr(self, name, None)
            if isinstance(text, str):
                out.append(f"<p><strong>{html.escape(text)}</strong></p>")
        tables: dict[str, Any] = self.tables() if hasattr(self, "tables") else {"": self.to_frame()}  # type: ignore[attr-defined]
        for name, frame in tables.items():
            if not len(frame):
                continue
            if name:
                out.append(f"<p>{html.escape(name.replace('_', ' '))}</p>")
            out.append(frame.to_html(index=False, max_rows=MOST_ROWS, float_format=lambda x: f"{x:.6g}", na_rep="", border=0))
        return "\n".join(out)
