# SPDX-License-Identifier: Apache-2.0
"""The probability that two entries name one milestone (Fellegi and Sunter 1969, JASA 64:1183-1210).

Three parts of evidence, each a likelihood ratio "same milestone" against "chance": how alike the titles are, how far apart the dates, and
the category where two lists share a vocabulary. The chance half of titles is measured: on pairs of different lists too far apart in time
to be the same, then on neighbours within one list, which are different by being listed twice. The other half comes from EM, the ratio kept
monotone (more alike is never evidence against). Counts are added to a prior model, written out below, that carries the score where a set
is too small to estimate from. The odds of a pair stand beside those of its rivals: an entry has at most one partner in a list.
"""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

from .candidates import Bools, Candidates, close_in_time, slack
from .entries import Entries, Floats, Ints
from .titles import Titles

# Title similarity: the first bin holds everything below the least similarity kept.
TITLE_EDGES = np.concatenate([[0.0, 0.12], np.arange(0.2, 0.951, 0.05), [0.985, 1.0]])
DATE_EDGES = np.array([0.0, 0.02, 0.07, 0.15, 0.3, 0.5, 0.75, 1.0])
# The prior model, rounded from invented lists, and how many pairs each part of it is worth.
CHANCE_COUNT = 2000.0
SAME_COUNT = 60.0
SHARE_LISTED = 0.4  # of the shorter list, also in the other
CATEGORY_AGREES = 0.9  # of same milestones
CHANCE_AGREES = 0.3  # of different ones
NONE_SHARED = 0.01  # same milestones whose titles share no distinctive word: "Origin of X" and "Origin of Y" are no such pair
NONE_SHARED_COUNT = 200.0
PRECISE_DATES = np.array([0.26, 0.24, 0.18, 0.15, 0.09, 0.05, 0.03])
WIDE_DATES = np.array([0.12, 0.18, 0.20, 0.20, 0.15, 0.10, 0.05])
FAR_SAMPLE = 150_000
MESSAGES = 12
STRONGEST = 25.0  # log odds; beyond, differences between floats would lose the rivals
HOPELESS = -7.0  # log odds under the prior model: one in a thousand
ROUNDS = 25
STRATA = 3
MOST_SHARED = 0.75  # no two lists are so alike that an entry without a partner would be a surprise


def _decaying(scale: float) -> Floats:
    """Shares of the bins from the second, falling by a factor e every ``scale`` of similarity."""
    centre = 0.5 * (TITLE_EDGES[1:] + TITLE_EDGES[:-1])
    density = np.exp(-centre / scale) * np.diff(TITLE_EDGES)
    density[0] = 0.0
    return np.asarray(density / density.sum())


def _prior_chance() -> Floats:
    """(2, bins) different milestones by similarity: no distinctive word shared, one shared."""
    lowest = np.eye(len(TITLE_EDGES) - 1)[0]
    return np.stack([0.83 * lowest + 0.12 * _decaying(0.12), 0.01 * lowest + 0.04 * _decaying(0.10)])


def _prior_same() -> Floats:
    """(2, bins) same milestones by similarity, each row summing to 1: no distinctive word shared, one shared."""
    shared = np.interp(TITLE_EDGES, [0.0, 0.12, 0.3, 0.5, 0.7, 0.9, 1.0], [0.0, 0.01, 0.03, 0.09, 0.27, 0.64, 1.0])
    return np.stack([0.2 * np.eye(len(TITLE_EDGES) - 1)[0] + 0.8 * _decaying(0.15), np.diff(shared)])


@dataclass(frozen=True)
class Scores:
    """Score (q,) and its parts: natural logarithms of likelihood ratios and odds, one row a pair."""

    score: Floats
    title: Floats
    date: Floats
    category: Floats
    prior: Floats
    rivals: Floats


@dataclass(frozen=True)
class Model:
    """Both halves of each part, ready to score any pair."""

    title_ratio: Floats  # (strata + 1, bins) log likelihood ratio, see _title_ratio
    date_ratio: Floats  # (2, bins) precise, wide
    category_ratio: Floats  # (2,) disagree, agree
    share: Floats  # (lists, lists) expected share of the shorter list that the other names too
    comparable: Bools  # (lists, lists) lists that share a vocabulary of categories
    notes: tuple[str, ...] = ()


@dataclass(frozen=True)
class Features:
    """What the model looks at, one row a pair."""

    step: Ints  # title similarity: the bin centre below
    rest: Floats  # and the way from there to the next, 0 to 1
    met: Bools  # a distinctive word of one title is met in the other
    stratum: Ints  # how much the shorter of the two titles says: 0 little to 2 much
    date_bin: Ints
    regime: Ints
    agree: Ints  # 0 disagree, 1 agree, -1 no part
    list_a: Ints
    list_b: Ints
    crowd: Floats  # the larger of the two numbers of candidates

    def only(self, chosen: Bools) -> Features:
        """The same for some of the pairs."""
        return Features(*(getattr(self, f.name)[chosen] for f in fields(self)))


def features(entries: Entries, titles: Titles, a: Ints, b: Ints, similarity: Floats, met: Bools, near: Ints, comparable: Bools) -> Features:
    """Features of pairs at positions a and b."""
    room = slack(entries)
    reach = 0.5 * (entries.latest - entries.earliest) + room
    gap = np.abs(entries.best[a] - entries.best[b]) / (reach[a] + reach[b])
    wide = (room[a] + room[b]) / (reach[a] + reach[b]) < 0.6
    list_a, list_b = entries.source[a], entries.source[b]
    centre = 0.5 * (TITLE_EDGES[1:] + TITLE_EDGES[:-1])
    position = np.interp(similarity, centre, np.arange(len(centre), dtype=float))
    step = np.minimum(position.astype(np.int64), len(centre) - 2)
    code = _category_codes(entries)
    known = (code[a] >= 0) & (code[b] >= 0) & comparable[list_a, list_b]
    return Features(
        step=step,
        rest=position - step,
        met=met,
        stratum=_strata(titles, a, b),
        date_bin=np.clip(np.searchsorted(DATE_EDGES, np.minimum(gap, 1.0), side="left") - 1, 0, len(DATE_EDGES) - 2).astype(np.int64),
        regime=wide.astype(np.int64),
        agree=np.where(known, (code[a] == code[b]).astype(np.int64), -1),
        list_a=list_a,
        list_b=list_b,
        crowd=np.maximum(np.maximum(near[a, list_b], near[b, list_a]), 1).astype(float),
    )


def fit(entries: Entries, titles: Titles, found: Candidates) -> tuple[Model, Bools, Scores]:
    """Estimate the model on the candidates; which of them (q,) have a chance at all, and the scores of those."""
    comparable = _shared_vocabulary(entries)
    chance, far_pairs = _measured_chance(entries, titles, found)
    seen = features(entries, titles, found.a, found.b, found.similarity, found.met, found.near, comparable)
    k, lists = len(entries), len(entries.sources)
    key_a, key_b = found.a * lists + seen.list_b, found.b * lists + seen.list_a
    share = np.full((lists, lists), SHARE_LISTED)
    dates = np.log(np.stack([PRECISE_DATES, WIDE_DATES])) - np.log(np.diff(DATE_EDGES))
    category = np.log(np.array([(1 - CATEGORY_AGREES) / (1 - CHANCE_AGREES), CATEGORY_AGREES / CHANCE_AGREES]))
    nothing = seen.only(np.zeros(len(found.a), dtype=bool))
    model = Model(_title_ratio(nothing, found.a[:0], np.zeros(0), chance), dates, category, share, comparable)
    first = log_odds_parts(model, seen)
    others = seen.only(first[0] < 0)  # how dates and categories agree by chance is measured on neighbours of unlike titles
    date_chance, agree_chance = _date_chance(others), _agree_chance(others)
    held: Bools = first[0] + first[1] + first[2] + first[3] > HOPELESS  # the rest cannot rise, and in a crowded span it is nearly all
    some, some_a, some_b = seen.only(held), key_a[held], key_b[held]
    title_bin = _title_bin(found.similarity[held])
    size = np.bincount(entries.source, minlength=lists).astype(float)
    shorter = np.minimum(size[:, None], size[None, :])
    scores = rate(model, some, some_a, some_b, k * lists)
    for _ in range(ROUNDS):
        p = scores.score
        model = Model(
            _title_ratio(some, title_bin, p, chance), _date_ratio(some, p, date_chance), _category_ratio(some, p, agree_chance),
            _share(some, p, shorter), comparable,
        )  # fmt: skip
        scores = rate(model, some, some_a, some_b, k * lists)
        if np.abs(scores.score - p).max(initial=0.0) < 3e-3:
            break
    notes = _remarks(far_pairs, float(scores.score.sum()))
    return Model(model.title_ratio, model.date_ratio, model.category_ratio, model.share, comparable, notes), held, scores


def rate(model: Model, seen: Features, key_a: Ints, key_b: Ints, keys: int) -> Scores:
    """Probability of each pair: its odds against chance, divided among those that would take the same place in the other list.

    key_a and key_b (q,) number the places: a's partner in b's list, and b's partner in a's list; below ``keys``. An entry has one partner
    in a list at most, so that a rival with a better partner of its own takes little away: sum-product messages over the pairs (exact where
    rivals form no circle).
    """
    title, date, category, prior = log_odds_parts(model, seen)
    log_odds = np.clip(title + date + category + prior, -STRONGEST, STRONGEST)
    odds = np.exp(log_odds)
    free_a = free_b = np.ones(len(odds))  # chance that a (b) has no partner but this one
    for _ in range(MESSAGES):
        from_a, from_b = odds * free_a, odds * free_b
        taken = 1 + np.bincount(key_a, weights=from_b, minlength=keys) + np.bincount(key_b, weights=from_a, minlength=keys)
        new_a, new_b = 1 / np.maximum(taken[key_a] - from_b, 1.0), 1 / np.maximum(taken[key_b] - from_a, 1.0)
        moved = max(np.abs(new_a - free_a).max(initial=0.0), np.abs(new_b - free_b).max(initial=0.0))
        free_a, free_b = 0.5 * (free_a + new_a), 0.5 * (free_b + new_b)
        if moved < 1e-3:
            break
    rivals = -np.log(free_a * free_b)
    return Scores(1 / (1 + np.exp(rivals - log_odds)), title, date, category, prior, rivals)


def log_odds_parts(model: Model, seen: Features) -> tuple[Floats, Floats, Floats, Floats]:
    """Log likelihood ratios of title, date and category, and the log prior odds."""
    row = np.where(seen.met, seen.stratum, STRATA)
    title = model.title_ratio[row, seen.step] * (1 - seen.rest) + model.title_ratio[row, seen.step + 1] * seen.rest
    date = model.date_ratio[seen.regime, seen.date_bin]
    category = np.where(seen.agree < 0, 0.0, model.category_ratio[np.maximum(seen.agree, 0)])
    share = model.share[seen.list_a, seen.list_b]
    return title, date, category, np.log(share / (1 - share)) - np.log(seen.crowd)


def _title_bin(similarity: Floats) -> Ints:
    return np.asarray(np.clip(np.searchsorted(TITLE_EDGES, similarity, side="right") - 1, 0, len(TITLE_EDGES) - 2), dtype=np.int64)


def _strata(titles: Titles, a: Ints, b: Ints) -> Ints:
    """(q,) third of the titles' weights in which the lighter of two titles lies: "Drum" and "Drum" agree by chance more often than longer
    titles do."""
    edges = np.quantile(titles.mass, [1 / 3, 2 / 3]) if len(titles) else np.zeros(2)
    return np.asarray(np.searchsorted(edges, np.minimum(titles.mass[a], titles.mass[b]), side="left"), dtype=np.int64)


def _title_ratio(seen: Features, title_bin: Ints, p: Floats, chance: Floats) -> Floats:
    """(strata + 1, bins) log likelihood ratios of titles: the last row where no distinctive word is shared, the others by stratum where
    one is.

    Of same milestones without a shared distinctive word only the share is estimated, so that a handful of pairs cannot vouch for
    themselves.
    """
    bins = chance.shape[1]
    alone, shared = _prior_same()
    none = (p[~seen.met].sum() + NONE_SHARED_COUNT * NONE_SHARED) / (p.sum() + NONE_SHARED_COUNT)
    count = np.bincount(seen.stratum * bins + title_bin, weights=p * seen.met, minlength=STRATA * bins).reshape(STRATA, bins)
    overall = count.sum(axis=0) + SAME_COUNT * shared
    overall /= overall.sum()
    out = np.empty_like(chance)
    for g in range(STRATA):
        mass = count[g] + SAME_COUNT * overall
        out[g] = _monotone_log_ratio((1 - none) * mass / mass.sum(), chance[g])
    out[STRATA] = _monotone_log_ratio(none * alone, chance[STRATA])
    return out


def _measured_chance(entries: Entries, titles: Titles, found: Candidates) -> tuple[Floats, int]:
    """Distribution of titles among different milestones, rows as in ``_title_ratio``, and the number of far pairs it rests on."""
    a, b = _far_pairs(entries)
    bins = len(TITLE_EDGES) - 1
    similarity, met = titles.compare(a, b)
    at, stratum = _title_bin(similarity), _strata(titles, a, b)
    far = np.bincount((stratum * 2 + met) * bins + at, minlength=STRATA * 2 * bins).reshape(STRATA, 2, bins)
    overall = (far.sum(axis=0) + CHANCE_COUNT * _prior_chance()) / (len(a) + CHANCE_COUNT)
    by_stratum = (far + CHANCE_COUNT * overall) / (far.sum(axis=(1, 2)) + CHANCE_COUNT)[:, None, None]
    total = found.pairs_within(entries.source)
    within = np.bincount(found.within_met * bins + _title_bin(found.within), minlength=2 * bins).reshape(2, bins).astype(float)
    within[:, -1] = 0.0  # the very same title twice in one list may be one milestone listed twice
    within[0, 0] += max(total - len(found.within), 0)
    lift = (within + CHANCE_COUNT * overall) / (within.sum() + CHANCE_COUNT) / overall
    return np.vstack([by_stratum[:, 1] * lift[1], overall[0] * lift[0]]), len(a)


def _far_pairs(entries: Entries) -> tuple[Ints, Ints]:
    """Pairs of different lists that stay apart with twice the slack: all of them in small sets, else a fixed sample."""
    k = len(entries)
    if k * (k - 1) // 2 <= FAR_SAMPLE:
        a, b = (x.astype(np.int64) for x in np.triu_indices(k, 1))
    else:
        rng = np.random.default_rng([k, 20_001])
        a, b = rng.integers(k, size=FAR_SAMPLE), rng.integers(k, size=FAR_SAMPLE)
    apart = (entries.source[a] != entries.source[b]) & ~close_in_time(entries, a, b, 2.0)
    return a[apart], b[apart]


def _monotone_log_ratio(same: Floats, chance: Floats) -> Floats:
    """Log of same/chance made non-decreasing: isotonic regression of the ratio with weights chance (the maximum-likelihood monotone
    ratio)."""
    from scipy.optimize import isotonic_regression

    ratio = isotonic_regression(same / chance, weights=chance).x
    return np.asarray(np.log(np.maximum(ratio, 1e-12)))


def _date_chance(others: Features) -> Floats:
    """(2, bins) distribution of the gap between dates of different milestones close in time, precise and wide."""
    bins = len(DATE_EDGES) - 1
    count = np.bincount(others.regime * bins + others.date_bin, minlength=2 * bins).reshape(2, bins) + SAME_COUNT * np.diff(DATE_EDGES)
    return np.asarray(count / count.sum(axis=1, keepdims=True))


def _date_ratio(seen: Features, p: Floats, chance: Floats) -> Floats:
    bins = len(DATE_EDGES) - 1
    count = np.bincount(seen.regime * bins + seen.date_bin, weights=p, minlength=2 * bins).reshape(2, bins)
    mass = count + SAME_COUNT * np.stack([PRECISE_DATES, WIDE_DATES])
    same = mass / mass.sum(axis=1, keepdims=True)
    return -np.stack([_monotone_log_ratio(c, s) for c, s in zip(chance, same, strict=True)])  # nearer is never evidence against


def _agree_chance(others: Features) -> float:
    """Share of different milestones close in time whose categories agree."""
    known = others.agree >= 0
    return float(((others.agree == 1).sum() + SAME_COUNT * CHANCE_AGREES) / (known.sum() + SAME_COUNT))


def _category_ratio(seen: Features, p: Floats, chance: float) -> Floats:
    same = (p[seen.agree == 1].sum() + SAME_COUNT * CATEGORY_AGREES) / (p[seen.agree >= 0].sum() + SAME_COUNT)
    same = float(np.clip(same, chance, 0.99))  # agreement is never evidence against, and disagreement never rules out
    return np.asarray(np.log(np.array([(1 - same) / (1 - chance), same / chance])))


def _share(seen: Features, p: Floats, shorter: Floats) -> Floats:
    """Expected share of the shorter list named by the other, for each two lists, shrunk towards the share over all."""
    lists = len(shorter)
    matched = np.bincount(seen.list_a * lists + seen.list_b, weights=p, minlength=lists * lists).reshape(lists, lists)
    matched = matched + matched.T
    i, j = np.triu_indices(lists, 1)
    overall = (matched[i, j].sum() + 10 * SHARE_LISTED) / (shorter[i, j].sum() + 10)
    return np.asarray(np.clip((matched + 10 * overall) / (shorter + 10), 0.01, MOST_SHARED))


def _category_codes(entries: Entries) -> Ints:
    names = {c: i for i, c in enumerate(sorted({c.casefold().strip() for c in entries.category if c}))}
    return np.array([names[c.casefold().strip()] if c else -1 for c in entries.category], dtype=np.int64)


def _shared_vocabulary(entries: Entries) -> Bools:
    """(lists, lists) True where two lists use the same categories: two at least, and most of each list's entries in words of the other."""
    code, lists = _category_codes(entries), len(entries.sources)
    out = np.zeros((lists, lists), dtype=bool)
    used = [code[(entries.source == s) & (code >= 0)] for s in range(lists)]
    for i in range(lists):
        for j in range(lists):
            common = np.intersect1d(used[i], used[j])
            if i != j and len(common) >= 2:
                out[i, j] = min(np.isin(used[i], common).mean(), np.isin(used[j], common).mean()) >= 0.8
    return out


def _remarks(far_pairs: int, matched: float) -> tuple[str, ...]:
    notes = []
    if far_pairs < CHANCE_COUNT:
        notes.append(
            f"only {far_pairs} pairs lie far enough apart in time to show how alike titles are by chance: "
            "a prior model carries part of the scores"
        )
    if matched < 2 * SAME_COUNT:
        notes.append(
            "too few pairs look alike to estimate how titles and dates of one milestone differ: a prior model carries part of the scores"
        )
    return tuple(notes)
