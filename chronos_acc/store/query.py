# SPDX-License-Identifier: Apache-2.0
"""A person's SQL over the timeline, and the named queries: one statement that reads, no writing, nothing else in reach."""

from __future__ import annotations

import difflib
import re
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from math import isfinite
from pathlib import Path
from typing import TYPE_CHECKING

import duckdb

from .. import files
from ..errors import QueryRefused
from .ledger import GUARDED, Ledger, open_for_reading, quoted

if TYPE_CHECKING:
    import pandas as pd

Value = str | int | float | bool | None
_PRAGMA = re.compile(r"(\s|--[^\n]*(\n|$)|/\*.*?\*/)*pragma\b", re.IGNORECASE | re.DOTALL)
_SWITCH = re.compile(r"\b((enable|disable)_(logging|profiling)|truncate_duckdb_logs|write_log|(force_)?checkpoint)\s*\(", re.IGNORECASE)
_CAST = re.compile(r"getvariable\s*\(\s*'([^']+)'\s*\)\s*::\s*(\w+)", re.IGNORECASE)
_LIMIT = re.compile(r"\b(?:LIMIT|OFFSET)\s+(?:coalesce\s*\(\s*)?getvariable\s*\(\s*'([^']+)'\s*\)", re.IGNORECASE)
# what the views themselves follow
VIEW_VARIABLES = {"present": "DOUBLE", "start": "DOUBLE", "min_support": "DOUBLE", "category": "VARCHAR"}
KINDS = {"DOUBLE": "a number", "BIGINT": "a whole number", "INTEGER": "a whole number", "UBIGINT": "a whole number, 0 or more"}
A_LIST = "name of a list"  # how the meaning of a parameter begins that must be one


@dataclass(frozen=True)
class NamedQuery:
    """One file of queries/: its question, its parameters and its columns (name: meaning, in order), and its statement.

    A parameter's meaning ends with its default in brackets.
    """

    name: str
    question: str
    parameters: Mapping[str, str]
    columns: Mapping[str, str]
    sql: str


def named(folder: Path | None = None) -> tuple[NamedQuery, ...]:
    """All named queries, by name."""
    return _named(folder if folder is not None else files.queries())


@cache
def _named(folder: Path) -> tuple[NamedQuery, ...]:
    return tuple(parse(path.stem, path.read_text(encoding="utf-8")) for path in sorted(folder.glob("*.sql")))


def parse(name: str, text: str) -> NamedQuery:
    """A query file. Its header is made of comment lines: ``question:``, then ``parameters:`` and ``columns:`` with one indented line each.

        -- question: Which entries does a list hold?
        -- parameters:
        --   list = NULL: name of a list; all lists without it
        -- columns:
        --   entry: id of the entry

    Raises QueryRefused where the header has no question or no columns.
    """
    question, section = "", ""
    parameters: dict[str, str] = {}
    columns: dict[str, str] = {}
    body: list[str] = []
    for line in text.splitlines():
        if not line.startswith("--") or body:
            if line.strip():
                body.append(line)
            continue
        words = line[2:].strip()
        key, _, rest = words.partition(":")
        if key in ("question", "parameters", "columns"):
            section = key
            question = rest.strip() if key == "question" else question
        elif section == "question" and words:
            question += " " + words
        elif section == "parameters" and rest and "=" in key:
            label, _, default = key.partition("=")
            parameters[label.strip()] = f"{rest.strip()} (default {default.strip()})"
        elif section == "columns" and rest:
            columns[key.strip()] = rest.strip()
    if not question or not columns or not body:
        raise QueryRefused(f"the query file {name}.sql needs a question, columns and a statement; see the other files of its folder")
    return NamedQuery(name, question, parameters, columns, "\n".join(body) + "\n")


def find(name: str, folder: Path | None = None) -> NamedQuery | None:
    """The named query, or None."""
    return next((q for q in named(folder) if q.name == name.strip()), None)


def _must_find(name: str, folder: Path | None) -> NamedQuery:
    found = find(name, folder)
    if found is not None:
        return found
    near = difflib.get_close_matches(name, [q.name for q in named(folder)], n=3, cutoff=0.5)
    hint = f"did you mean {', '.join(near)}" if near else "query without a name lists them"
    raise QueryRefused(f"there is no named query {name!r}; {hint}; or give a whole SELECT statement")


def run(db: str | Path, text_or_name: str, settings: Mapping[str, Value] | None = None, *, folder: Path | None = None) -> pd.DataFrame:
    """The result of a named query, or of one statement that reads.

    ``settings`` become variables (SET VARIABLE) that the statement sees through getvariable('name'). Text that looks like a number becomes
    one. Raises QueryRefused for an unknown parameter, for anything but one SELECT, and for SQL that fails.
    """
    given = dict(settings or {})
    text = text_or_name.strip()
    lists: list[str] = []
    if re.fullmatch(r"[A-Za-z_]\w*", text):
        query = _must_find(text, folder)
        text = query.sql
        lists = [name for name, words in query.parameters.items() if words.startswith(A_LIST)]
        _only_known(given, list(query.parameters), f"the query {query.name}")
    else:
        mentioned = re.findall(r"getvariable\s*\(\s*'([^']+)'\s*\)", text, flags=re.IGNORECASE)
        _only_known(given, [*dict.fromkeys(mentioned), *(v for v in VIEW_VARIABLES if v not in mentioned)], "this statement")
    with open_for_reading(db, config=GUARDED) as ledger:
        kinds = VIEW_VARIABLES | {name: kind.upper() for name, kind in _CAST.findall(text)} | dict.fromkeys(_LIMIT.findall(text), "UBIGINT")
        for name, value in given.items():
            kind = kinds.get(name, "")
            plain = value if kind == "VARCHAR" else as_value(value)
            if name in lists:
                _must_be_list(ledger, name, plain)
            _must_convert(ledger, name, plain, kind)
            ledger.run(f"SET VARIABLE {quoted(name)} = ?", [plain])
        return _guarded(ledger, text)


def remarks(db: str | Path) -> tuple[str, ...]:
    """What a person should know before believing a result: that there are no milestones because linking is due."""
    with open_for_reading(db) as ledger:
        if ledger.about("linked") == "no":
            return ("milestones, links and intervals are not up to date; run: chronos-acc link",)
    return ()


def as_value(value: Value) -> Value:
    """Text as a number where it is written as one (007 stays text), anything else as it is."""
    if isinstance(value, str):
        if re.fullmatch(r"-?(0|[1-9]\d{0,17})", value):
            return int(value)
        if re.fullmatch(r"-?(0|[1-9]\d*)(\.\d+)?([eE][-+]?\d{1,3})?", value):
            return float(value)
    return value


def _must_be_list(ledger: Ledger, name: str, value: Value) -> None:
    """Raises QueryRefused where no list of the timeline has the name."""
    there = [str(one) for (one,) in ledger.rows("SELECT name FROM ledger.source ORDER BY source")]
    if value is not None and str(value) not in there:
        near = difflib.get_close_matches(str(value), there, n=1)
        hint = f"did you mean {near[0]!r}? " if near else ""
        has = f"it has {', '.join(there[:20])}{', …' if len(there) > 20 else ''}" if there else "it has none yet"
        raise QueryRefused(f"the parameter {name} is {str(value)!r}, but there is no such list in the timeline; {hint}{has}")


def _must_convert(ledger: Ledger, name: str, value: Value, kind: str) -> None:
    """Raises QueryRefused where a value is not of the type that the statement makes of it."""
    if kind not in KINDS or value is None:
        return
    made = ledger.value(f"SELECT TRY_CAST(? AS {kind})", [value])
    if made is None or not isfinite(made) or (isinstance(made, int) and float(made) != float(value)):
        raise QueryRefused(f"the parameter {name} takes {KINDS[kind]}, not {str(value)!r}")


def _only_known(given: Mapping[str, Value], allowed: list[str], what: str) -> None:
    for name in given:
        if name not in allowed:
            near = difflib.get_close_matches(name, allowed, n=1)
            hint = f"did you mean {near[0]}? " if near else ""
            raise QueryRefused(f"{what} has no parameter {name!r}; {hint}it takes {', '.join(allowed) or 'none'}")


def _guarded(ledger: Ledger, text: str) -> pd.DataFrame:
    try:
        statements = ledger.connection.extract_statements(text)
    except duckdb.Error as error:
        raise QueryRefused(_line(error)) from error
    if len(statements) != 1:
        raise QueryRefused(f"one statement at a time, please: {len(statements)} were given; take out what stands beside the SELECT")
    statement = statements[0]
    if statement.type != duckdb.StatementType.SELECT:
        kind = str(statement.type).rpartition(".")[2]
        raise QueryRefused(f"only a statement that reads is allowed here (SELECT, WITH, FROM, VALUES, SHOW, DESCRIBE), not {kind}")
    if _PRAGMA.match(text) or _SWITCH.search(text):  # some clients run these as a SELECT
        raise QueryRefused("a statement here reads the timeline; settings, logs and checkpoints are out of its reach")
    if statement.named_parameters:
        first = sorted(statement.named_parameters)[0]
        raise QueryRefused(f"the statement has a placeholder ({first}); write getvariable('name') and give it with --set name=value")
    try:
        return ledger.frame_of(statement)
    except duckdb.Error as error:
        raise QueryRefused(_line(error)) from error


def _line(error: duckdb.Error) -> str:
    """What DuckDB says, on one line and without the marked-up copy of the statement."""
    said = str(error).split("\n\nLINE ")[0].split("\nLINE ")[0]
    return f"the statement was refused: {' '.join(said.split())[:300]}; see DESCRIBE and SHOW TABLES for what there is"
