# SPDX-License-Identifier: Apache-2.0
"""The formats of lists: one small file each, in this order."""

from __future__ import annotations

from pathlib import Path

from ...errors import ListRefused, WrongUse
from ..table import Format
from . import csv, excel, json, ndjson, parquet, tsv

FORMATS: tuple[Format, ...] = (csv.FORMAT, tsv.FORMAT, json.FORMAT, ndjson.FORMAT, parquet.FORMAT, excel.FORMAT)


def names() -> tuple[str, ...]:
    """Names that ``--as`` takes."""
    return tuple(one.name for one in FORMATS)


def by_name(name: str) -> Format:
    """The format of a name. Raises WrongUse."""
    for one in FORMATS:
        if one.name == name.lower():
            return one
    raise WrongUse(f"format {name!r} is not known; choose one of {', '.join(names())}")


def of_file(file: str) -> Format | None:
    """The format that a file's ending tells (``.gz`` aside), or None."""
    path = Path(file)
    suffix = (Path(path.stem).suffix if path.suffix.lower() == ".gz" else path.suffix).lower()
    return next((one for one in FORMATS if suffix in one.suffixes), None)


def for_file(file: str) -> Format:
    """The format that a file's ending tells. Raises ListRefused."""
    found = of_file(file)
    if found is None:
        endings = ", ".join(ending for one in FORMATS for ending in one.suffixes)
        raise ListRefused(f"{file}: the ending tells no format; known are {endings} (also with .gz), or name one with --as")
    return found
