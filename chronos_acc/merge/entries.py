# SPDX-License-Identifier: Apache-2.0
"""What merging takes and gives: plain arrays, no database."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
Ints = npt.NDArray[np.int64]


@dataclass(frozen=True)
class Entries:
    """Dated entries of several lists, one row an entry (k rows), in order of id.

    id (k,) stable ids; source (k,) index into ``sources``; title k strings as loaded; earliest, best, latest (k,) decimal
    years; normal (k,) True where the shape is normal; category k strings or None; present: the year ages count from.
    """

    id: Ints
    source: Ints
    sources: tuple[str, ...]
    title: tuple[str, ...]
    earliest: Floats
    best: Floats
    latest: Floats
    normal: npt.NDArray[np.bool_]
    category: tuple[str | None, ...]
    present: float

    def __len__(self) -> int:
        return len(self.id)


@dataclass(frozen=True)
class Decision:
    """What a person settled about two entries (ids): verdict is "same" or "different"."""

    a: int
    b: int
    verdict: str


@dataclass(frozen=True)
class LinkOptions:
    """Settings of linking: the probability from which a pair is accepted, and from which it waits for review."""

    accept: float = 0.5
    review: float = 0.1
    prefer: str | None = None  # list whose titles name the milestones
    pooling: str = "mixture"  # mixture, inverse_variance, random_effects, preferred


@dataclass(frozen=True)
class Linked:
    """Result of ``link``: pairs, clusters, and counts.

    Pair columns have one row a pair (q rows), a < b being positions (not ids) in Entries; state is one of linked, implied, review,
    blocked, same, different; parts maps the name of each part of the score to (q,). ``milestone`` (k,) gives each entry the
    smallest entry id of its milestone.
    """

    a: Ints
    b: Ints
    score: Floats
    state: npt.NDArray[np.str_]
    parts: dict[str, Floats]
    milestone: Ints
    pairs_scored: int
    notes: tuple[str, ...] = field(default=())
