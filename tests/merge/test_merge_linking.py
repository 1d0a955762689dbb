# SPDX-License-Identifier: Apache-2.0
"""Linking: known pairs, properties, decisions, degenerate sets, and the gold targets on a few seeds."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np
import pytest

from chronos_acc.errors import WrongUse
from chronos_acc.merge import Decision, Entries, Linked, LinkOptions, link
from tests.generate_gold import pairs_inside, precision_recall, spelling_gold, synonym_gold

Row = tuple[str, str, float]


def entries_of(rows: Sequence[Row], category: Sequence[str | None] | None = None) -> Entries:
    names = sorted({r[0] for r in rows})
    year = np.array([r[2] for r in rows], dtype=float)
    k = len(rows)
    return Entries(
        np.arange(1, k + 1, dtype=np.int64), np.array([names.index(r[0]) for r in rows], dtype=np.int64), tuple(names), tuple(r[1] for r in
        rows), year, year + 0.5, year + 1, np.zeros(k, dtype=bool), tuple(category or [None] * k), 2025.0,
    )  # fmt: skip


def states(linked: Linked) -> dict[tuple[int, int], str]:
    return {(int(a) + 1, int(b) + 1): str(s) for a, b, s in zip(linked.a, linked.b, linked.state, strict=True)}


NORTH: list[Row] = [("north", "Origin of glass", 1500), ("north", "Hydraulic furnace", 1520), ("north", "Silk loom of Denar", 1531),
("north", "Canal lock", 1560)]
SOUTH: list[Row] = [("south", "Glass", 1501), ("south", "Furnace, hydraulic", 1520), ("south", "Slik loom of Denar", 1533), ("south",
"Public census", 1558)]


def test_known_pairs_of_two_small_lists() -> None:
    linked = link(entries_of(NORTH + SOUTH))
    assert linked.milestone.tolist() == [1, 2, 3, 4, 1, 2, 3, 8]
    assert states(linked) == {(1, 5): "linked", (2, 6): "linked", (3, 7): "linked"}
    assert linked.pairs_scored == sum(abs(a[2] - b[2]) <= 26 for a in NORTH for b in SOUTH)  # a year and 5 % of about 500
    assert any("prior model" in n for n in linked.notes)
    assert set(linked.parts) == {"title", "gap", "title_evidence", "date_evidence", "category_evidence", "prior", "rivals"}


@pytest.mark.parametrize(
    "one, other",
    [("Origin of birds", "Origin of mammals"), ("First printed book", "First printed map"), ("Great flood I", "Great flood II"),
    ("Probe 11", "Probe 12")],
)
def test_a_shared_beginning_does_not_link(one: str, other: str) -> None:
    assert link(entries_of([("a", one, 1500), ("b", other, 1501)])).milestone.tolist() == [1, 2]


def test_many_shared_beginnings_do_not_link() -> None:
    things = ["glass", "paper", "silk", "ink", "wool", "tin", "iron", "rope", "maps", "coins"]
    rows: list[Row] = [("a" if i < 5 else "b", f"Origin of {x}", 1500.0 + i % 5) for i, x in enumerate(things)]
    assert len(set(link(entries_of(rows)).milestone)) == 10


def test_one_list_alone_none_and_repeated_titles() -> None:
    alone = link(entries_of([("a", "Kiln", 1500), ("a", "Kiln", 1500), ("a", "Loom", 1500)]))
    assert alone.milestone.tolist() == [1, 2, 3] and alone.pairs_scored == 0 and not len(alone.a)
    assert len(link(entries_of([])).milestone) == 0
    twice = link(entries_of([("a", "Kiln", 1500), ("a", "Kiln", 1504), ("b", "Kiln", 1500), ("b", "Kiln", 1504)]))
    assert twice.milestone.tolist() == [1, 2, 1, 2]


def test_titles_without_words_and_other_scripts() -> None:
    rows: list[Row] = [("a", "", 1500), ("b", "???", 1500), ("a", "Изобретение паровоза", 1800), ("b", "Паровоз", 1801), ("a", "望遠鏡",
    1700), ("b", "顕微鏡", 1700)]
    assert link(entries_of(rows)).milestone.tolist() == [1, 2, 3, 3, 5, 6]


def test_far_apart_in_time_is_never_compared() -> None:
    linked = link(entries_of([("a", "Kiln", 1500), ("b", "Kiln", 1900)]))
    assert linked.milestone.tolist() == [1, 2] and linked.pairs_scored == 0


def test_deep_time_has_slack_in_proportion_to_age() -> None:
    e = entries_of([("a", "Origin of sponges", 0), ("b", "Sponges appear", 0)])
    e = replace(e, earliest=np.array([-601e6, -581e6]), best=np.array([-600e6, -580e6]), latest=np.array([-599e6, -579e6]))
    assert link(e).milestone.tolist() == [1, 1]


def test_decisions_are_obeyed_and_shown() -> None:
    e = entries_of(NORTH + SOUTH)
    linked = link(e, [Decision(1, 5, "different"), Decision(8, 4, "same")])
    assert linked.milestone.tolist() == [1, 2, 3, 4, 5, 2, 3, 4]
    assert states(linked)[1, 5] == "different" and states(linked)[4, 8] == "same"


def test_the_last_word_on_a_pair_counts() -> None:
    linked = link(entries_of(NORTH + SOUTH), [Decision(1, 5, "different"), Decision(5, 1, "same")])
    assert linked.milestone[4] == 1


def test_a_decision_holds_through_a_third_entry() -> None:
    rows: list[Row] = [("a", "Silk loom", 1500), ("b", "Silk loom", 1500), ("c", "Silk loom", 1500)]
    linked = link(entries_of(rows), [Decision(1, 2, "different")])
    assert linked.milestone[0] != linked.milestone[1]
    assert sorted(states(linked).values()) == ["blocked", "different", "linked"]


def test_contradictory_decisions_are_left_out_and_named() -> None:
    rows: list[Row] = [("a", "Silk loom", 1500), ("b", "Silk loom", 1500), ("c", "Silk loom", 1500)]
    linked = link(entries_of(rows), [Decision(1, 2, "same"), Decision(2, 3, "same"), Decision(1, 3, "different")])
    assert len(set(linked.milestone)) == 2
    assert any("contradicts" in n for n in linked.notes)


def test_one_entry_per_list_unless_a_person_says_so() -> None:
    rows: list[Row] = [("a", "Silk loom", 1500), ("a", "Silk loom", 1501), ("b", "Silk loom", 1500)]
    assert len(set(link(entries_of(rows)).milestone)) == 2
    assert len(set(link(entries_of(rows), [Decision(1, 2, "same")]).milestone)) == 1


def test_category_counts_where_lists_share_a_vocabulary() -> None:
    e = entries_of(NORTH + SOUTH, ["craft", "craft", "craft", "water", "craft", "Craft", "craft", "water"])
    linked = link(e)
    assert (linked.parts["category_evidence"] > 0).all()
    other = link(replace(e, category=("craft", "craft", "craft", "water", "x", "y", "x", "y")))
    assert (other.parts["category_evidence"] == 0).all()


@pytest.mark.parametrize(
    "decision, words", [(Decision(1, 99, "same"), "ids of two entries"), (Decision(1, 2, "maybe"), "'same' or 'different'"), (Decision(1,
    1, "same"), "two entries")]
)
def test_impossible_decisions_are_refused(decision: Decision, words: str) -> None:
    with pytest.raises(WrongUse, match=words):
        link(entries_of(NORTH), [decision])


def test_thresholds_out_of_order_are_refused() -> None:
    with pytest.raises(WrongUse, match="review <= accept"):
        link(entries_of(NORTH), options=LinkOptions(accept=0.2, review=0.4))


def partition(milestone: np.ndarray, key: Sequence[object]) -> set[frozenset[object]]:
    return {frozenset(key[i] for i in np.nonzero(milestone == m)[0]) for m in np.unique(milestone)}


def test_order_of_rows_ids_and_names_of_lists_do_not_matter() -> None:
    e = spelling_gold(5, milestones=60).entries
    base = partition(link(e).milestone, range(len(e)))
    order = np.random.default_rng(1).permutation(len(e))
    shuffled = replace(
        e, id=(e.id * 7 + 3)[order], source=3 - e.source[order], sources=("w", "x", "y", "z"), title=tuple(e.title[i] for i in order),
        earliest=e.earliest[order], best=e.best[order], latest=e.latest[order], normal=e.normal[order],
    )  # fmt: skip
    assert partition(link(shuffled).milestone, order.tolist()) == base


def test_same_input_same_numbers() -> None:
    e = synonym_gold(2, milestones=80).entries
    one, two = link(e), link(e)
    assert np.array_equal(one.score, two.score) and np.array_equal(one.milestone, two.milestone)


def test_every_pair_inside_a_milestone_is_listed_and_the_counts_agree() -> None:
    e = synonym_gold(3).entries
    linked = link(e)
    inside = {p for p, s in zip(zip(linked.a.tolist(), linked.b.tolist(), strict=True), linked.state, strict=True) if s in ("linked",
    "implied", "same")}
    assert inside == pairs_inside(linked.milestone, e.source)
    for m in np.unique(linked.milestone):
        lists = e.source[linked.milestone == m]
        assert len(set(lists)) == len(lists)
        assert m == e.id[linked.milestone == m].min()
    assert ((linked.score >= 0) & (linked.score <= 1)).all()
    far = np.abs(e.best[:, None] - e.best[None, :])
    room = (e.latest - e.earliest) / 2 + np.maximum(7.5, 0.025 * (e.present - e.best))
    middle = (e.latest + e.earliest) / 2
    near = np.abs(middle[:, None] - middle[None, :]) <= room[:, None] + room[None, :]
    assert far.shape == near.shape
    assert linked.pairs_scored == pytest.approx((near & (e.source[:, None] < e.source[None, :])).sum(), abs=2)


@pytest.mark.parametrize("seed", [11, 12, 13])
def test_gold_misspelt_reordered_reworded(seed: int) -> None:
    g = spelling_gold(seed)
    precision, recall = precision_recall(pairs_inside(link(g.entries).milestone, g.entries.source), g.pairs())
    assert precision >= 0.97 and recall >= 0.90


@pytest.mark.parametrize("seed", [11, 12, 13])
def test_gold_synonyms_and_dropped_words(seed: int) -> None:
    g = synonym_gold(seed)
    precision, recall = precision_recall(pairs_inside(link(g.entries).milestone, g.entries.source), g.pairs())
    assert precision >= 0.95 and recall >= 0.84
