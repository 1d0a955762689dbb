# SPDX-License-Identifier: Apache-2.0
"""NDJSON: one object a line."""

from __future__ import annotations

from collections.abc import Iterator
from functools import partial
from pathlib import Path
from typing import Any

from ...errors import ListRefused
from ..objects import header_of, line_of, parse
from ..table import Asked, Format, Line, Table, clip
from ..text import Text, text_of


class _Bad(str):
    """Why a line is no JSON."""


def _parsed(text: Text) -> Iterator[tuple[int, str, Any]]:
    for row, raw in enumerate(text.lines, 1):
        if not raw.strip():
            continue
        fault = text.fault(raw)
        try:
            yield row, raw, _Bad(fault) if fault else parse(raw)
        except ValueError as error:
            yield row, raw, _Bad(f"no sound JSON: {error}")


def _lines(text: Text, header: tuple[str, ...], used: frozenset[int], kept: frozenset[int]) -> Iterator[Line]:
    for row, raw, item in _parsed(text):
        yield Line(row, clip(raw), None, str(item)) if isinstance(item, _Bad) else line_of(row, item, header, used, kept, raw)


def read(path: Path, asked: Asked) -> Table:
    """The list in a file of JSON lines. Raises ListRefused."""
    text = text_of(path, asked)
    header = header_of(item for _, _, item in _parsed(text))
    if not any(line.strip() for line in text.lines):
        raise ListRefused(f"{asked.name}: the file is empty; each line of a list in NDJSON is an object with title and date")
    return Table(header, partial(_lines, text, header), encoding=text.encoding)


FORMAT = Format("ndjson", (".ndjson", ".jsonl"), "one JSON object a line", read)
