# SPDX-License-Identifier: Apache-2.0
"""Plain numbers as dates, read by the database: the rule of ``dating.plain`` as SQL, for lists of millions of rows.

Rows it does not cover (words, ranges, eras, a date past the compile year) get NULL here and are read as texts.
"""

from __future__ import annotations

from collections.abc import Sequence

from ..dating import Settings
from ..dating.plain import AGO_NAME, BP_NAME, PLAIN_AGE, PLAIN_DECIMAL_YEAR, PLAIN_YEAR, YEAR_NAME, plain_unit, zero_of
from ..dating.span import FARTHEST
from .ledger import Ledger
from .table import quoted as literal

UNITS_LIMIT = 50  # different units in a column that are looked at; rows with others are read as texts
NAMES = {1: YEAR_NAME, 2: AGO_NAME, 3: BP_NAME}
_SPOILS = ("sigma", "plus_minus", "earliest", "latest")  # with one of these a row is more than its number


def plain_sql(ledger: Ledger, settings: Settings, keys: Sequence[str], source: str) -> str:
    """SQL that adds ``p_best``, ``p_half`` (years) and ``p_kind`` (a key of NAMES) to the columns of ``source``.

    ``p_kind`` is NULL where a row is no plain number; the others then mean nothing.
    """
    none = f"SELECT *, CAST(NULL AS DOUBLE) AS p_best, CAST(NULL AS DOUBLE) AS p_half, CAST(NULL AS TINYINT) AS p_kind FROM {source}"
    if settings.decimal != ".":
        return none
    alone = " AND ".join(f"{key} IS NULL" for key in _SPOILS if key in keys) or "true"
    if "unit" in keys:
        # No join: it would shuffle the rows, and a row's number is its position.
        spelled = "coalesce(lower(replace(unit, '.', '')), '')"
        given = [str(unit) for (unit,) in ledger.rows(f"SELECT DISTINCT {spelled} AS u FROM {source} ORDER BY u LIMIT {UNITS_LIMIT}")]
        units = [(literal(unit), *found) for unit in given if (found := _kind(unit or None, settings))]
        if not units:
            return none
        columns = [f"CASE {spelled} {' '.join(f'WHEN {unit[0]} THEN {unit[i]!r}' for unit in units)} END" for i in (1, 2, 3)]
        known = f"SELECT *, {columns[0]} AS p_kind, {columns[1]} AS p_power, CAST({columns[2]} AS DOUBLE) AS p_zero FROM {source}"
        kinds = {1, 2, 3}
    else:
        found = _kind(None, settings)
        if found is None:
            return none
        kind, power, zero = found
        known = f"SELECT *, CAST({kind} AS TINYINT) AS p_kind, {power} AS p_power, {zero!r}::DOUBLE AS p_zero FROM {source}"
        kinds = {kind}
    cases = []
    if 1 in kinds:
        cases.append(f"WHEN p_kind = 1 AND regexp_matches(date, '{PLAIN_YEAR}') THEN 0")
        cases.append(f"WHEN p_kind = 1 AND regexp_matches(date, '{PLAIN_DECIMAL_YEAR}') THEN length(date) - strpos(date, '.')")
    if kinds & {2, 3}:
        cases.append(
            f"WHEN p_kind > 1 AND regexp_matches(date, '{PLAIN_AGE}') THEN "
            "CASE WHEN contains(date, '.') THEN length(date) - strpos(date, '.') ELSE 0 END"
        )
    places = f"SELECT *, CASE WHEN NOT ({alone}) OR length(date) > 32 THEN NULL {' '.join(cases)} END AS p_places FROM ({known})"
    if settings.digits == "all":
        zeros = "0"
    else:
        zeros = (
            "greatest(0, least(length(ltrim(date, '0')) - length(rtrim(ltrim(date, '0'), '0')), "
            f"length(ltrim(date, '0')) - {int(settings.digits)}))"
        )
    best = ["WHEN p_places IS NULL THEN NULL"]
    half = ["WHEN p_places IS NULL THEN NULL"]
    if 1 in kinds:
        best.append("WHEN p_kind = 1 THEN CAST(date AS DOUBLE) + CASE WHEN p_places = 0 THEN 0.5::DOUBLE ELSE 0::DOUBLE END")
        half.append("WHEN p_kind = 1 THEN CASE WHEN p_places = 0 THEN 0.5::DOUBLE ELSE CAST('5e-' || (p_places + 1) AS DOUBLE) END")
    if kinds & {2, 3}:
        best.append("WHEN p_kind > 1 THEN p_zero - CAST(date || 'e' || p_power AS DOUBLE)")
        half.append(f"WHEN p_kind > 1 THEN CAST('5e' || (p_power - 1 + CASE WHEN p_places > 0 THEN -p_places ELSE {zeros} END) AS DOUBLE)")
    made = f"SELECT *, CASE {' '.join(best)} END AS p_best, CASE {' '.join(half)} END AS p_half FROM ({places})"
    end = FARTHEST if settings.compiled is None else float(settings.compiled + 1)
    covered = f"p_best - p_half >= {-FARTHEST}::DOUBLE AND p_best + p_half <= {end}::DOUBLE"
    if 1 in kinds:
        covered += " AND NOT (date[1] = '-' AND CAST(date AS DOUBLE) = 0)"  # a zero with a minus sign is refused
    return (
        "SELECT * EXCLUDE (p_kind, p_power, p_zero, p_places), "
        f"CASE WHEN p_places IS NULL THEN NULL WHEN {covered} THEN p_kind END AS p_kind FROM ({made})"
    )


def _kind(unit: str | None, settings: Settings) -> tuple[int, int, float] | None:
    """(kind, power, zero) of numbers with a unit; None where they are no plain numbers."""
    back = plain_unit(unit, settings)
    if back is None:
        return None if unit or settings.unit else (1, 0, 0.0)
    zero = zero_of(back, settings)
    return None if zero is None else (2 if back.zero == "compiled" else 3, back.power, zero)
