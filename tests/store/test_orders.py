# SPDX-License-Identifier: Apache-2.0
"""Known orders: from sheets and files to milestones, circles refused, draws that respect them."""

from __future__ import annotations

from pathlib import Path

import pytest

from chronos_acc.errors import ListRefused, RecordRefused, WrongUse
from chronos_acc.store import timeline as T
from chronos_acc.store.decisions import decide
from chronos_acc.store.ledger import open_for_writing
from chronos_acc.store.linking import relink
from chronos_acc.store.orders import cycle, state_orders
from tests.store.timelines import make, put

ROWS = [("lower bed", 1000.0, 300.0), ("middle bed", 1050.0, 300.0), ("upper bed", 1100.0, 300.0), ("gate", 1900.5)]


def test_a_sheet_states_orders_and_the_draws_respect_them(tmp_path: Path) -> None:
    db = make(tmp_path / "t.duckdb", {"a": ROWS}, a={"precedes": [["lower bed", "middle bed"], ["Middle  Bed", "upper bed"]]})
    record = T.record(db)
    assert record.orders == ((0, 1), (1, 2))
    draws = record.all_draws(500, seed=1)
    assert (draws[:, 0] <= draws[:, 1]).all() and (draws[:, 1] <= draws[:, 2]).all()
    assert T.table(db, "orders")["stated_by"].tolist() == ["list a", "list a"]


def test_a_circle_is_refused_and_named_and_nothing_is_changed(tmp_path: Path) -> None:
    db = make(tmp_path / "t.duckdb", {"a": ROWS}, a={"precedes": [["lower bed", "middle bed"]]})
    with open_for_writing(db) as ledger, ledger.transaction():
        put(
            ledger,
            "a",
            ROWS,
            precedes=[["lower bed", "middle bed"], ["middle bed", "upper bed"], ["upper bed", "lower bed"], ["lower bed", "gate"]],
        )
    with pytest.raises(RecordRefused) as caught:
        relink(db)
    said = str(caught.value)
    assert "'lower bed' before 'middle bed' (list a); 'middle bed' before 'upper bed' (list a); 'upper bed' before 'lower bed'" in said
    assert "gate" not in said and "\n" not in said


def test_orders_from_a_file_speak_of_any_list(tmp_path: Path) -> None:
    db = make(tmp_path / "t.duckdb", {"a": ROWS[:2], "b": ROWS[2:]}, a={"precedes": [["lower bed", "middle bed"]]})
    file = tmp_path / "orders.csv"
    file.write_text("earlier,later\nmiddle bed,upper bed\nmiddle bed,no such bed\n", encoding="utf-8")
    assert state_orders(db, file) == 2
    notes = relink(db).notes
    assert any("'no such bed', which is no entry's title" in n for n in notes)
    record = T.record(db)
    assert {(record.title[i], record.title[j]) for i, j in record.orders} == {("lower bed", "middle bed"), ("middle bed", "upper bed")}
    (beside,) = T.table(db, "links", title_a="middle bed", title_b="upper bed")["state"].tolist()
    assert beside == "blocked"  # alike as they look, what precedes something is something else
    file.write_text("earlier,later\nupper bed,lower bed\nmiddle bed,upper bed\n", encoding="utf-8")
    state_orders(db, file)
    with pytest.raises(RecordRefused, match="file orders.csv"):
        relink(db)
    file.write_text("earlier,later\n", encoding="utf-8")
    assert state_orders(db, file) == 0 and len(T.table(make(tmp_path / "u.duckdb", {"a": ROWS}), "orders")) == 0
    file.write_text("first,second\n", encoding="utf-8")
    with pytest.raises(ListRefused, match="columns earlier and later"):
        state_orders(db, file)


def test_a_title_that_stands_twice_is_remarked(tmp_path: Path) -> None:
    db = make(tmp_path / "t.duckdb", {"a": [("gate", 1000.5), ("gate", 1500.5), ("mill", 1800.5)]}, a={"precedes": [["gate", "mill"]]})
    assert any("stands in 2 milestones" in n for n in relink(db).notes)
    assert T.record(db).orders == ()


def test_an_order_within_one_milestone_is_refused(tmp_path: Path) -> None:
    with pytest.raises(RecordRefused, match="both are one milestone"):
        make(tmp_path / "t.duckdb", {"a": ROWS}, a={"precedes": [["gate", "gate"]]})
    db = make(tmp_path / "u.duckdb", {"a": ROWS}, a={"precedes": [["lower bed", "upper bed"]]})
    decide(db, 1, 3, "same", who="me")
    with pytest.raises(RecordRefused, match="'lower bed' precedes 'upper bed', but both are one milestone"):
        relink(db)


@pytest.mark.parametrize(
    ("pairs", "expected"),
    [
        ([], []),
        ([(1, 2), (2, 3), (1, 3)], []),
        ([(1, 1)], [1]),
        ([(5, 1), (1, 2), (2, 3), (3, 1)], [1, 2, 3]),
        ([(1, 2), (3, 4), (4, 3)], [3, 4]),
    ],
)
def test_circles(pairs: list[tuple[int, int]], expected: list[int]) -> None:
    assert cycle(pairs) == expected


def test_a_long_chain_needs_no_recursion() -> None:
    chain = [(i, i + 1) for i in range(20_000)]
    assert cycle(chain) == []
    assert len(cycle([*chain, (20_000, 0)])) == 20_001


def test_unknown_list_in_a_choice(tmp_path: Path) -> None:
    db = make(tmp_path / "t.duckdb", {"a": ROWS}, a={"precedes": [["lower bed", "middle bed"]]})
    assert T.record(db, category=None).orders == ((0, 1),)
    with pytest.raises(WrongUse):
        T.record(db, sources=["z"])
