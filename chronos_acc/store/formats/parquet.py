# SPDX-License-Identifier: Apache-2.0
"""Parquet, read by the database: every column as text, whole floats without a point, a time at midnight as the day."""

from __future__ import annotations

import json
from collections.abc import Iterator, Sequence
from functools import partial
from pathlib import Path
from typing import Any

import duckdb

from ...errors import ListRefused
from ..ledger import quoted
from ..table import Asked, Fast, Format, Line, Table, clip, trouble

_DAY = "printf('%s%04d-%02d-%02d', CASE WHEN year({0}) < 0 THEN '-' ELSE '' END, abs(year({0})), month({0}), day({0}))"


def text_sql(name: str, kind: str) -> str:
    """SQL that writes a column of a type as text."""
    column = quoted(name)
    if kind in ("FLOAT", "DOUBLE"):
        whole = f"{column} = trunc({column}) AND abs({column}) < 1e18"
        number = f"CAST(CAST({column} AS BIGINT) AS VARCHAR) ELSE CAST({column} AS VARCHAR)"
        return f"CASE WHEN isnan({column}) THEN NULL WHEN {whole} THEN {number} END"
    if kind == "DATE":
        return f"CASE WHEN isfinite({column}) THEN {_DAY.format(column)} ELSE CAST({column} AS VARCHAR) END"
    if kind.startswith("TIMESTAMP"):
        plain = f"CAST({column} AS TIMESTAMP)"
        midnight = f"isfinite({plain}) AND {plain} = date_trunc('day', {plain})"
        return f"CASE WHEN {midnight} THEN {_DAY.format(plain)} ELSE strftime({plain}, '%Y-%m-%dT%H:%M:%S') END"
    if kind.endswith("]") or kind.startswith(("STRUCT", "MAP", "UNION")):
        return f"CAST(to_json({column}) AS VARCHAR)"
    return f"CAST({column} AS VARCHAR)"


def read(path: Path, asked: Asked) -> Table:
    """The list in a Parquet file. Raises ListRefused."""
    try:
        with duckdb.connect(config={"python_enable_replacements": "false"}) as connection:
            described = connection.execute("DESCRIBE SELECT * FROM read_parquet(?)", [str(path)]).fetchall()
    except duckdb.Error as error:
        raise ListRefused(f"{asked.name}: no Parquet file that can be read ({said(error)})") from None
    header = tuple(str(name) for name, *_ in described)
    parts = ", ".join(f"{text_sql(name, str(kind))} AS c{i}" for i, (name, kind, *_) in enumerate(described))
    query = f"SELECT {parts} FROM read_parquet(?)"
    return Table(
        header,
        partial(_lines, query, path, header, asked.name),
        unit="record",
        fast=Fast(query, (str(path),), first=1, rows=None),
        raw=partial(_raw, query, path, header),
        encoding="",
    )


def said(error: Exception) -> str:
    """The first words of a message of the database."""
    return " ".join(str(error).split())[:120]


def _fetch(query: str, path: Path) -> Iterator[tuple[Any, ...]]:
    with duckdb.connect(config={"python_enable_replacements": "false"}) as connection:
        result = connection.execute(query, [str(path)])
        while rows := result.fetchmany(10_000):
            yield from rows


def _row(header: Sequence[str], values: Sequence[Any]) -> str:
    return json.dumps({key: value for key, value in zip(header, values, strict=True) if value is not None}, ensure_ascii=False)


def _lines(query: str, path: Path, header: Sequence[str], name: str, used: frozenset[int], kept: frozenset[int]) -> Iterator[Line]:
    try:
        for row, values in enumerate(_fetch(query, path), 1):
            raw = _row(header, values)
            reason = trouble(values)
            yield Line(row, clip(raw) if reason else raw, None if reason else values, reason)
    except duckdb.Error as error:
        raise ListRefused(f"{name}: the Parquet file breaks off or is damaged ({said(error)})") from None


def _raw(query: str, path: Path, header: Sequence[str], rows: Sequence[int]) -> dict[int, str]:
    wanted = set(rows)
    return {row: clip(_row(header, values)) for row, values in enumerate(_fetch(query, path), 1) if row in wanted}


FORMAT = Format("parquet", (".parquet", ".pq"), "a Parquet file; one record a row", read)
