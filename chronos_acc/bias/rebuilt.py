# SPDX-License-Identifier: Apache-2.0
"""A record merged anew from the entries: what the merging checks vary."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import numpy.typing as npt

from ..merge.entries import Entries
from ..merge.pool import pool
from ..record import Record

Ints = npt.NDArray[np.int64]
Bools = npt.NDArray[np.bool_]


def of_record(record: Record, entries: Entries, milestone: Ints) -> tuple[Entries, Ints, Bools]:
    """Entries of the record's lists, their milestones, and which of them belong to milestones of the record (the rest were
    filtered out of it).
    """
    place = {name: i for i, name in enumerate(record.lists)}
    chosen = np.array([s in place for s in entries.sources], dtype=bool)[entries.source] if len(entries) else np.zeros(0, bool)
    pick = np.nonzero(chosen)[0]
    mine = Entries(
        id=entries.id[pick],
        source=np.array([place[entries.sources[s]] for s in entries.source[pick]], dtype=np.int64),
        sources=record.lists,
        title=tuple(entries.title[i] for i in pick),
        earliest=entries.earliest[pick],
        best=entries.best[pick],
        latest=entries.latest[pick],
        normal=entries.normal[pick],
        category=tuple(entries.category[i] for i in pick),
        present=entries.present,
    )
    labels = np.asarray(milestone, dtype=np.int64)[pick]
    return mine, labels, np.isin(labels, record.id)


def merged(record: Record, entries: Entries, labels: Ints, belongs: Bools, *, rule: str = "mixture", prefer: str | None = None) -> Record:
    """The record with other milestones: entries of one label are one milestone. Milestones none of whose entries belonged to the
    record stay out.
    """
    kept = np.unique(labels[belongs])
    pick = np.isin(labels, kept)
    where = np.nonzero(pick)[0]
    part = _picked(entries, where)
    pooled = pool(part, labels[pick], rule, prefer)
    mentions = np.zeros((len(pooled), len(record.lists)), bool)
    mentions[pooled.owner, pooled.source] = True
    return replace(
        record,
        id=pooled.id,
        title=pooled.title,
        best=pooled.best,
        earliest=pooled.earliest,
        latest=pooled.latest,
        unit=pooled.unit,
        sd=pooled.sd,
        owner=pooled.owner,
        source=pooled.source,
        weight=pooled.weight,
        kind=pooled.kind,
        low=pooled.low,
        mode=pooled.mode,
        high=pooled.high,
        mentions=mentions,
        category=_first(pooled.owner, [part.category[i] for i in pooled.member], len(pooled)),
        importance=np.full(len(pooled), np.nan),
        level=(None,) * len(pooled),
        parent=(None,) * len(pooled),
        orders=(),
    )


def _picked(entries: Entries, where: Ints) -> Entries:
    return replace(
        entries,
        id=entries.id[where],
        source=entries.source[where],
        title=tuple(entries.title[i] for i in where),
        earliest=entries.earliest[where],
        best=entries.best[where],
        latest=entries.latest[where],
        normal=entries.normal[where],
        category=tuple(entries.category[i] for i in where),
    )


def _first(owner: Ints, values: Sequence[str | None], m: int) -> tuple[str | None, ...]:
    out: list[str | None] = [None] * m
    for o, v in zip(owner, values, strict=True):
        if out[o] is None:
            out[o] = v
    return tuple(out)
