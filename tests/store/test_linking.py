# SPDX-License-Identifier: Apache-2.0
"""Linking in the file: what is written, what is kept, and what is refused."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from chronos_acc.errors import TimelineRefused, WrongUse
from chronos_acc.merge.entries import LinkOptions
from chronos_acc.store import timeline as T
from chronos_acc.store.ledger import open_for_reading, open_for_writing
from chronos_acc.store.linking import PARTS, relink, relink_open, stored, stored_options
from tests.store.timelines import KILN, make, put, two_lists


@pytest.fixture
def db(tmp_path: Path) -> Path:
    return two_lists(tmp_path / "t.duckdb")


def test_the_summary_agrees_with_the_tables(db: Path) -> None:
    done = relink(db)
    assert done.entries == len(T.table(db, "entries")) and done.milestones == len(T.table(db, "milestones"))
    assert done.linked == len(T.table(db, "links", state="linked")) >= 2
    assert done.to_review == len(T.table(db, "links", state="review"))
    assert done.pairs_scored >= done.linked
    with open_for_reading(db) as ledger:
        assert ledger.rows(f"SELECT {', '.join(PARTS)} FROM ledger.link WHERE state = 'linked' LIMIT 1")[0].count(None) == 0


def test_linking_twice_changes_nothing(db: Path) -> None:
    relink(db)
    first = {name: T.table(db, name).to_csv() for name in ("links", "milestones", "members", "intervals")}
    relink(db)
    assert {name: T.table(db, name).to_csv() for name in first} == first


def test_a_milestones_id_is_its_smallest_member(db: Path) -> None:
    members = T.table(db, "members")
    assert (members.groupby("milestone")["entry"].min() == members.groupby("milestone")["milestone"].first()).all()
    assert members.groupby("milestone")["weight"].sum().to_numpy() == pytest.approx(1.0)


def test_options_are_kept_for_the_next_load(db: Path) -> None:
    chosen = LinkOptions(accept=0.7, review=0.2, prefer="beta", pooling="inverse_variance")
    relink(db, options=chosen)
    with open_for_writing(db) as ledger:
        assert stored_options(ledger) == chosen
        relink_open(ledger)
        assert stored_options(ledger) == chosen
    record = T.record(db)
    j = record.title.index(KILN)
    assert record.sd[j] > 0 and record.kind[record.owner == j].tolist() == [1, 1]
    with open_for_writing(db) as ledger, ledger.transaction():
        for table in ("entry", "source"):
            ledger.run(f"DELETE FROM ledger.{table} WHERE source = 2")
        ledger.entries_changed()
        assert any("no longer there" in n for n in relink_open(ledger).notes)
        assert stored_options(ledger).prefer is None


def test_wrong_options_leave_the_file_as_it_was(db: Path) -> None:
    before = T.table(db, "milestones").to_csv()
    with pytest.raises(WrongUse):
        relink(db, options=LinkOptions(prefer="gamma"))
    with pytest.raises(WrongUse):
        relink(db, options=LinkOptions(accept=0.1, review=0.5))
    assert T.table(db, "milestones").to_csv() == before


def test_no_list_one_list_one_entry(tmp_path: Path) -> None:
    db = make(tmp_path / "t.duckdb", {})
    assert relink(db).milestones == 0
    with open_for_writing(db) as ledger, ledger.transaction():
        put(ledger, "a", [("only", 1900.5)])
    assert relink(db).milestones == 1
    assert T.record(db).title == ("only",)
    with pytest.raises(TimelineRefused, match="no timeline file"):
        relink(tmp_path / "none.duckdb")


def test_duplicates_within_a_list_stay_apart(tmp_path: Path) -> None:
    db = make(tmp_path / "t.duckdb", {"a": [("gate", 1900.5), {"title": "gate", "best": 1900.5, "duplicate": True}]})
    assert relink(db).milestones == 2
    assert T.table(db, "entries")["nth"].tolist() == [1, 2]


def test_attributes_are_those_most_members_state(tmp_path: Path) -> None:
    titles = ["gate of the old town", "mill below the weir", "kiln beside the ford", "lantern on the quay"]
    lists = {
        name: [{"title": t, "best": 1000.5 + 200 * i, "category": c, "importance": w, "level": lv} for i, t in enumerate(titles)]
        for name, c, w, lv in (("a", "x", 1.0, None), ("b", "y", None, "era"), ("c", "y", 4.0, "era"))
    }
    db = make(tmp_path / "t.duckdb", lists)
    frame = T.table(db, "milestones")
    assert frame["category"].tolist() == ["y"] * 4 and frame["importance"].tolist() == [2.5] * 4 and frame["level"].tolist() == ["era"] * 4
    assert frame["sources"].tolist() == ["a; b; c"] * 4


def test_notes_are_kept(db: Path) -> None:
    notes = relink(db).notes
    with open_for_reading(db) as ledger:
        assert tuple(json.loads(str(ledger.about("link_notes")))) == notes


def test_the_options_used_are_in_the_summary_and_can_be_asked_for(db: Path, tmp_path: Path) -> None:
    assert stored(tmp_path / "none.duckdb") == LinkOptions() and not (tmp_path / "none.duckdb").exists()
    assert stored(make(tmp_path / "new.duckdb", {}, link=False)) == LinkOptions()
    chosen = LinkOptions(accept=0.7, prefer="beta")
    assert relink(db, options=chosen).options == chosen
    assert stored(db) == chosen
    again = relink(db)
    assert again.options == chosen
    assert list(again.to_frame()) == ["entries", "pairs_scored", "linked", "to_review", "milestones", "notes"]
