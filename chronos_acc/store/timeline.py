# SPDX-License-Identifier: Apache-2.0
"""From the file to what analyses take: a Record, the entries, and the views as frames."""

from __future__ import annotations

import difflib
from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt

from ..errors import RecordRefused, WrongUse
from ..merge.entries import Entries, Floats, Ints
from ..mixture import NORMAL, UNIFORM
from ..record import Record, after_note
from .ledger import Ledger, open_for_reading

if TYPE_CHECKING:
    import pandas as pd

TABLES = {
    "entries": ("entry",),
    "sources": ("source",),
    "rejects": ("source", "row", "reason"),
    "links": ("entry_a", "entry_b"),
    "decisions": ("decision",),
    "milestones": ("best", "milestone"),
    "members": ("milestone", "entry"),
    "intervals": ("year", "milestone"),
    "orders": ("earlier", "later"),
    "runs": ("run",),
}
NEED_LINKS = ("links", "milestones", "members", "intervals", "orders")


@dataclass(frozen=True)
class MilestoneDetail:
    """One milestone: its pooled dating (one row), its entries with texts, datings and weights, and the pairs that tie or part them."""

    milestone: pd.DataFrame
    entries: pd.DataFrame
    links: pd.DataFrame


def table(db: str | Path, name: str, **filters: Any) -> pd.DataFrame:
    """A view as a frame, in a total order: entries, sources, rejects, links, decisions, milestones, members, intervals, orders, runs.

    ``filters`` are columns and the value each must have (``table(db, "links", state="review")``). Raises TimelineRefused where the
    milestones are not up to date, WrongUse for an unknown table or column.
    """
    if name not in TABLES:
        raise WrongUse(f"there is no table {name!r}; the tables are {', '.join(TABLES)}")
    with open_for_reading(db) as ledger:
        if name in NEED_LINKS:
            ledger.require_linked()
        columns = [c for c, *_ in ledger.rows(f"DESCRIBE {name}")]
        for column in filters:
            if column not in columns:
                raise WrongUse(f"the table {name} has no column {column!r}; it has {', '.join(columns)}")
        where = " AND ".join(f'"{c}" IS NOT DISTINCT FROM ?' for c in filters)
        order = ", ".join(TABLES[name])
        return ledger.frame(f"FROM {name} {f'WHERE {where} ' if where else ''}ORDER BY {order}", list(filters.values()))


def milestone(db: str | Path, id: int) -> MilestoneDetail:
    """One milestone with all its entries, their texts, and why they were joined. Raises RecordRefused when there is none of that id."""
    with open_for_reading(db) as ledger:
        ledger.require_linked()
        head = ledger.frame("FROM milestones WHERE milestone = ?", [id])
        if not len(head):
            raise RecordRefused(f"there is no milestone {id}; chronos-acc milestones lists them")
        entries = ledger.frame("SELECT * EXCLUDE (milestone, milestone_title) FROM members WHERE milestone = ? ORDER BY best, entry", [id])
        links = ledger.frame(
            "FROM links WHERE milestone_a = ? OR milestone_b = ? ORDER BY score DESC NULLS LAST, entry_a, entry_b", [id, id]
        )
    return MilestoneDetail(head, entries, links)


def default_present(ledger: Ledger, sources: Sequence[str] | None = None) -> tuple[float, str]:
    """The present and its origin: the end of the earliest compile year among the lists chosen, else of the year of the first load."""
    found = ledger.rows("SELECT name, compiled FROM ledger.source WHERE compiled IS NOT NULL AND rows_loaded > 0 ORDER BY compiled, source")
    chosen = [(n, c) for n, c in found if sources is None or n in sources]
    if chosen:
        name, year = chosen[0]
        return float(year) + 1.0, f"end of {int(year)}, the compile year of {name}"
    year = ledger.about("first_loaded_year")
    if year is None:
        raise RecordRefused("there is no list in the timeline yet; bring one in with: chronos-acc load FILE")
    return float(year) + 1.0, f"end of {year}, the year of the first load"


def read_entries(ledger: Ledger) -> tuple[Entries, Ints]:
    """All entries in order of id, and the milestone id of each (its own id where it is not linked).

    Ages count from the default present, or from the youngest entry where that is later, so that no age is negative.
    """
    names = ledger.rows("SELECT source, name FROM ledger.source ORDER BY source")
    place = {int(s): i for i, (s, _) in enumerate(names)}
    data = ledger.columns(
        "SELECT e.entry, e.source, e.title, e.earliest, e.best, e.latest, e.normal, e.category, coalesce(m.milestone, e.entry) AS milestone"
        " FROM ledger.entry AS e LEFT JOIN ledger.member AS m ON m.entry = e.entry ORDER BY e.entry"
    )
    best = np.asarray(data["best"], dtype=float)
    present = default_present(ledger)[0] if names else 0.0
    lookup = np.zeros(max(place, default=0) + 1, dtype=np.int64)
    for source, position in place.items():
        lookup[source] = position
    entries = Entries(
        id=np.asarray(data["entry"], dtype=np.int64),
        source=lookup[np.asarray(data["source"], dtype=np.int64)],
        sources=tuple(str(n) for _, n in names),
        title=tuple(str(t) for t in data["title"]),
        earliest=np.asarray(data["earliest"], dtype=float),
        best=best,
        latest=np.asarray(data["latest"], dtype=float),
        normal=np.asarray(data["normal"], dtype=bool),
        category=texts(data["category"]),
        present=max(present, float(best.max())) if len(best) else present,
    )
    return entries, np.asarray(data["milestone"], dtype=np.int64)


def entries(db: str | Path) -> tuple[Entries, Ints]:
    """All entries, and for each the id of its milestone. Raises TimelineRefused where the milestones are not up to date."""
    with open_for_reading(db) as ledger:
        ledger.require_linked()
        return read_entries(ledger)


def ancestry(ledger: Ledger) -> dict[str, str]:
    """For each list with kin (lists named as ancestors too) the list that stands for the kin: those with a common ancestor count as one."""
    root: dict[str, str] = {}

    def top(name: str) -> str:
        while root.setdefault(name, name) != name:
            name = root[name]
        return name

    for name, parents in ledger.rows("SELECT name, derives_from FROM ledger.source WHERE derives_from IS NOT NULL ORDER BY source"):
        for parent in parents:
            a, b = top(str(name)), top(str(parent))
            root[max(a, b)] = min(a, b)
    return {name: top(name) for name in root if top(name) != name}


def unknown_kin(ledger: Ledger) -> dict[str, list[str]]:
    """By list, a sentence for each name in its derives_from that no list of the timeline has, in order of the lists."""
    names = [str(name) for (name,) in ledger.rows("SELECT name FROM ledger.source ORDER BY source")]
    said: dict[str, list[str]] = {}
    stated = ledger.rows("SELECT name, derives_from FROM ledger.source WHERE derives_from IS NOT NULL ORDER BY source")
    for name, parents in stated:
        for parent in dict.fromkeys(map(str, parents)):
            if parent not in names:
                shared = sum(parent in others for _, others in stated) > 1
                near = difflib.get_close_matches(parent, [other for other in names if other != name], n=1)
                said.setdefault(str(name), []).append(
                    f"derives_from of {name} names {parent!r}, which is no list here{f' (did you mean {near[0]!r}?)' if near else ''}; "
                    f"{'the lists that name it count once' if shared else 'until it is loaded the lists count as independent'}"
                )
    return said


def record(
    db: str | Path, *, present: float | None = None, start: float | None = None, sources: Sequence[str] | None = None,
    min_support: int | None = None, category: str | None = None,
) -> Record:  # fmt: skip
    """The record an analysis takes: milestones, the parts of their datings, the lists that name them, the window.

    Without ``present``: the end of the earliest compile year among the lists chosen, else the end of the year of the first load. Raises
    TimelineRefused where the milestones are not up to date, RecordRefused for an empty timeline, WrongUse for an unknown list or category.
    """
    with open_for_reading(db) as ledger:
        return record_open(ledger, present=present, start=start, sources=sources, min_support=min_support, category=category)


def record_open(
    ledger: Ledger, *, present: float | None = None, start: float | None = None, sources: Sequence[str] | None = None,
    min_support: int | None = None, category: str | None = None,
) -> Record:  # fmt: skip
    """The same from an open file."""
    ledger.require_linked()
    whole = _whole(ledger)
    if sources is not None:
        unknown = [s for s in sources if s not in whole.lists]
        if unknown:
            raise WrongUse(f"there is no list {unknown[0]!r} in the timeline; it has {', '.join(whole.lists)}")
    default, origin = default_present(ledger, sources)
    if present is None:
        whole = replace(whole, present=default, present_from=origin)
    chosen = whole.only(sources=sources, min_support=min_support, category=category, present=present, start=start)
    said = [note for note in (after_note(chosen), _copies_note(ledger, chosen, sources)) if note]
    return replace(chosen, notes=(*chosen.notes, *said)) if said else chosen


def _copies_note(ledger: Ledger, chosen: Record, sources: Sequence[str] | None) -> str:
    """What to know about entries that repeat title and dating of another of their list and yet are milestones of their own."""
    found = ledger.rows(
        "SELECT m.milestone, o.milestone, f.entry, e.entry, s.name FROM ledger.entry AS e JOIN ledger.entry AS f ON f.source = e.source"
        " AND f.title = e.title AND f.earliest = e.earliest AND f.best = e.best AND f.latest = e.latest AND f.normal = e.normal"
        " JOIN ledger.member AS m ON m.entry = e.entry JOIN ledger.member AS o ON o.entry = f.entry"
        " JOIN ledger.source AS s ON s.source = e.source"
        " WHERE e.duplicate AND NOT f.duplicate AND m.milestone <> o.milestone ORDER BY e.entry"
    )
    held = {int(i) for i in chosen.id}
    pairs = {int(m): (f, e) for m, o, f, e, name in reversed(found) if {int(m), int(o)} <= held and (sources is None or name in sources)}
    if not pairs:
        return ""
    first, second = pairs[min(pairs)]
    what = "1 milestone repeats" if len(pairs) == 1 else f"{len(pairs):,} milestones repeat"
    return (
        f"{what} title and date of another of the same list and {'counts as an event' if len(pairs) == 1 else 'count as events'} "
        f"(entries {first} and {second}{', and so on' if len(pairs) > 1 else ''}); if they are copies, settle them as same with "
        "chronos-acc review --pair ID ID --verdict same"
    )


def _whole(ledger: Ledger) -> Record:
    lists = ledger.rows("SELECT source, name, compiled FROM ledger.source ORDER BY source")
    place = {int(s): i for i, (s, *_) in enumerate(lists)}
    names = tuple(str(n) for _, n, _ in lists)
    head = ledger.columns(
        "SELECT milestone, title, earliest, best, latest, unit, sd, category, importance, level, parent"
        " FROM ledger.milestone ORDER BY milestone"
    )
    parts = ledger.columns(
        "SELECT m.milestone, e.source, m.weight, m.normal, m.low, m.mode, m.high FROM ledger.member AS m"
        " JOIN ledger.entry AS e ON e.entry = m.entry ORDER BY m.milestone, e.source, e.entry"
    )
    ids = np.asarray(head["milestone"], dtype=np.int64)
    owner = np.searchsorted(ids, np.asarray(parts["milestone"], dtype=np.int64)).astype(np.int64)
    source = np.array([place[int(s)] for s in parts["source"]], dtype=np.int64)
    mentions = np.zeros((len(ids), len(names)), dtype=bool)
    mentions[owner, source] = True
    kin = ancestry(ledger)
    heads = [kin.get(n, n) for n in names]
    position = {int(i): k for k, i in enumerate(ids)}
    orders = ledger.rows("SELECT DISTINCT earlier, later FROM ledger.known_order ORDER BY earlier, later")
    return Record(
        id=ids,
        title=tuple(str(t) for t in head["title"]),
        best=_floats(head["best"]),
        earliest=_floats(head["earliest"]),
        latest=_floats(head["latest"]),
        unit=_floats(head["unit"]),
        sd=_floats(head["sd"]),
        owner=owner,
        source=source,
        weight=_floats(parts["weight"]),
        kind=np.where(np.asarray(parts["normal"], dtype=bool), NORMAL, UNIFORM).astype(np.int8),
        low=_floats(parts["low"]),
        mode=_floats(parts["mode"]),
        high=_floats(parts["high"]),
        lists=names,
        compiled=np.array([np.nan if c is None else float(c) for *_, c in lists], dtype=float),
        group=np.array([heads.index(h) for h in heads], dtype=np.int64),
        mentions=mentions,
        category=texts(head["category"]),
        importance=_floats(head["importance"]),
        level=texts(head["level"]),
        parent=texts(head["parent"]),
        present=0.0,
        orders=tuple((position[int(a)], position[int(b)]) for a, b in orders),
    )


def _floats(column: Any) -> Floats:
    """Missing values become NaN."""
    return np.asarray(np.ma.filled(np.ma.asarray(column, dtype=float), np.nan), dtype=float)


def texts(column: npt.ArrayLike) -> tuple[str | None, ...]:
    """Missing values become None. A column with no text at all may come back as numbers."""
    masked: Any = np.ma.asarray(column)
    missing = np.ma.getmaskarray(masked)
    return tuple(None if gone or value is None else str(value) for value, gone in zip(masked.data.tolist(), missing.tolist(), strict=True))
