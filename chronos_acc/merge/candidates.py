# SPDX-License-Identifier: Apache-2.0
"""Which pairs of entries are near enough in time to be compared, found without looking at all of them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ..progress import Tell, silent
from .entries import Entries, Floats, Ints
from .titles import Titles

Bools = npt.NDArray[np.bool_]

SLACK_YEARS = 7.5  # each dating is widened on each side by this, or by
SLACK_SHARE = 0.025  # this share of its age, whichever is more
LEAST_SIMILARITY = 0.12  # pairs below are counted, and never kept: their titles share a common word at most
BLOCK = 256


@dataclass(frozen=True)
class Candidates:
    """Pairs close in time whose titles have something in common, and the counts of all that are close in time.

    a, b (q,) positions, a < b, similarity (q,) of their titles, met (q,) whether they share a distinctive word; within, within_met (r,)
    the same for pairs of one list that are as close in time (they are different milestones, so they show how alike neighbours are by
    chance); near (k, lists) how many entries of each list are close to each entry.
    """

    a: Ints
    b: Ints
    similarity: Floats
    met: Bools
    within: Floats
    within_met: Bools
    near: Ints

    def pairs(self, source: Ints) -> int:
        """Pairs of different lists close in time."""
        own = self.near[np.arange(len(source)), source].sum()
        return int((self.near.sum() - own) // 2)

    def pairs_within(self, source: Ints) -> int:
        """Pairs of one list close in time."""
        own = self.near[np.arange(len(source)), source]
        return int((own.sum() - len(source)) // 2)


def slack(entries: Entries) -> Floats:
    """(k,) years by which each dating is widened on each side."""
    return np.asarray(np.maximum(SLACK_YEARS, SLACK_SHARE * np.maximum(entries.present - entries.best, 0.0)))


def close_in_time(entries: Entries, a: Ints, b: Ints, times: float = 1.0) -> Bools:
    """(q,) whether the widened datings of a and b overlap, the widening taken ``times`` over."""
    room = times * slack(entries)
    low, high = entries.earliest - room, entries.latest + room
    return np.asarray((low[a] <= high[b]) & (low[b] <= high[a]))


def find(entries: Entries, titles: Titles, tell: Tell = silent) -> Candidates:
    """Candidates among entries sorted by the lower end of their widened datings (see ``time_order``)."""
    room = slack(entries)
    low, high, source = entries.earliest - room, entries.latest + room, entries.source
    k = len(entries)
    left, right, similarity, met, within, within_met = [], [], [], [], [], []
    for first in range(0, k, BLOCK):
        last = min(first + BLOCK, k)
        reach = int(np.searchsorted(low, high[first:last].max(), side="right"))
        i, j, score, distinct = titles.block(slice(first, last), slice(first, reach), LEAST_SIMILARITY)
        kept = (i < j) & (low[j] <= high[i])  # sorted by the lower end: the later of the two starts within the earlier, or they are apart
        i, j, score, distinct = i[kept], j[kept], score[kept], distinct[kept]
        other = source[i] != source[j]
        left.append(i[other])
        right.append(j[other])
        similarity.append(score[other])
        met.append(distinct[other])
        within.append(score[~other])
        within_met.append(distinct[~other])
        tell("comparing titles", last / k)
    near = np.zeros((k, len(entries.sources)), dtype=np.int64)
    for s in np.unique(source):
        mine = source == s
        near[:, s] = np.searchsorted(np.sort(low[mine]), high, side="right") - np.searchsorted(np.sort(high[mine]), low, side="left")
    none, empty, neither = np.zeros(0, dtype=np.int64), np.zeros(0), np.zeros(0, dtype=bool)
    return Candidates(
        np.concatenate([none, *left]),
        np.concatenate([none, *right]),
        np.concatenate([empty, *similarity]),
        np.concatenate([neither, *met]),
        np.concatenate([empty, *within]),
        np.concatenate([neither, *within_met]),
        near,
    )


def time_order(entries: Entries) -> Ints:
    """Positions sorted by the lower end of the widened datings; ties by what the entries say, so that the order of rows never matters."""
    low = entries.earliest - slack(entries)
    return np.array(
        sorted(
            range(len(entries)),
            key=lambda i: (low[i], entries.latest[i], entries.best[i], entries.title[i], entries.sources[entries.source[i]], entries.id[i]),
        ),
        dtype=np.int64,
    )
