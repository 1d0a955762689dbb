# SPDX-License-Identifier: Apache-2.0
"""The dates of a list: every distinct text is read once, plain numbers are read by the database, and each row gets a dating or a reason.

Afterwards the temporary view ``dated`` has one row for each row of ``list_rows``: ``place`` (position from 0), ``row``, the columns of
``ledger.entry`` but for ids, and ``reason``, NULL where the row is good.
"""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from ..dating import Reading, Settings, read_row
from ..dating.settings import BY_NAME
from ..errors import DateRefused
from ..progress import Tell, silent
from .ledger import Ledger
from .plain import NAMES
from .rows import Rows
from .table import quoted as literal

DATE_COLUMNS = ("date", "unit", "sigma", "plus_minus", "earliest", "latest")
TEXT_LIMIT = 500  # characters of a date
CHUNK = 50_000
_NUMBER = r"[+-]?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][+-]?[0-9]+)?"
_FIGURES = re.compile(r"-?\d+(?:[.,]\d+)*(?:e[+-]?\d+)?")


@dataclass
class Dates:
    """What reading the dates has shown: rows for each default that was used, and for each remark (the first wording, rows)."""

    defaults: Counter[str] = field(default_factory=Counter)
    remarks: dict[str, tuple[str, int]] = field(default_factory=dict)

    def take(self, reading: Reading, rows: int) -> None:
        """Count a reading that stands for some rows."""
        for name in reading.defaults:
            self.defaults[name] += rows
        for remark in reading.remarks:
            key = _FIGURES.sub("#", remark)
            first, before = self.remarks.get(key, (remark, 0))
            self.remarks[key] = (first, before + rows)

    def notes(self) -> list[str]:
        """Remarks for the list: one for each default and each kind of remark."""
        made = []
        for name, rows in sorted(self.defaults.items()):
            setting = BY_NAME.get(name)
            value = f" = {setting.default}" if setting is not None and setting.default is not None else ""
            made.append(f"default {name}{value} was used for {_rows(rows)}")
        for remark, rows in self.remarks.values():
            made.append(f"{remark} ({_rows(rows)})" if rows == 1 else f"{remark} ({_rows(rows)} like this)")
        return made


def _rows(count: int) -> str:
    return "1 row" if count == 1 else f"{count:,} rows"


def date_rows(ledger: Ledger, rows: Rows, settings: Settings, tell: Tell = silent) -> Dates:
    """Make the view ``dated``; see the head of this file."""
    keys = tuple(key for key in DATE_COLUMNS if key == "date" or key in rows.columns)
    undated = " AND ".join(f"l.{key} IS NULL" for key in ("date", "earliest", "latest") if key in keys)
    listed = ", ".join(keys)
    ledger.run("DROP VIEW IF EXISTS dated")
    ledger.run(
        f"CREATE OR REPLACE TEMP TABLE list_texts AS SELECT {listed}, count(*) AS rows, min(rowid) AS first FROM list_rows AS l "
        f"WHERE p_kind IS NULL AND title IS NOT NULL AND NOT ({undated}) AND coalesce(length(date), 0) <= {TEXT_LIMIT} GROUP BY {listed}"
    )
    seen = Dates()
    distinct = ledger.rows(f"SELECT {listed}, rows FROM list_texts ORDER BY first")
    if distinct:
        _read(ledger, keys, distinct, settings, seen, tell)
    if "digits" not in settings.given:
        rounded = int(
            ledger.value(
                "SELECT count(*) FROM list_rows WHERE p_kind > 1 AND title IS NOT NULL AND date[-1] = '0' AND NOT contains(date, '.')"
            )
        )
        if rounded:
            seen.defaults["digits"] += rounded
    codes = ledger.notation_codes(
        [NAMES[kind] for (kind,) in ledger.rows("SELECT DISTINCT p_kind FROM list_rows WHERE p_kind IS NOT NULL ORDER BY 1")]
    )
    _view(ledger, rows, keys, undated, bool(distinct), codes, settings)
    return seen


def _read(ledger: Ledger, keys: Sequence[str], distinct: list[tuple[Any, ...]], settings: Settings, seen: Dates, tell: Tell) -> None:
    """Read each distinct text, and put what came of it into ``list_readings``."""
    import numpy as np
    import pandas as pd

    fields = ", ".join(f"{key} VARCHAR" for key in keys)
    ledger.run("DROP TABLE IF EXISTS list_readings")
    ledger.run(
        f"CREATE TEMP TABLE list_readings ({fields}, earliest_year DOUBLE, best_year DOUBLE, latest_year DOUBLE, "
        "is_normal BOOLEAN, notation SMALLINT, failure VARCHAR)"
    )
    codes: dict[str, int] = {}
    for start in range(0, len(distinct), CHUNK):
        chunk = distinct[start : start + CHUNK]
        bounds = np.full((3, len(chunk)), np.nan)
        normal = np.zeros(len(chunk), bool)
        notation: list[int | None] = []
        failures: list[str | None] = []
        for i, (*texts, count) in enumerate(chunk):
            given = dict(zip(keys, texts, strict=True))
            try:
                reading = read_row(given.pop("date"), **given, settings=settings)
            except DateRefused as error:
                notation.append(None)
                failures.append(str(error))
                continue
            dating = reading.dating
            bounds[:, i] = dating.earliest, dating.best, dating.latest
            normal[i] = dating.shape == "normal"
            failures.append(None)
            if reading.notation not in codes:
                codes = ledger.notation_codes([reading.notation])
            notation.append(codes[reading.notation])
            if reading.defaults or reading.remarks:
                seen.take(reading, count)
        columns = {key: pd.Series([item[k] for item in chunk], dtype=object) for k, key in enumerate(keys)}
        frame = pd.DataFrame({**columns, "earliest_year": bounds[0], "best_year": bounds[1], "latest_year": bounds[2], "is_normal": normal})
        frame["notation"] = pd.Series(notation, dtype="Int16")
        frame["failure"] = pd.Series(failures, dtype=object)
        ledger.insert("list_readings", frame)
        tell("reading dates", min(1.0, (start + len(chunk)) / len(distinct)))


def _view(
    ledger: Ledger, rows: Rows, keys: Sequence[str], undated: str, has_readings: bool, codes: Mapping[str, int], settings: Settings
) -> None:
    columns = set(rows.columns)

    def column(key: str, kind: str = "VARCHAR") -> str:
        return f"l.{key}" if key in columns else f"CAST(NULL AS {kind})"

    importance = "replace(l.importance, ',', '.')" if settings.decimal == "," else "l.importance"
    number = f"TRY_CAST({importance} AS DOUBLE)" if "importance" in columns else "CAST(NULL AS DOUBLE)"
    checks = [
        ("l.title IS NULL", literal("the row has no title")),
        (undated, literal("the row has no date")),
        (f"length(l.date) > {TEXT_LIMIT}", f"'the date has ' || length(l.date) || ' characters; at most {TEXT_LIMIT} are read'"),
    ]
    if has_readings:
        checks.append(("r.failure IS NOT NULL", "r.failure"))
    if "importance" in columns:
        sound = f"regexp_full_match({importance}, '{_NUMBER}') AND isfinite({number})"
        checks.append(
            (
                f"l.importance IS NOT NULL AND NOT ({sound})",
                "'importance ''' || l.importance[:40] || ''' is no number; give a number, or leave it empty'",
            )
        )
    reason = "CASE " + " ".join(f"WHEN {test} THEN {text}" for test, text in checks) + " END"
    read = {
        name: ("r." + name if has_readings else "NULL") for name in ("earliest_year", "best_year", "latest_year", "is_normal", "notation")
    }
    known = " ".join(f"WHEN {kind} THEN {codes[name]}" for kind, name in NAMES.items() if name in codes)
    parts = {
        "earliest_year": f"CASE WHEN l.p_kind IS NULL THEN {read['earliest_year']} ELSE l.p_best - l.p_half END",
        "best_year": f"CASE WHEN l.p_kind IS NULL THEN {read['best_year']} ELSE l.p_best END",
        "latest_year": f"CASE WHEN l.p_kind IS NULL THEN {read['latest_year']} ELSE l.p_best + l.p_half END",
        "is_normal": f"coalesce({read['is_normal']}, false)",
        "notation": f"CASE l.p_kind {known} ELSE {read['notation']} END" if known else read["notation"],
    }
    join = ""
    if has_readings:
        join = " LEFT JOIN list_readings AS r ON " + " AND ".join(
            f"r.{key} = l.{key}" if len(keys) == 1 else f"r.{key} IS NOT DISTINCT FROM l.{key}" for key in keys
        )
    ledger.run(
        f"CREATE TEMP VIEW dated AS SELECT l.rowid AS place, {rows.row if rows.row == 'row' else 'l.' + rows.row} AS row, l.title, "
        f"{parts['earliest_year']} AS earliest, {parts['best_year']} AS best, {parts['latest_year']} AS latest, "
        f"{parts['is_normal']} AS normal, {parts['notation']} AS notation, l.date AS date_text, {column('category')} AS category, "
        f"{number} AS importance, {column('level')} AS level, {column('parent')} AS parent, {column('note')} AS note, "
        f"{'l.rest' if rows.has_rest else 'CAST(NULL AS VARCHAR)'} AS rest, {reason} AS reason FROM list_rows AS l{join}"
    )
