# SPDX-License-Identifier: Apache-2.0
"""What people settle about pairs: which wait for a decision, deciding, taking back, and the same through a spreadsheet.

A decision is keyed by list, title and nth, so it outlives reloading. It marks the milestones as due for linking; the caller links once
at the end of a sitting, not after each decision.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from ..errors import ListRefused, WrongUse
from ..merge.entries import Decision
from .ledger import Ledger, now, open_for_reading, open_for_writing
from .linking import PARTS, active_decisions

if TYPE_CHECKING:
    import pandas as pd

VERDICTS = ("same", "different")
STANDING = "status IN ('holds', 'date changed')"


@dataclass(frozen=True)
class Side:
    """One of the two entries of a pair, as its list gives it."""

    entry: int
    source: str
    title: str
    nth: int
    date_text: str | None
    earliest: float
    best: float
    latest: float
    shape: str
    category: str | None
    note: str | None
    row: int
    rest: str | None
    milestone: int | None


@dataclass(frozen=True)
class Pair:
    """A pair to look at: both entries, the score (a probability) with its parts by name, its state. Not compared: no score."""

    a: Side
    b: Side
    score: float | None
    state: str
    parts: dict[str, float | None]


@dataclass(frozen=True)
class FileRead:
    """What a file of decisions did: rows read, decisions made, rows that said what was already settled, rows without a verdict."""

    rows: int
    decided: int
    unchanged: int
    skipped: int


def pending(db: str | Path, state: str = "review") -> tuple[Pair, ...]:
    """Pairs of a state that nobody has settled yet, the most doubtful (nearest to even odds) first."""
    with open_for_reading(db) as ledger:
        rows = ledger.rows(
            "SELECT l.a, l.b FROM ledger.link AS l"
            f" ANTI JOIN (SELECT least(entry_a, entry_b) AS a, greatest(entry_a, entry_b) AS b FROM decisions WHERE {STANDING}) AS d"
            " ON d.a = l.a AND d.b = l.b WHERE l.state = ? ORDER BY abs(l.score - 0.5) NULLS LAST, l.a, l.b",
            [state],
        )
        return tuple(_pairs(ledger, [(int(a), int(b)) for a, b in rows]))


def pair(db: str | Path, a: int, b: int) -> Pair:
    """Any two entries as a pair, compared or not; so a linked pair is seen before it is taken apart. Raises WrongUse for unknown ids."""
    with open_for_reading(db) as ledger:
        return _pairs(ledger, [(min(a, b), max(a, b))])[0]


def decide(db: str | Path, a: int, b: int, verdict: str, *, who: str, why: str | None = None) -> int:
    """Settle that two entries (ids) mean the same event or different ones; what was settled before is withdrawn. Returns the decision's id.

    "different" on a linked pair takes it apart. Raises WrongUse for unknown ids, one id twice, another verdict, or nobody in ``who``.
    """
    return decide_many(db, [(a, b, verdict, why)], who=who)[0]


def decide_many(db: str | Path, decisions: Iterable[tuple[int, int, str, str | None]], *, who: str) -> list[int]:
    """Several decisions (a, b, verdict, why) in one transaction: all or none."""
    wanted = list(decisions)
    with open_for_writing(db, create=False) as ledger, ledger.transaction():
        return [_decide(ledger, a, b, verdict, who, why) for a, b, verdict, why in wanted]


def withdraw(db: str | Path, decision: int) -> None:
    """Withdraw a decision; it stays in the listing with the time. Raises WrongUse when there is none that stands with this id."""
    with open_for_writing(db, create=False) as ledger, ledger.transaction():
        found = ledger.row("SELECT withdrawn_at FROM ledger.decision WHERE decision = ?", [decision])
        if found is None:
            raise WrongUse(f"there is no decision {decision}; chronos-acc review --list shows them")
        if found[0] is not None:
            raise WrongUse(f"decision {decision} was withdrawn before, at {found[0]} UTC")
        ledger.run("UPDATE ledger.decision SET withdrawn_at = ? WHERE decision = ?", [now(), decision])
        ledger.set_about("linked", "no")


def undo(db: str | Path, decision: int) -> None:
    """Take back a decision of this sitting as if it had not been made; one that it replaced stands again."""
    with open_for_writing(db, create=False) as ledger, ledger.transaction():
        row = ledger.row(
            "SELECT source_a, title_a, nth_a, source_b, title_b, nth_b, decided_at FROM ledger.decision WHERE decision = ?", [decision]
        )
        if row is None:
            raise WrongUse(f"there is no decision {decision} to undo; chronos-acc review --list shows them")
        ledger.run("DELETE FROM ledger.decision WHERE decision = ?", [decision])
        before = ledger.value(
            "SELECT max(decision) FROM ledger.decision WHERE (source_a, title_a, nth_a, source_b, title_b, nth_b) = (?, ?, ?, ?, ?, ?)"
            " AND withdrawn_at = ? AND decision < ?",
            [*row, decision],
        )
        if before is not None:
            ledger.run("UPDATE ledger.decision SET withdrawn_at = NULL WHERE decision = ?", [before])
        ledger.set_about("linked", "no")


def standing(db: str | Path) -> list[Decision]:
    """The decisions that hold, as linking takes them."""
    with open_for_reading(db) as ledger:
        return active_decisions(ledger)


def listing(db: str | Path) -> pd.DataFrame:
    """All decisions with their status, in order of making."""
    with open_for_reading(db) as ledger:
        return ledger.frame("FROM decisions ORDER BY decision")


def read_file(db: str | Path, file: str | Path, *, who: str) -> FileRead:
    """Decisions from a CSV file such as ``links --state review --format csv`` writes, with the verdict in column ``verdict`` or ``state``.

    Needed: source_a, title_a, source_b, title_b. Optional: nth_a, nth_b (needed where a list has a title twice), who, why. A row whose
    verdict is neither same nor different is skipped. All or none. Raises ListRefused naming file and line.
    """
    path = Path(file)
    rows = _read_csv(path)
    made = unchanged = skipped = 0
    with open_for_writing(db, create=False) as ledger, ledger.transaction():
        standing = {
            (int(a), int(b)): str(v)
            for a, b, v in ledger.rows(
                f"SELECT least(entry_a, entry_b), greatest(entry_a, entry_b), verdict FROM decisions WHERE {STANDING} ORDER BY decision"
            )
        }
        seen: dict[tuple[int, int], tuple[str, int]] = {}
        for line, row in rows:
            verdict = (row.get("verdict") or "").strip().casefold() or (row.get("state") or "").strip().casefold()
            if verdict not in VERDICTS:
                if (row.get("verdict") or "").strip():
                    raise ListRefused(
                        f"{path}, line {line}: verdict {row['verdict']!r} is not allowed; write same or different, or leave it empty"
                    )
                skipped += 1
                continue
            a, b = (_find(ledger, row, side, path, line) for side in ("a", "b"))
            if a == b:
                raise ListRefused(f"{path}, line {line}: both sides are the same entry, {row['title_a']!r} of {row['source_a']}")
            key = (min(a, b), max(a, b))
            if key in seen and seen[key][0] != verdict:
                raise ListRefused(
                    f"{path}, line {line}: says {verdict}, line {seen[key][1]} says {seen[key][0]} of the same two entries; keep one"
                )
            seen[key] = (verdict, line)
            if standing.get(key) == verdict:
                unchanged += 1
                continue
            _decide(ledger, a, b, verdict, (row.get("who") or "").strip() or who, (row.get("why") or "").strip() or None)
            standing[key] = verdict
            made += 1
    return FileRead(len(rows), made, unchanged, skipped)


def _decide(ledger: Ledger, a: int, b: int, verdict: str, who: str, why: str | None) -> int:
    if verdict not in VERDICTS:
        raise WrongUse(f"verdict {verdict!r} is not allowed; it is same or different")
    if not who.strip():
        raise WrongUse("a decision needs somebody who made it; give a name")
    if a == b:
        raise WrongUse(f"entry {a} cannot be compared with itself; give two entries")
    first, second = _key(ledger, min(a, b)), _key(ledger, max(a, b))
    moment = now()
    ledger.run(
        "UPDATE ledger.decision SET withdrawn_at = ? WHERE withdrawn_at IS NULL AND ("
        "(source_a, title_a, nth_a, source_b, title_b, nth_b) = (?, ?, ?, ?, ?, ?)"
        " OR (source_b, title_b, nth_b, source_a, title_a, nth_a) = (?, ?, ?, ?, ?, ?))",
        [moment, *first[:3], *second[:3], *first[:3], *second[:3]],
    )
    number = ledger.new_ids("decision")
    ledger.run(
        "INSERT INTO ledger.decision (decision, source_a, title_a, nth_a, source_b, title_b, nth_b,"
        " verdict, who, decided_at, why, date_a, date_b)"
        " VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)",
        [number, *first[:3], *second[:3], verdict, who.strip(), moment, why, first[3], second[3]],
    )
    ledger.set_about("linked", "no")
    return number


def _key(ledger: Ledger, entry: int) -> tuple[str, str, int, str | None]:
    found = ledger.row("SELECT source, title, nth, date_text FROM entries WHERE entry = ?", [entry])
    if found is None:
        raise WrongUse(f"there is no entry {entry}; the view entries lists them")
    return str(found[0]), str(found[1]), int(found[2]), found[3]


def _pairs(ledger: Ledger, wanted: Sequence[tuple[int, int]]) -> list[Pair]:
    if not wanted:
        return []
    ids = sorted({e for p in wanted for e in p})
    rows = ledger.rows(
        "SELECT e.entry, e.source, e.title, e.nth, e.date_text, e.earliest, e.best, e.latest, e.shape,"
        " e.category, e.note, e.row, e.rest, m.milestone"
        " FROM entries AS e LEFT JOIN ledger.member AS m ON m.entry = e.entry WHERE e.entry IN (SELECT unnest(?::BIGINT[]))",
        [ids],
    )
    sides = {int(r[0]): Side(*r) for r in rows}
    for entry in ids:
        if entry not in sides:
            raise WrongUse(f"there is no entry {entry}; the view entries lists them")
    columns = ", ".join(f"l.{p}" for p in PARTS)
    scored: dict[tuple[int, int], tuple[Any, ...]] = {
        (int(r[0]), int(r[1])): r[2:]
        for r in ledger.rows(
            f"SELECT l.a, l.b, l.score, l.state, {columns} FROM ledger.link AS l"
            " JOIN (SELECT unnest(?::BIGINT[]) AS a, unnest(?::BIGINT[]) AS b) AS w ON w.a = l.a AND w.b = l.b",
            [[a for a, _ in wanted], [b for _, b in wanted]],
        )
    }
    out = []
    for a, b in wanted:
        score, state, *parts = scored.get((a, b), (None, "not compared", *[None] * len(PARTS)))
        out.append(Pair(sides[a], sides[b], score, state, dict(zip(PARTS, parts, strict=True))))
    return out


def _find(ledger: Ledger, row: dict[str, str], side: str, path: Path, line: int) -> int:
    source, title, nth = (row.get(f"source_{side}") or "").strip(), row.get(f"title_{side}") or "", (row.get(f"nth_{side}") or "").strip()
    if nth and not nth.isdigit():
        raise ListRefused(f"{path}, line {line}: nth_{side} {nth!r} is no whole number; it counts entries of the same title, from 1")
    for text in dict.fromkeys((title, title.strip(), title[1:] if title[:1] == "'" else title)):  # a spreadsheet's guard against formulas
        found = ledger.rows("SELECT entry, nth FROM entries WHERE source = ? AND title = ? ORDER BY nth", [source, text])
        if nth:
            found = [f for f in found if f[1] == int(nth)]
        if len(found) == 1:
            return int(found[0][0])
        if found:
            raise ListRefused(f"{path}, line {line}: {source} has {title!r} {len(found)} times; say which in the column nth_{side}")
    raise ListRefused(
        f"{path}, line {line}: there is no entry {title!r} in a list {source!r}; write list and title as chronos-acc links shows them"
    )


def _read_csv(path: Path) -> list[tuple[int, dict[str, str]]]:
    """Rows with their line numbers; comma, semicolon or tab, as spreadsheets write them."""
    try:
        text = path.read_bytes().decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise ListRefused(f"{path} is not UTF-8 at byte {error.start}; save it as CSV in UTF-8") from error
    except OSError as error:
        raise ListRefused(f"{path} cannot be read: {error.strerror}") from error
    header = text.split("\n", 1)[0]
    delimiter = max(",;\t", key=header.count)
    reader = csv.DictReader(io.StringIO(text, newline=""), delimiter=delimiter)
    needed = ("source_a", "title_a", "source_b", "title_b")
    fields = reader.fieldnames or ()
    missing = [c for c in needed if c not in fields]
    if missing or not {"verdict", "state"} & set(fields):
        raise ListRefused(f"{path} lacks the column {(missing or ['verdict'])[0]}; needed are {', '.join(needed)} and verdict (or state)")
    try:
        return [(reader.line_num, row) for row in reader]
    except csv.Error as error:
        raise ListRefused(f"{path}, line {reader.line_num}: not readable as CSV ({error})") from error
