# SPDX-License-Identifier: Apache-2.0
"""Linking in the file: entries out, milestones in, in one transaction."""

from __future__ import annotations

import json
from collections import Counter
from collections.abc import Sequence
from dataclasses import asdict, dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from ..merge.entries import Decision, Entries, Ints, Linked, LinkOptions
from ..notebook import ShowsInNotebook
from ..progress import Tell, silent
from . import orders
from .ledger import Ledger, open_for_reading, open_for_writing
from .timeline import ancestry, read_entries, texts, unknown_kin

if TYPE_CHECKING:
    import pandas as pd

PARTS = ("title", "gap", "title_evidence", "date_evidence", "category_evidence", "prior", "rivals")


@dataclass(frozen=True)
class LinkSummary(ShowsInNotebook):
    """What linking did: entries taken, pairs scored, pairs linked and waiting for review, milestones made, remarks, options used."""

    entries: int
    pairs_scored: int
    linked: int
    to_review: int
    milestones: int
    notes: tuple[str, ...] = ()
    options: LinkOptions | None = None

    def to_frame(self) -> pd.DataFrame:
        """One row: entries, pairs_scored, linked, to_review, milestones, notes joined by "; "."""
        import pandas as pd

        names = ("entries", "pairs_scored", "linked", "to_review", "milestones")
        return pd.DataFrame([{name: getattr(self, name) for name in names} | {"notes": "; ".join(self.notes)}])


def relink(db: str | Path, *, options: LinkOptions | None = None, tell: Tell = silent) -> LinkSummary:
    """Link all entries anew and store milestones, members and links. Without ``options`` those of the last time.

    Raises WrongUse for an unknown list or rule, RecordRefused where known orders contradict each other; the file is then as before.
    """
    with open_for_writing(db, create=False) as ledger, ledger.transaction():
        return relink_open(ledger, options=options, tell=tell)


def relink_open(ledger: Ledger, *, options: LinkOptions | None = None, tell: Tell = silent) -> LinkSummary:
    """The same on an open file, as part of the caller's transaction (or in one of its own)."""
    with ledger.transaction():
        return _relink(ledger, options, tell)


def stored(db: str | Path) -> LinkOptions:
    """The options that the next linking takes when it is given none: those of the last; the defaults where there is no file yet."""
    if not Path(db).exists():
        return LinkOptions()
    with open_for_reading(db) as ledger:
        return stored_options(ledger)


def stored_options(ledger: Ledger) -> LinkOptions:
    """The options of the last linking, or the defaults."""
    text = ledger.about("link_options")
    return LinkOptions(**json.loads(text)) if text else LinkOptions()


def active_decisions(ledger: Ledger) -> list[Decision]:
    """Decisions that stand and whose entries are both there, in order of making."""
    rows = ledger.rows(
        "SELECT entry_a, entry_b, verdict FROM decisions WHERE status IN ('holds', 'date changed') AND entry_a <> entry_b ORDER BY decision"
    )
    return [Decision(int(a), int(b), str(v)) for a, b, v in rows]


def _relink(ledger: Ledger, options: LinkOptions | None, tell: Tell) -> LinkSummary:
    from ..merge import link, pool

    notes: list[str] = []
    chosen = options if options is not None else stored_options(ledger)
    entries, _ = read_entries(ledger)
    if not len(entries):
        return _nothing(ledger, chosen)
    if options is None and chosen.prefer is not None and chosen.prefer not in entries.sources:
        notes.append(f"the preferred list {chosen.prefer!r} is no longer there; linked without a preference")
        chosen = replace(chosen, prefer=None, pooling="mixture" if chosen.pooling == "preferred" else chosen.pooling)
    decided, stated = active_decisions(ledger), orders.statements(ledger)
    linked = _blocked(link(entries, [*orders.apart(stated), *decided], chosen, tell=tell), entries, decided)
    tell("pooling", 0.9)
    pooled = pool(entries, linked.milestone, chosen.pooling, chosen.prefer, ancestry(ledger))
    tell("writing milestones", 0.95)
    for name in ("link", "member", "milestone", "known_order"):
        ledger.run(f"DELETE FROM ledger.{name}")
    _write_links(ledger, entries, linked)
    ledger.insert(
        "ledger.member",
        {
            "entry": entries.id[pooled.member], "milestone": pooled.id[pooled.owner], "weight": pooled.weight,
            "normal": pooled.kind == 1, "low": pooled.low, "mode": pooled.mode, "high": pooled.high,
        },
    )  # fmt: skip
    frame = pooled.to_frame()
    for column, values in _attributes(ledger, entries, linked.milestone, pooled.id).items():
        frame[column] = values
    ledger.insert("ledger.milestone", frame)
    titles = dict(zip(pooled.id.tolist(), pooled.title, strict=True))
    known = orders.find(stated, dict(zip(entries.id.tolist(), linked.milestone.tolist(), strict=True)), titles)
    if known.pairs:
        earlier, later, who = zip(*known.pairs, strict=True)
        ledger.insert("ledger.known_order", {"earlier": list(earlier), "later": list(later), "stated_by": list(who)})
    strangers = [note for of_list in unknown_kin(ledger).values() for note in of_list]
    notes += [*linked.notes, *pooled.notes, *known.notes, *strangers, *_decision_notes(ledger)]
    ledger.set_about("linked", "yes")
    ledger.set_about("link_options", json.dumps(asdict(chosen)))
    ledger.set_about("link_notes", json.dumps(notes, ensure_ascii=False))
    return LinkSummary(
        entries=len(entries),
        pairs_scored=int(linked.pairs_scored),
        linked=int((linked.state == "linked").sum()),
        to_review=int((linked.state == "review").sum()),
        milestones=len(pooled),
        notes=tuple(notes),
        options=chosen,
    )


def _blocked(linked: Linked, entries: Entries, decided: Sequence[Decision]) -> Linked:
    """Pairs that a known order keeps apart are blocked; "different" is kept for what a person decided."""
    settled = {(min(d.a, d.b), max(d.a, d.b)) for d in decided}
    state = linked.state.astype(object)
    for q in np.nonzero(linked.state == "different")[0]:
        if (int(entries.id[linked.a[q]]), int(entries.id[linked.b[q]])) not in settled:
            state[q] = "blocked"
    return replace(linked, state=state.astype(np.str_))


def _nothing(ledger: Ledger, options: LinkOptions) -> LinkSummary:
    """No entry, no milestone."""
    for name in ("link", "member", "milestone", "known_order"):
        ledger.run(f"DELETE FROM ledger.{name}")
    ledger.set_about("linked", "yes")
    ledger.set_about("link_options", json.dumps(asdict(options)))
    ledger.set_about("link_notes", "[]")
    return LinkSummary(0, 0, 0, 0, 0, tuple(_decision_notes(ledger)), options)


def _write_links(ledger: Ledger, entries: Entries, linked: Linked) -> None:
    data: dict[str, Any] = {
        "a": entries.id[linked.a],
        "b": entries.id[linked.b],
        "score": linked.score,
        "state": linked.state.astype(object),
    }
    data.update({name: linked.parts[name] for name in PARTS if name in linked.parts})
    ledger.insert("ledger.link", data)


def _attributes(ledger: Ledger, entries: Entries, milestone: Ints, ids: Ints) -> dict[str, list[Any]]:
    """Category, level and parent most of a milestone's entries state (the first of equals), the mean importance, the lists by name."""
    data = ledger.columns("SELECT category, importance, level, parent FROM ledger.entry ORDER BY entry")
    stated_texts = {name: texts(data[name]) for name in ("category", "level", "parent")}
    importance: Any = np.ma.filled(np.ma.asarray(data["importance"], dtype=float), np.nan)
    order = np.lexsort((entries.id, milestone))
    starts = np.searchsorted(milestone[order], ids)
    ends = np.append(starts[1:], len(order))
    out: dict[str, list[Any]] = {name: [] for name in ("category", "importance", "level", "parent", "sources")}
    for first, last in zip(starts.tolist(), ends.tolist(), strict=True):
        members = order[first:last].tolist()
        for name, column in stated_texts.items():
            out[name].append(column[members[0]] if len(members) == 1 else _most([column[i] for i in members]))
        stated = [float(importance[i]) for i in members if not np.isnan(importance[i])]
        out["importance"].append(sum(stated) / len(stated) if stated else float("nan"))
        out["sources"].append("; ".join(dict.fromkeys(entries.sources[s] for s in sorted(int(entries.source[i]) for i in members))))
    return out


def _most(values: Sequence[str | None]) -> str | None:
    counted = Counter(v for v in values if v is not None)
    return max(counted, key=lambda v: counted[v]) if counted else None


def _decision_notes(ledger: Ledger) -> list[str]:
    words = {
        "adrift": "adrift: an entry they speak of is gone; they count again when it comes back",
        "date changed": "about entries whose date has changed since; they still count, look at them again (chronos-acc review --list)",
    }
    counts = ledger.rows(
        "SELECT status, count(*) FROM decisions WHERE status IN ('adrift', 'date changed') GROUP BY status ORDER BY status"
    )
    return [f"{n} {'decisions are' if n > 1 else 'decision is'} {words[status]}" for status, n in counts]
