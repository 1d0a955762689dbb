# SPDX-License-Identifier: Apache-2.0
"""Linking: entries of several lists in, milestones out."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from ..errors import WrongUse
from ..progress import Tell, silent
from .candidates import find, time_order
from .cluster import Clusters, build
from .entries import Decision, Entries, Floats, Ints, Linked, LinkOptions
from .score import Model, Scores, features, fit, rate
from .titles import Titles

LN2 = float(np.log(2.0))


def link(entries: Entries, decisions: Sequence[Decision] = (), options: LinkOptions = LinkOptions(), *, tell: Tell = silent) -> Linked:
    """Which entries name one milestone.

    Pairs of different lists whose widened datings overlap are scored by title, date and (where lists share a vocabulary) category; the
    best pairs join first, one entry of a list in a milestone, never against a decision. In ``parts``: ``title`` similarity 0 to 1, ``gap``
    years between the best dates, and in bits ``title_evidence``, ``date_evidence``, ``category_evidence``, ``prior`` and ``rivals`` (what
    rivals take away), so that without rivals the log odds are the sum of the first four. A list alone, or none, is no error: every entry
    is then its own milestone. Raises WrongUse for thresholds out of order and for decisions about entries that are not there.
    """
    if not 0 <= options.review <= options.accept <= 1:
        raise WrongUse(f"thresholds must satisfy 0 <= review <= accept <= 1; given review {options.review:g}, accept {options.accept:g}")
    order = time_order(entries)
    place = np.empty(len(order), dtype=np.int64)
    place[order] = np.arange(len(order))
    ranked = _reordered(entries, order)
    same, different = _settled(entries, place, decisions)
    tell("reading titles", 0.0)
    titles = Titles.of(ranked.title)
    found = find(ranked, titles, tell)
    tell("estimating likelihood ratios", 0.0)
    model, held, scores = fit(ranked, titles, found)
    pair_a, pair_b = found.a[held], found.b[held]
    clusters, contradicted = build(ranked.source, pair_a, pair_b, scores.score, options.accept, same, different)
    a, b, state = _states(ranked, pair_a, pair_b, scores.score, clusters, options, same, different)
    score, parts = _score_pairs(ranked, titles, model, found.near, a, b, pair_a, pair_b, scores)
    label = clusters.labels()
    smallest = np.full(len(order), np.iinfo(np.int64).max, dtype=np.int64)
    np.minimum.at(smallest, label, ranked.id)
    notes = list(model.notes) if len(np.unique(entries.source)) > 1 else []
    for i, j in contradicted:
        pair = f"{ranked.title[i]!r} and {ranked.title[j]!r}"
        notes.append(f"{pair} were decided to be the same, which contradicts other decisions: left apart")
    left, right = order[a], order[b]
    first, second = np.minimum(left, right), np.maximum(left, right)
    rows = np.lexsort((second, first))
    return Linked(
        a=first[rows],
        b=second[rows],
        score=score[rows],
        state=state[rows],
        parts={name: values[rows] for name, values in parts.items()},
        milestone=smallest[label][place],
        pairs_scored=found.pairs(ranked.source),
        notes=tuple(notes),
    )


def _reordered(entries: Entries, order: Ints) -> Entries:
    return Entries(
        id=entries.id[order], source=entries.source[order], sources=entries.sources, title=tuple(entries.title[i] for i in order),
        earliest=entries.earliest[order], best=entries.best[order], latest=entries.latest[order], normal=entries.normal[order],
        category=tuple(entries.category[i] for i in order), present=entries.present,
    )  # fmt: skip


def _settled(entries: Entries, place: Ints, decisions: Sequence[Decision]) -> tuple[list[tuple[int, int]], list[tuple[int, int]]]:
    """Decisions as ranked positions; the last word on a pair counts."""
    where = {int(i): int(p) for i, p in zip(entries.id, place, strict=True)}
    last: dict[tuple[int, int], str] = {}
    for d in decisions:
        if d.verdict not in ("same", "different"):
            raise WrongUse(f"a decision is 'same' or 'different', not {d.verdict!r}")
        if d.a not in where or d.b not in where or d.a == d.b:
            raise WrongUse(f"a decision names the entries {d.a} and {d.b}; give the ids of two entries that are in the timeline")
        pair = (min(where[d.a], where[d.b]), max(where[d.a], where[d.b]))
        last.pop(pair, None)
        last[pair] = d.verdict
    return [p for p, v in last.items() if v == "same"], [p for p, v in last.items() if v == "different"]


def _states(
    entries: Entries,
    a: Ints,
    b: Ints,
    score: Floats,
    clusters: Clusters,
    options: LinkOptions,
    same: list[tuple[int, int]],
    different: list[tuple[int, int]],
) -> tuple[Ints, Ints, np.ndarray[tuple[int], np.dtype[np.str_]]]:
    """The pairs worth showing and the state of each; positions a < b, sorted."""
    label = clusters.labels()
    state: dict[tuple[int, int], str] = {}
    inside = label[a] == label[b]
    shown = np.nonzero(inside | (score >= options.review))[0]
    for q in shown:
        accepted = score[q] >= options.accept
        state[int(a[q]), int(b[q])] = ("linked" if accepted else "implied") if inside[q] else ("blocked" if accepted else "review")
    order = np.argsort(label, kind="stable")
    for group in np.split(order, np.nonzero(np.diff(label[order]))[0] + 1):
        for x in range(len(group)):
            for y in range(x + 1, len(group)):
                i, j = sorted((int(group[x]), int(group[y])))
                if entries.source[i] != entries.source[j]:
                    state.setdefault((i, j), "implied")
    state.update({pair: "same" if clusters.together(*pair) else "blocked" for pair in same})
    state.update({pair: "different" for pair in different})
    pairs = sorted(state)
    both = np.array(pairs, dtype=np.int64).reshape(-1, 2)
    return both[:, 0], both[:, 1], np.array([state[p] for p in pairs], dtype=np.str_)


def _score_pairs(
    entries: Entries, titles: Titles, model: Model, near: Ints, a: Ints, b: Ints, rival_a: Ints, rival_b: Ints, scores: Scores
) -> tuple[Floats, dict[str, Floats]]:
    """Scores and parts of the pairs shown. Candidates keep theirs; others (joined through a third, or by a decision) are scored as if they
    stood alone."""
    similarity, met = titles.compare(a, b)
    seen = features(entries, titles, a, b, similarity, met, near, model.comparable)
    alone = rate(model, seen, np.arange(len(a)), np.arange(len(a), 2 * len(a)), 2 * len(a) + 1)
    k = len(entries)
    keys = rival_a * k + rival_b
    order = np.argsort(keys)
    wanted = a * k + b
    at = np.minimum(np.searchsorted(keys[order], wanted), max(len(keys) - 1, 0))
    known = (keys[order][at] == wanted) if len(keys) else np.zeros(len(a), dtype=bool)
    score, rivals = alone.score.copy(), alone.rivals.copy()
    if len(keys):
        score[known] = scores.score[order][at][known]
        rivals[known] = scores.rivals[order][at][known]
    parts = {
        "title": similarity,
        "gap": np.abs(entries.best[a] - entries.best[b]),
        "title_evidence": alone.title / LN2,
        "date_evidence": alone.date / LN2,
        "category_evidence": alone.category / LN2,
        "prior": alone.prior / LN2,
        "rivals": rivals / LN2,
    }
    return score, parts
