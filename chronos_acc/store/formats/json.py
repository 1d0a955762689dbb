# SPDX-License-Identifier: Apache-2.0
"""JSON: an array of objects, or an object in which exactly one value is such an array."""

from __future__ import annotations

from functools import partial
from pathlib import Path
from typing import Any

from ...errors import ListRefused
from ..objects import header_of, lines_of, parse
from ..table import Asked, Format, Table
from ..text import text_of


def read(path: Path, asked: Asked) -> Table:
    """The list in a JSON file. Raises ListRefused."""
    text = text_of(path, asked)
    whole = "\n".join(text.lines)
    fault = text.fault(whole)
    if fault:
        raise ListRefused(f"{asked.name}: {fault}")
    if not whole.strip():
        raise ListRefused(f"{asked.name}: the file is empty; a list is an array of objects with title and date")
    try:
        found = parse(whole)
    except ValueError as error:
        raise ListRefused(f"{asked.name}: no sound JSON: {error}; for one object a line, name the format ndjson") from None
    items = _array(found)
    if items is None:
        raise ListRefused(
            f"{asked.name}: a list in JSON is an array of objects with title and date, or one object that holds one such array"
        )
    header = header_of(items)
    return Table(header, partial(lines_of, items, header), unit="record", encoding=text.encoding)


def _array(found: Any) -> list[Any] | None:
    if isinstance(found, list):
        return found
    if isinstance(found, dict):
        arrays = [value for value in found.values() if isinstance(value, list) and any(isinstance(item, dict) for item in value)]
        if len(arrays) == 1:
            return arrays[0]
    return None


FORMAT = Format("json", (".json",), "an array of objects with a key for each column", read)
