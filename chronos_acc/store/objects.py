# SPDX-License-Identifier: Apache-2.0
"""JSON objects as rows: numbers stay as they were written, keys are columns in order of their first appearance."""

from __future__ import annotations

import json
from collections.abc import Iterable, Iterator, Sequence
from typing import Any

from .table import Line, clip, trouble


class Number(str):
    """A JSON number as it was written: 1850.0 and 1850 are not the same date."""

    __slots__ = ()


class Repeated(dict[str, Any]):
    """An object in which a key stands twice."""


def _object(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    made = dict(pairs)
    return made if len(made) == len(pairs) else Repeated(made)


def parse(text: str) -> Any:
    """JSON with its numbers as written. Raises ValueError (RecursionError is made one)."""
    try:
        return json.loads(text, parse_float=Number, parse_int=Number, parse_constant=Number, object_pairs_hook=_object)
    except RecursionError:
        raise ValueError("values nested too deeply") from None


def dump(value: Any) -> str:
    """A parsed value as JSON text again, its numbers as written."""
    if isinstance(value, Number):
        return str(value) if value not in ("NaN", "Infinity", "-Infinity") else json.dumps(str(value))
    if isinstance(value, dict):
        return "{" + ", ".join(f"{json.dumps(k, ensure_ascii=False)}: {dump(v)}" for k, v in value.items()) + "}"
    if isinstance(value, list):
        return "[" + ", ".join(map(dump, value)) + "]"
    return json.dumps(value, ensure_ascii=False)


def header_of(objects: Iterable[Any]) -> tuple[str, ...]:
    """The keys of all objects, in order of first appearance."""
    return tuple(dict.fromkeys(key for item in objects if isinstance(item, dict) for key in item))


def line_of(row: int, item: Any, header: Sequence[str], used: frozenset[int], kept: frozenset[int], raw: str | None = None) -> Line:
    """One object as a row. ``raw`` is its text, where that is at hand."""
    reason = ""
    cells: list[str | None] = []
    if not isinstance(item, dict):
        reason = "a row must be an object with a key for each column"
    elif isinstance(item, Repeated):
        reason = "a key stands twice in this object; keep one"
    else:
        for i, key in enumerate(header):
            value = item.get(key)
            if value is None or isinstance(value, str) or i not in used:
                cells.append(value if isinstance(value, str) else None)
            else:
                reason = f"the value of {key!r} must be a text or a number"
                break
    reason = reason or trouble(cells)
    rest = None
    if not reason and isinstance(item, dict):
        others = {header[i]: item[header[i]] for i in sorted(kept) if item.get(header[i]) is not None}
        rest = dump(others) if others else None
        reason = trouble([rest])
    if reason:
        return Line(row, clip(raw if raw is not None else dump(item)), None, reason)
    return Line(row, raw if raw is not None else dump(item), cells, rest=rest)


def lines_of(items: Sequence[Any], header: Sequence[str], used: frozenset[int], kept: frozenset[int]) -> Iterator[Line]:
    """The objects of an array as rows, numbered from 1."""
    for row, item in enumerate(items, 1):
        yield line_of(row, item, header, used, kept)
