# SPDX-License-Identifier: Apache-2.0
"""The rows of a list as a temporary table of texts, by whichever of two ways of reading the file allows.

Table ``list_rows`` holds one text column for each contract column the list has, trimmed, empty cells NULL, and ``rest``. Read line by line
it also has ``row`` and ``raw``; read by the database the row number follows from the position, and raw text is fetched for refused rows
only, because to carry it for each row doubles the time of a load.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from itertools import islice

import duckdb

from ..dating import Settings
from ..errors import ListRefused
from .ledger import Ledger, quoted
from .plain import plain_sql
from .table import Line, Table
from .table import quoted as literal

BATCH = 20_000
HELD = ("title", "date", "category", "importance", "level", "parent", "note")  # contract columns that an entry holds; others stand in rest
SPACES = "".join(
    chr(c)
    for c in (*range(9, 14), *range(28, 33), 0x85, 0xA0, 0x1680, *range(0x2000, 0x200B), 0x2028, 0x2029, 0x202F, 0x205F, 0x3000, 0xFEFF)
)


@dataclass
class Rows:
    """What stands in ``list_rows``: contract columns, SQL of a row's number, whether ``rest`` and ``raw`` are there, rows refused so far."""

    columns: tuple[str, ...]
    row: str
    has_rest: bool
    has_raw: bool
    count: int
    refused: list[tuple[int, str, str]] = field(default_factory=list)  # row, raw, reason


def fill(ledger: Ledger, table: Table, columns: Mapping[str, int], settings: Settings, name: str) -> Rows:
    """Fill ``list_rows`` from a table. Raises ListRefused."""
    ledger.run("DROP TABLE IF EXISTS list_rows")
    kept = frozenset(range(len(table.header))) - {place for key, place in columns.items() if key in HELD}
    if table.fast is not None:
        rows = _by_database(ledger, table, columns, kept, settings)
        if rows is not None:
            return rows
    return _line_by_line(ledger, table, columns, kept, settings, name)


def _trimmed(column: str) -> str:
    """SQL of a cell without spaces around it, NULL where nothing is left; cells that begin and end in plain letters are not searched."""
    odd = " OR ".join(f"NOT ({column}[{end}] BETWEEN '!' AND '~')" for end in (1, -1))
    return f"CASE WHEN {odd} THEN nullif(trim({column}, {literal(SPACES)}), '') ELSE {column} END"


def _by_database(ledger: Ledger, table: Table, columns: Mapping[str, int], kept: frozenset[int], settings: Settings) -> Rows | None:
    fast = table.fast
    if fast is None:
        return None
    chosen = [f"{_trimmed(f'c{place}')} AS {quoted(key)}" for key, place in columns.items()]
    if "date" not in columns:
        chosen.append("CAST(NULL AS VARCHAR) AS date")
    if kept:
        named = rest_names(table.header, kept)
        pairs = ", ".join(f"{literal(name)}, nullif(c{place}, '')" for place, name in named.items())
        chosen.append(f"nullif(CAST(json_merge_patch('{{}}', json_object({pairs})) AS VARCHAR), '{{}}') AS rest")
    try:
        source, parameters = f"(SELECT {', '.join(chosen)} FROM ({fast.query}))", fast.parameters
        if "unit" in columns:  # the units are looked at before the rows are
            ledger.run(f"CREATE OR REPLACE TEMP TABLE list_cells AS FROM {source}", parameters)
            source, parameters = "list_cells", ()
        ledger.run(f"CREATE TEMP TABLE list_rows AS {plain_sql(ledger, settings, tuple(columns), source)}", parameters)
    except duckdb.Error:  # out of the ordinary after all: read line by line, where each line answers for itself
        ledger.run("DROP TABLE IF EXISTS list_rows")
        return None
    ledger.run("DROP TABLE IF EXISTS list_cells")
    count = int(ledger.value("SELECT count(*) FROM list_rows"))
    if fast.rows is not None and count != fast.rows:
        ledger.run("DROP TABLE list_rows")
        return None
    return Rows(tuple(columns), f"rowid + {fast.first}", bool(kept), False, count)


def _line_by_line(ledger: Ledger, table: Table, columns: Mapping[str, int], kept: frozenset[int], settings: Settings, name: str) -> Rows:
    import pandas as pd

    named = rest_names(table.header, kept)
    fields = ", ".join(f"{quoted(key)} VARCHAR" for key in dict.fromkeys(("raw", *columns, "date", "rest")))
    ledger.run(f"CREATE OR REPLACE TEMP TABLE list_cells (row BIGINT, {fields})")
    rows = Rows(tuple(columns), "row", bool(kept), True, 0)
    lines = _guarded(table.lines(frozenset(columns.values()), kept), name)
    while batch := list(islice(lines, BATCH)):
        rows.refused += [(line.row, line.raw, line.reason) for line in batch if line.cells is None]
        good = [(line, line.cells) for line in batch if line.cells is not None]
        rows.count += len(batch)
        if not good:
            continue
        data: dict[str, Sequence[object]] = {"row": [line.row for line, _ in good], "raw": [line.raw for line, _ in good]}
        for key, place in columns.items():
            data[key] = [_bare(cells[place]) for _, cells in good]
        data["rest"] = [line.rest if line.rest is not None else rest_of(cells, named) for line, cells in good]
        ledger.insert(
            "list_cells", pd.DataFrame({key: pd.Series(values, dtype="int64" if key == "row" else object) for key, values in data.items()})
        )
    ledger.run(f"CREATE TEMP TABLE list_rows AS {plain_sql(ledger, settings, tuple(columns), 'list_cells')}")
    ledger.run("DROP TABLE list_cells")
    return rows


def _bare(cell: str | None) -> str | None:
    return (cell.strip(SPACES) or None) if cell else None


def rest_names(header: Sequence[str], kept: frozenset[int]) -> dict[int, str]:
    """Names under which the other columns stand in ``rest``: the header; the position where it is empty or there already."""
    named: dict[int, str] = {}
    for place in sorted(kept):
        name = header[place] or f"column_{place + 1}"
        named[place] = name if name not in named.values() else f"{name}_{place + 1}"
    return named


def rest_of(cells: Sequence[str | None], named: Mapping[int, str]) -> str | None:
    """The other columns of a row as JSON, or None where they are empty."""
    import json

    others = {name: cells[place] for place, name in named.items() if cells[place]}
    return json.dumps(others, ensure_ascii=False, separators=(",", ":")) if others else None


def _guarded(lines: Iterator[Line], name: str) -> Iterator[Line]:
    try:
        yield from lines
    except (OSError, MemoryError) as error:
        raise ListRefused(f"{name}: cannot be read to its end ({error or 'out of memory'})") from None


def raw_of(ledger: Ledger, rows: Rows, table: Table, wanted: Sequence[int]) -> dict[int, str]:
    """The raw text of rows by number."""
    if not wanted:
        return {}
    if not rows.has_raw:
        return table.raw(sorted(wanted)) if table.raw else {}
    found = ledger.rows("SELECT row, raw FROM list_rows WHERE row IN (SELECT unnest(?))", [list(wanted)])
    return {int(row): str(raw) for row, raw in found}
