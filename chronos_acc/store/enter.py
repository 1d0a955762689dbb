# SPDX-License-Identifier: Apache-2.0
"""Put a dated list into the ledger in one transaction, in place of what it held before."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime

from .ledger import Ledger, now
from .rows import Rows
from .staging import Job, Staged
from .table import Table

COUNTS = ("rows_read", "rows_loaded", "rows_rejected", "duplicates")
HELD = (
    "title",
    "earliest",
    "best",
    "latest",
    "normal",
    "notation",
    "date_text",
    "category",
    "importance",
    "level",
    "parent",
    "note",
    "rest",
)


@dataclass(frozen=True)
class Former:
    """A list as the ledger holds it."""

    source: int
    digest: str
    loaded_at: datetime | None
    file: str
    compiled: int | None
    counts: dict[str, int]


@dataclass(frozen=True)
class Change:
    """What a load changed in the entries of a list, and its remarks."""

    added: int
    changed: int
    gone: int
    duplicates: int
    notes: tuple[str, ...]


def former(ledger: Ledger, name: str) -> Former | None:
    """The list of that name as it stands, or None."""
    found = ledger.row(f"SELECT source, digest, loaded_at, file, compiled, {', '.join(COUNTS)} FROM ledger.source WHERE name = ?", [name])
    if found is None:
        return None
    compiled = None if found[4] is None else int(found[4])
    return Former(int(found[0]), str(found[1]), found[2], str(found[3]), compiled, dict(zip(COUNTS, map(int, found[5:]), strict=True)))


def enter(
    ledger: Ledger,
    job: Job,
    staged: Staged,
    table: Table,
    rows: Rows,
    rejects: Sequence[tuple[int, str, str]],
    notes: Sequence[str],
    before: Former | None,
) -> Change:
    """The transaction: source, entries (from the view ``dated``) and rejects, or nothing."""
    import pandas as pd

    loaded = rows.count - len(rejects)
    duplicates = _number(ledger)
    said = [*notes]
    if duplicates:
        said.append(
            f"{'1 entry repeats' if duplicates == 1 else f'{duplicates:,} entries repeat'} title and dating of an earlier row; "
            "kept, and marked as duplicate"
        )
    with ledger.transaction():
        source = before.source if before else ledger.new_ids("source")
        added, changed, gone = (
            _replace(ledger, source, loaded) if before else (_insert(ledger, source, rows.count - len(rows.refused), loaded), 0, 0)
        )
        if before and (added or changed or gone):
            said.append(
                f"in place of what {before.file} gave on {before.loaded_at} UTC: {added:,} added, {changed:,} changed, {gone:,} gone; "
                "to go back, load that state of the file again"
            )
        _source(ledger, source, job, staged, table, rows.count, loaded, duplicates, said, before is None)
        ledger.run("DELETE FROM ledger.reject WHERE source = ?", [source])
        if rejects:
            frame = pd.DataFrame({"row": [r[0] for r in rejects], "raw": pd.Series([r[1] for r in rejects], dtype=object)})
            frame["reason"] = pd.Series([r[2] for r in rejects], dtype=object)
            frame["source"] = source
            ledger.insert("ledger.reject", frame)
        if loaded or gone:  # a list that brings nothing but refused rows leaves the milestones as they are
            ledger.entries_changed()
    ledger.run("DROP TABLE IF EXISTS list_nth")
    return Change(added, changed, gone, duplicates, tuple(said))


def _number(ledger: Ledger) -> int:
    """``list_nth``: nth and duplicate of entries whose title stands more than once in the list. Returns the number of duplicates."""
    # Hashes are grouped first, because few titles stand twice and numbers are grouped faster than texts.
    ledger.run(
        "CREATE OR REPLACE TEMP TABLE list_repeated AS "
        "SELECT hash(title) AS title FROM list_rows WHERE title IS NOT NULL GROUP BY hash(title) HAVING count(*) > 1"
    )
    ledger.run(
        "CREATE OR REPLACE TEMP TABLE list_nth AS SELECT place, row_number() OVER (PARTITION BY title ORDER BY place) AS nth, "
        "row_number() OVER (PARTITION BY title, earliest, best, latest, normal ORDER BY place) > 1 AS duplicate "
        "FROM dated WHERE reason IS NULL AND hash(title) IN (SELECT title FROM list_repeated)"
        if ledger.value("SELECT count(*) FROM list_repeated")
        else "CREATE OR REPLACE TEMP TABLE list_nth (place BIGINT, nth BIGINT, duplicate BOOLEAN)"
    )
    ledger.run("DROP TABLE list_repeated")
    return int(ledger.value("SELECT count(*) FROM list_nth WHERE duplicate"))


def _insert(ledger: Ledger, source: int, count: int, loaded: int) -> int:
    """The entries of a list that is new; ids follow the rows."""
    first = ledger.new_ids("entry", count) if count else 0
    repeated = bool(ledger.value("SELECT count(*) FROM list_nth"))
    nth = "coalesce(n.nth, 1) AS nth, coalesce(n.duplicate, false) AS duplicate" if repeated else "1 AS nth, false AS duplicate"
    join = " LEFT JOIN list_nth AS n ON n.place = d.place" if repeated else ""
    ledger.run(
        f"INSERT INTO ledger.entry BY NAME SELECT ? + d.place AS entry, ? AS source, d.row AS row, {nth}, "
        f"{', '.join(f'd.{name} AS {name}' for name in HELD)} FROM dated AS d{join} WHERE d.reason IS NULL",
        [first, source],
    )
    return loaded


def _replace(ledger: Ledger, source: int, loaded: int) -> tuple[int, int, int]:
    """The entries of a list that was there: an entry keeps its id while (title, nth) lives. Returns added, changed, gone."""
    listed = ", ".join(f"d.{name} AS {name}" for name in HELD)
    ledger.run(
        "CREATE OR REPLACE TEMP TABLE list_fresh AS SELECT d.place, d.row AS row, "
        "coalesce(n.nth, 1) AS nth, coalesce(n.duplicate, false) AS duplicate, "
        f"{listed} FROM dated AS d LEFT JOIN list_nth AS n ON n.place = d.place WHERE d.reason IS NULL"
    )
    differs = " OR ".join(f"o.{name} IS DISTINCT FROM f.{name}" for name in HELD)
    ledger.run(
        "CREATE OR REPLACE TEMP TABLE list_kept AS SELECT f.place, o.entry, "
        f"({differs}) AS changed FROM list_fresh AS f JOIN ledger.entry AS o ON o.source = ? AND o.title = f.title AND o.nth = f.nth",
        [source],
    )
    was = int(ledger.value("SELECT count(*) FROM ledger.entry WHERE source = ?", [source]))
    kept, changed = ledger.rows("SELECT count(*), count(*) FILTER (WHERE changed) FROM list_kept")[0]
    added = loaded - int(kept)
    first = ledger.new_ids("entry", added) if added else 0
    ledger.run("DELETE FROM ledger.entry WHERE source = ?", [source])
    fields = ", ".join(f"f.{name} AS {name}" for name in ("row", "nth", "duplicate", *HELD))
    ledger.run(
        "INSERT INTO ledger.entry BY NAME SELECT "
        "coalesce(k.entry, ? - 1 + row_number() OVER (PARTITION BY k.entry IS NULL ORDER BY f.place)) AS entry, "
        f"? AS source, {fields} FROM list_fresh AS f LEFT JOIN list_kept AS k ON k.place = f.place ORDER BY f.place",
        [first, source],
    )
    ledger.run("DROP TABLE list_fresh")
    ledger.run("DROP TABLE list_kept")
    return added, int(changed), was - int(kept)


def _source(
    ledger: Ledger,
    source: int,
    job: Job,
    staged: Staged,
    table: Table,
    read: int,
    loaded: int,
    duplicates: int,
    notes: Sequence[str],
    new: bool,
) -> None:
    sheet = job.sheet
    values = {
        "name": sheet.name,
        "title": sheet.title,
        "citation": sheet.citation,
        "compiled": sheet.compiled,
        "criterion": sheet.criterion,
        "file": job.label,
        "encoding": table.encoding or None,
        "derives_from": list(sheet.derives_from) or None,
        "precedes": sheet.precedes_json,
        "sheet": sheet.text or None,
        "settings": sheet.settings_json,
        "digest": staged.digest,
        "loaded_at": now(),
        "rows_read": read,
        "rows_loaded": loaded,
        "rows_rejected": read - loaded,
        "duplicates": duplicates,
        "notes": list(notes) or None,
    }
    if new:
        marks = ", ".join("?" for _ in values)
        ledger.run(f"INSERT INTO ledger.source (source, {', '.join(values)}) VALUES (?, {marks})", [source, *values.values()])
    else:
        ledger.run(f"UPDATE ledger.source SET {', '.join(f'{name} = ?' for name in values)} WHERE source = ?", [*values.values(), source])
