# SPDX-License-Identifier: Apache-2.0
"""From scored pairs to milestones: the best pair first, one entry of a list in a milestone, never against a decision."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from .entries import Floats, Ints


class Clusters:
    """Entries joined step by step; a join that would put two entries of one list together, or two that a person parted, is refused."""

    def __init__(self, source: Ints) -> None:
        self._root = list(range(len(source)))
        self._members = [[i] for i in range(len(source))]
        self._lists = [{int(s)} for s in source]
        self._apart: list[set[int]] = [set() for _ in source]

    def root(self, i: int) -> int:
        """The entry that stands for i's cluster."""
        while self._root[i] != i:
            self._root[i] = self._root[self._root[i]]
            i = self._root[i]
        return i

    def part(self, i: int, j: int) -> None:
        """Keep i and j in different clusters from now on."""
        i, j = self.root(i), self.root(j)
        self._apart[i].add(j)
        self._apart[j].add(i)

    def together(self, i: int, j: int) -> bool:
        """Whether i and j stand in one cluster."""
        return self.root(i) == self.root(j)

    def join(self, i: int, j: int, settled: bool = False) -> bool:
        """Join the clusters of i and j; False where that is not allowed.

        ``settled``: a person said so, and one list may then give two entries.
        """
        i, j = self.root(i), self.root(j)
        if i == j:
            return True
        if j in self._apart[i] or (not settled and self._lists[i] & self._lists[j]):
            return False
        if len(self._members[i]) < len(self._members[j]):
            i, j = j, i
        self._root[j] = i
        self._members[i] += self._members[j]
        self._lists[i] |= self._lists[j]
        for other in self._apart[j]:
            self._apart[other].discard(j)
            self._apart[other].add(i)
        self._apart[i] |= self._apart[j]
        return True

    def labels(self) -> Ints:
        """(k,) the root of each entry."""
        return np.array([self.root(i) for i in range(len(self._root))], dtype=np.int64)


def build(
    source: Ints,
    a: Ints,
    b: Ints,
    score: Floats,
    accept: float,
    same: Sequence[tuple[int, int]],
    different: Sequence[tuple[int, int]],
) -> tuple[Clusters, list[tuple[int, int]]]:
    """Clusters from pairs (positions) and decisions, and the decisions "same" that contradict others and were left out."""
    clusters = Clusters(source)
    for i, j in different:
        clusters.part(i, j)
    contradicted = [(i, j) for i, j in same if not clusters.join(i, j, settled=True)]
    accepted = np.nonzero(score >= accept)[0]
    for q in accepted[np.lexsort((b[accepted], a[accepted], -score[accepted]))]:
        clusters.join(int(a[q]), int(b[q]))
    return clusters, contradicted
