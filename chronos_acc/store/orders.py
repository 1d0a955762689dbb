# SPDX-License-Identifier: Apache-2.0
"""Known orders: what a sheet or a file states to precede what, carried over to milestones, and refused when it goes in a circle."""

from __future__ import annotations

import csv
import json
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from ..errors import ListRefused, RecordRefused
from ..merge.entries import Decision
from .ledger import Ledger, open_for_writing


@dataclass(frozen=True)
class Orders:
    """Pairs of milestone ids (earlier, later) with who states them, and remarks about statements that could not be placed."""

    pairs: tuple[tuple[int, int, str], ...]
    notes: tuple[str, ...] = ()


@dataclass(frozen=True)
class Statement:
    """What precedes what, who states it, and the entries (ids) that have these titles: a list speaks of its own entries, a file of any."""

    earlier: str
    later: str
    who: str
    first: tuple[int, ...]
    second: tuple[int, ...]


def statements(ledger: Ledger) -> list[Statement]:
    """All stated orders: those of sheets in order of the lists, then those of files."""
    stated: list[tuple[str, str, str, str | None]] = []
    for name, text in ledger.rows("SELECT name, precedes FROM ledger.source WHERE precedes IS NOT NULL ORDER BY source"):
        stated += [(str(a), str(b), f"list {name}", str(name)) for a, b in json.loads(text)]
    for origin, a, b in ledger.rows("SELECT origin, earlier, later FROM ledger.stated_order ORDER BY origin, earlier, later"):
        stated.append((str(a), str(b), f"file {origin}", None))
    if not stated:
        return []
    by_title: dict[tuple[str | None, str], list[int]] = {}
    rows = ledger.rows(
        "SELECT e.entry, s.name, e.title FROM ledger.entry AS e JOIN ledger.source AS s ON s.source = e.source ORDER BY e.entry"
    )
    for entry, name, title in rows:
        for scope in (str(name), None):
            by_title.setdefault((scope, _key(title)), []).append(int(entry))
    return [
        Statement(a, b, who, tuple(by_title.get((scope, _key(a)), ())), tuple(by_title.get((scope, _key(b)), ())))
        for a, b, who, scope in stated
    ]


def apart(stated: Sequence[Statement]) -> list[Decision]:
    """What precedes something is something else: such entries must not be linked, however alike they look."""
    pairs = dict.fromkeys((min(i, j), max(i, j)) for s in stated for i in s.first for j in s.second if i != j)
    return [Decision(i, j, "different") for i, j in pairs]


def find(stated: Sequence[Statement], milestone: Mapping[int, int], titles: Mapping[int, str]) -> Orders:
    """Orders between milestones. ``milestone`` maps entry id to milestone id, ``titles`` milestone id to title.

    Raises RecordRefused when the statements form a circle, which is named, or when both ends were decided to be one milestone; a title
    that nobody has, or that stands in several milestones, is remarked and left out.
    """
    notes: list[str] = []
    pairs: dict[tuple[int, int], str] = {}
    for s in stated:
        ends = []
        for title, entries in ((s.earlier, s.first), (s.later, s.second)):
            found = {milestone[e] for e in entries if e in milestone}
            if len(found) > 1:
                notes.append(
                    f"{s.who} states an order for {title!r}, which stands in {len(found)} milestones: left out; make the title unique"
                )
            elif not found:
                notes.append(f"{s.who} states an order for {title!r}, which is no entry's title: left out")
            else:
                ends.append(found.pop())
        if len(ends) == 2:
            if ends[0] == ends[1]:
                raise RecordRefused(
                    f"{s.who} states that {s.earlier!r} precedes {s.later!r}, but both are one milestone;"
                    " part them in review or withdraw the order"
                )
            pairs.setdefault((ends[0], ends[1]), s.who)
    circle = cycle([*pairs])
    if circle:
        steps = [
            f"{titles.get(i, i)!r} before {titles.get(j, j)!r} ({pairs[i, j]})"
            for i, j in zip(circle, [*circle[1:], circle[0]], strict=True)
        ]
        raise RecordRefused(f"the known orders go in a circle: {'; '.join(steps)}; take one of them out")
    return Orders(tuple((i, j, who) for (i, j), who in pairs.items()), tuple(notes))


def cycle(pairs: Sequence[tuple[int, int]]) -> list[int]:
    """The nodes of one circle in order, or none. Depth first without recursion, in order of the ids, so the answer is always the same."""
    after: dict[int, list[int]] = {}
    for i, j in sorted(pairs):
        after.setdefault(i, []).append(j)
    done: set[int] = set()
    for start in sorted(after):
        path: list[int] = []
        on_path: set[int] = set()
        stack: list[tuple[int, int]] = [(start, 0)]
        while stack:
            node, step = stack.pop()
            if step == 0:
                if node in done:
                    continue
                path.append(node)
                on_path.add(node)
            following = after.get(node, [])
            if step < len(following):
                stack.append((node, step + 1))
                child = following[step]
                if child in on_path:
                    return path[path.index(child) :]
                if child not in done:
                    stack.append((child, 0))
            else:
                done.add(node)
                on_path.discard(node)
                path.pop()
    return []


def state_orders(db: str | Path, file: str | Path) -> int:
    """Read known orders from a CSV file with the columns ``earlier`` and ``later`` (titles); they replace what that file stated before.

    Linking is due afterwards. Returns the number of statements. Raises ListRefused for a file without these columns.
    """
    path = Path(file)
    with open(path, newline="", encoding="utf-8-sig") as handle:
        reader = csv.DictReader(handle)
        if reader.fieldnames is None or not {"earlier", "later"} <= set(reader.fieldnames):
            raise ListRefused(f"{path} has no columns earlier and later; give two titles a row: what came first, and what came after")
        pairs = [(row["earlier"].strip(), row["later"].strip()) for row in reader if row["earlier"] and row["later"]]
    with open_for_writing(db, create=False) as ledger, ledger.transaction():
        ledger.run("DELETE FROM ledger.stated_order WHERE origin = ?", [path.name])
        if pairs:
            ledger.insert(
                "ledger.stated_order",
                {"origin": [path.name] * len(pairs), "earlier": [a for a, _ in pairs], "later": [b for _, b in pairs]},
            )
        ledger.set_about("linked", "no")
    return len(pairs)


def _key(title: str) -> str:
    return " ".join(title.split()).casefold()
