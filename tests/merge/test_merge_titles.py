# SPDX-License-Identifier: Apache-2.0
"""Titles compared word by word."""

from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from chronos_acc.merge.titles import Titles, grams_of, words_of

FILLER = ["First lighthouse", "Silk loom", "Origin of maize", "Copper smelting", "Invention of the kiln", "Earliest canal",
"Theatre of Denar", "Salt trade"]


def likeness(a: str, b: str, among: list[str] = FILLER) -> float:
    return float(Titles.of([a, b, *among]).compare(np.array([0]), np.array([1]))[0][0])


def test_words_fold_case_accents_possessives_and_grammar() -> None:
    assert words_of("The Kiln's Élan, of 1,200 — No. IV") == ("kiln", "elan", "1200", "no", "4")
    assert words_of("of the") == ("of", "the")
    assert words_of(" ?? ") == ("??",)


def test_a_word_with_digits_has_itself_as_its_only_gram() -> None:
    assert grams_of("mark2") == {"\x00mark2"}
    assert "ki" in grams_of("kiln") and "\x02ki" in grams_of("kiln")


def test_spelling_order_and_inflection_matter_little() -> None:
    assert likeness("Domestication of cattle", "Cattle, domesticated") > 0.7
    assert likeness("Hydraulic furnace of Denar", "Denar: hydrualic furnace") > 0.75
    assert likeness("Hydraulic furnace of Denar", "furnace of Denar, hydraulic") == 1.0


def test_a_shared_beginning_is_not_likeness() -> None:
    assert likeness("Origin of writing", "Origin of farming") < 0.35
    similarity, met = Titles.of(["Origin of writing", "Origin of farming", "writing originates"]).compare(np.array([0, 0]), np.array([1,
    2]))
    assert similarity[0] < 0.35 < similarity[1] and met.tolist() == [False, True]


def test_digits_agree_exactly_or_not_at_all() -> None:
    same, other = likeness("Probe 11 lands", "Probe 11 landing"), likeness("Probe 11 lands", "Probe 12 landing")
    assert same - other > 0.25
    assert likeness("Great drought II", "Great drought 2") == 1.0


def test_a_misspelt_common_word_stays_common() -> None:
    titles = Titles.of([*(f"Forging of {x}" for x in ("amber", "bells", "coins", "doors", "edges", "flints")), "Fogring of gates",
    "Rare gates"])
    weights = titles.own[6].toarray().real.ravel()
    assert sorted(weights[weights > 0])[0] < 0.8 * sorted(weights[weights > 0])[1]


@settings(max_examples=60, deadline=None)
@given(st.lists(st.text(max_size=20), min_size=2, max_size=8))
def test_likeness_is_symmetric_between_0_and_1_and_1_with_itself(titles: list[str]) -> None:
    all_titles = Titles.of(titles)
    a, b = (x.ravel() for x in np.indices((len(titles), len(titles))))
    value, met = all_titles.compare(a, b)
    back, met_back = all_titles.compare(b, a)
    assert np.allclose(value, back) and np.array_equal(met, met_back)
    assert (value >= 0).all() and (value <= 1).all() and np.allclose(value[a == b], 1) and met[a == b].all()


def test_blocks_agree_with_pairs() -> None:
    titles = Titles.of([*FILLER, *(t.replace("i", "y") for t in FILLER), *(f"First {t}" for t in FILLER)])
    i, j, score, met = titles.block(slice(3, 11), slice(0, 24), 1e-9)
    pairs, distinct = titles.compare(i, j)
    assert np.allclose(score, pairs) and np.array_equal(met, distinct)
    a, b = (x.ravel() for x in np.indices((8, 24)))
    assert len(i) == (titles.compare(a + 3, b)[0] > 1e-9).sum()


def test_against_a_plain_second_implementation() -> None:
    texts = [*FILLER, "Silkk loom of Denar", "Kiln invented", "canal"]
    titles = Titles.of(texts)
    words = sorted({w for t in texts for w in words_of(t)})
    index = {w: i for i, w in enumerate(words)}
    weight = {w: titles.own[[k]].toarray().real.ravel()[index[w]] for k, t in enumerate(texts) for w in words_of(t)}
    seen = {g: sum(g in grams_of(w) for w in words) for w in words for g in grams_of(w)}
    rare = {g: np.log1p((len(words) + 50) / (n + 1)) for g, n in seen.items()}

    def alike(x: str, y: str) -> float:
        dice = 2 * sum(rare[g] for g in grams_of(x) & grams_of(y)) / sum(rare[g] for w in (x, y) for g in grams_of(w))
        return dice if dice >= 0.35 else 0.0

    for a in range(len(texts)):
        for b in range(len(texts)):
            mine, other = words_of(texts[a]), words_of(texts[b])
            met = sum(weight[w] * max(alike(w, v) for v in other) for w in mine) + sum(weight[v] * max(alike(w, v) for w in mine) for v in
            other)
            expected = met / (sum(weight[w] for w in mine) + sum(weight[v] for v in other))
            assert abs(float(titles.compare(np.array([a]), np.array([b]))[0][0]) - expected) < 1e-6
