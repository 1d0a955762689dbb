# SPDX-License-Identifier: Apache-2.0
"""Text that is safe to print: no control characters, escape sequences or direction overrides from anybody's list."""

from __future__ import annotations

import unicodedata

_DIRECTION = set("\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069\u200e\u200f\u061c")


def plain(text: object, limit: int | None = None) -> str:
    """Control characters become "·", line breaks and tabs a space; a text longer than ``limit`` is cut with the number of characters left out."""
    s = str(text)
    if limit is not None and len(s) > limit:
        s = f"{s[:limit]}… (+{len(s) - limit:,} characters)"
    if s.isprintable():
        return s
    out = []
    for ch in s:
        if ch in "\t\n\r\v\f\u2028\u2029":
            out.append(" ")
        elif ch in _DIRECTION:
            continue
        elif unicodedata.category(ch) in ("Cc", "Cs", "Co", "Cn"):
            out.append("·")
        else:
            out.append(ch)
    return "".join(out)
