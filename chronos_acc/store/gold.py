# SPDX-License-Identifier: Apache-2.0
"""Linking held against the truth: precision, recall and F1 over pairs inside milestones, and what other thresholds would give.

A gold file is CSV. Either ``source,title,milestone`` (and ``nth`` where a list has a title twice): entries with the same word in
``milestone`` mean one event. Or ``source_a,title_a,source_b,title_b`` (and ``nth_a,nth_b``): each row is a pair that means one event; an
entry without a partner stands with an empty second side. Only entries that the gold file names are judged, only pairs of different lists.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from ..errors import ListRefused
from ..notebook import ShowsInNotebook
from .ledger import Ledger, open_for_reading
from .linking import active_decisions, stored_options
from .orders import apart, statements

if TYPE_CHECKING:
    import pandas as pd

THRESHOLDS = (0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.95)
Key = tuple[str, str, int]
PairSet = frozenset[tuple[int, int]]


@dataclass(frozen=True)
class GoldCheck(ShowsInNotebook):
    """Agreement with a gold file over pairs of entries: ``pairs`` inside milestones, ``gold_pairs`` in the file, ``right`` in both.

    precision = right / pairs, recall = right / gold_pairs, f1 their harmonic mean; None where there is nothing to divide by. curve: one row
    a threshold (threshold, precision, recall, f1, pairs, right), made anew from the stored scores and the decisions.
    """

    precision: float | None
    recall: float | None
    f1: float | None
    pairs: int
    gold_pairs: int
    right: int
    curve: pd.DataFrame
    notes: tuple[str, ...] = ()

    def to_frame(self) -> pd.DataFrame:
        """One row: precision, recall, f1, pairs, gold_pairs, right."""
        import pandas as pd

        names = ("precision", "recall", "f1", "pairs", "gold_pairs", "right")
        return pd.DataFrame([{n: getattr(self, n) for n in names}])


def check_gold(db: str | Path, file: str | Path) -> GoldCheck:
    """Compare the present milestones with a gold file; changes nothing.

    Raises ListRefused for a file that is none, TimelineRefused when linking is due.
    """
    import pandas as pd

    groups = read_gold(Path(file))
    with open_for_reading(db) as ledger:
        ledger.require_linked()
        rows = ledger.rows(
            "SELECT e.entry, s.name, e.title, e.nth, e.source, m.milestone"
            " FROM ledger.entry AS e JOIN ledger.source AS s ON s.source = e.source"
            " JOIN ledger.member AS m ON m.entry = e.entry ORDER BY e.entry"
        )
        entry_of: dict[Key, int] = {(str(s), str(t), int(n)): int(e) for e, s, t, n, *_ in rows}
        source_of = {int(e): int(k) for e, *_, k, _ in rows}
        judged = {entry_of[k]: g for k, g in groups.items() if k in entry_of}
        missing = [k for k in groups if k not in entry_of]
        truth = pairs_inside(judged.items(), source_of)
        found = pairs_inside(((int(e), int(m)) for e, *_, m in rows if int(e) in judged), source_of)
        points = [(t, _at(ledger, t, rows, source_of, judged)) for t in THRESHOLDS if t >= stored_options(ledger).review]
    curve = pd.DataFrame(
        [{"threshold": t, **_rates(pairs, truth), "pairs": len(pairs), "right": len(pairs & truth)} for t, pairs in points],
        columns=["threshold", "precision", "recall", "f1", "pairs", "right"],
    )
    notes = []
    if missing:
        source, title, nth = missing[0]
        notes.append(
            f"{len(missing)} of {len(groups)} entries of the gold file are not in the timeline and were left out, the first {title!r}"
            f"{f' ({nth})' if nth > 1 else ''} of {source}"
        )
    if not truth:
        notes.append("the gold file has no pair of entries of different lists that are in the timeline")
    return GoldCheck(
        **_rates(found, truth), pairs=len(found), gold_pairs=len(truth), right=len(found & truth), curve=curve, notes=tuple(notes)
    )


def read_gold(path: Path) -> dict[Key, int]:
    """(list, title, nth) to the number of its group. Raises ListRefused naming file and line."""
    try:
        text = path.read_bytes().decode("utf-8-sig")
    except OSError as error:
        raise ListRefused(f"{path} cannot be read: {error.strerror}") from error
    except UnicodeDecodeError as error:
        raise ListRefused(f"{path} is not UTF-8 at byte {error.start}; save it as CSV in UTF-8") from error
    reader = csv.DictReader(io.StringIO(text, newline=""))
    fields = set(reader.fieldnames or ())
    root: dict[Key | str, Key | str] = {}

    def top(node: Key | str) -> Key | str:
        while root.setdefault(node, node) != node:
            node = root[node]
        return node

    keys: dict[Key, None] = {}
    if {"source", "title", "milestone"} <= fields:
        for row in reader:
            key = _entry(row, "", path, reader.line_num)
            if key is not None:
                keys[key] = None
                if (row["milestone"] or "").strip():
                    root[top(key)] = top(row["milestone"].strip())
    elif {"source_a", "title_a", "source_b", "title_b"} <= fields:
        for row in reader:
            a, b = _entry(row, "_a", path, reader.line_num), _entry(row, "_b", path, reader.line_num)
            keys.update({k: None for k in (a, b) if k is not None})
            if a is not None and b is not None:
                root[top(a)] = top(b)
    else:
        raise ListRefused(f"{path} is no gold file; its columns are source, title, milestone, or source_a, title_a, source_b, title_b")
    numbers: dict[Key | str, int] = {}
    return {key: numbers.setdefault(top(key), len(numbers)) for key in keys}


def _entry(row: dict[str, str], suffix: str, path: Path, line: int) -> Key | None:
    source, title, nth = (row.get(name + suffix) or "" for name in ("source", "title", "nth"))
    if not source.strip() and not title.strip():
        return None
    if nth.strip() and not nth.strip().isdigit():
        raise ListRefused(f"{path}, line {line}: nth{suffix} {nth!r} is no whole number; it counts entries of the same title, from 1")
    return source.strip(), title, int(nth) if nth.strip() else 1


def pairs_inside(groups: Iterable[tuple[int, int]], source: dict[int, int]) -> PairSet:
    """Pairs of entries (smaller id first) of different lists within one group, from (entry, group)."""
    members: dict[int, list[int]] = {}
    for entry, group in groups:
        members.setdefault(group, []).append(entry)
    return frozenset(
        (min(a, b), max(a, b))
        for inside in members.values()
        for i, a in enumerate(inside)
        for b in inside[i + 1 :]
        if source[a] != source[b]
    )


def _rates(found: PairSet, truth: PairSet) -> dict[str, float | None]:
    right = len(found & truth)
    precision = right / len(found) if found else None
    recall = right / len(truth) if truth else None
    f1 = 2 * right / (len(found) + len(truth)) if found or truth else None
    return {"precision": precision, "recall": recall, "f1": f1}


def _at(ledger: Ledger, threshold: float, rows: Sequence[tuple[object, ...]], source_of: dict[int, int], judged: dict[int, int]) -> PairSet:
    """Pairs inside the milestones that a threshold would give, from the stored scores."""
    from ..merge.cluster import build

    ids = np.array(sorted(source_of), dtype=np.int64)
    place = {int(e): i for i, e in enumerate(ids)}
    source = np.array([source_of[int(e)] for e in ids], dtype=np.int64)
    links = ledger.rows("SELECT a, b, score FROM ledger.link WHERE score IS NOT NULL ORDER BY a, b")
    a, b = (np.array([place[int(row[k])] for row in links], dtype=np.int64) for k in (0, 1))
    score = np.array([float(row[2]) for row in links], dtype=float)
    settled = {
        (min(place[d.a], place[d.b]), max(place[d.a], place[d.b])): d.verdict
        for d in [*apart(statements(ledger)), *active_decisions(ledger)]
    }
    same, different = ([p for p, v in settled.items() if v == verdict] for verdict in ("same", "different"))
    label = build(source, a, b, score, threshold, same, different)[0].labels()
    return pairs_inside(((int(e), int(label[place[int(e)]])) for e in ids if int(e) in judged), source_of)
