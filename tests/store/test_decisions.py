# SPDX-License-Identifier: Apache-2.0
"""Decisions: made, taken back, kept over reloads, and the same through a spreadsheet."""

from __future__ import annotations

from pathlib import Path

import pytest

from chronos_acc.errors import ListRefused, WrongUse
from chronos_acc.store import decisions as D
from chronos_acc.store import timeline as T
from chronos_acc.store.exchange import unload
from chronos_acc.store.ledger import open_for_writing
from chronos_acc.store.linking import relink
from tests.store.timelines import BETA, BRIDGE, KILN, MILL, put, two_lists


@pytest.fixture
def db(tmp_path: Path) -> Path:
    return two_lists(tmp_path / "t.duckdb")


def ids(db: Path, title: str) -> dict[str, int]:
    """Entry ids by list."""
    frame = T.table(db, "entries", title=title)
    return dict(zip(frame["source"], (int(e) for e in frame["entry"]), strict=True))


def status(db: Path) -> list[str]:
    return [str(s) for s in D.listing(db)["status"]]


def test_a_linked_pair_is_taken_apart_and_joined_again(db: Path) -> None:
    kiln = ids(db, KILN)
    pair = D.pair(db, kiln["beta"], kiln["alpha"])
    assert (pair.state, pair.a.source, pair.b.source, pair.a.date_text) == ("linked", "alpha", "beta", "1200.5")
    assert pair.score is not None and pair.score > 0.5 and pair.parts["gap"] == 3.0
    first = D.decide(db, pair.a.entry, pair.b.entry, "different", who="Ina", why="two kilns")
    assert relink(db).milestones == len(T.table(db, "milestones")) and D.pair(db, pair.a.entry, pair.b.entry).state == "different"
    assert KILN not in set(T.record(db, min_support=2).title)
    second = D.decide(db, pair.b.entry, pair.a.entry, "same", who="Ole")
    relink(db)
    assert status(db) == ["withdrawn", "holds"]
    assert KILN in set(T.record(db, min_support=2).title) and T.table(db, "links", state="same")["title_a"].tolist() == [KILN]
    D.undo(db, second)
    assert status(db) == ["holds"] and D.listing(db)["why"].tolist() == ["two kilns"]
    D.withdraw(db, first)
    relink(db)
    assert status(db) == ["withdrawn"] and KILN in set(T.record(db, min_support=2).title)


def test_strangers_can_be_joined(db: Path) -> None:
    a, b = ids(db, BRIDGE)["beta"], ids(db, MILL)["alpha"]
    assert D.pair(db, a, b).score is None and D.pair(db, a, b).state == "not compared"
    D.decide(db, ids(db, "Guild of dyers chartered")["alpha"], ids(db, BETA[0])["beta"], "same", who="Ina")
    relink(db)
    assert len(T.table(db, "links", state="same")) == 1


def test_decisions_survive_reloading_and_say_how_they_stand(db: Path) -> None:
    kiln, mill = ids(db, KILN), ids(db, MILL)
    D.decide_many(db, [(kiln["alpha"], kiln["beta"], "different", None), (mill["alpha"], mill["beta"], "same", "same deed")], who="Ina")
    relink(db)
    with open_for_writing(db) as ledger, ledger.transaction():
        put(ledger, "beta", [(KILN, 1203.5), (MILL, 1651.5), (BRIDGE, 1890.5)])
    assert status(db) == ["holds", "date changed"]
    notes = relink(db).notes
    assert any("1 decision is about entries whose date has changed" in n for n in notes)
    assert D.pair(db, *ids(db, KILN).values()).state == "different"
    with open_for_writing(db) as ledger, ledger.transaction():
        put(ledger, "beta", [(KILN, 1203.5), (BRIDGE, 1890.5)])
    assert status(db) == ["holds", "adrift"] and any("adrift" in n for n in relink(db).notes)
    gone = unload(db, "beta")
    assert gone.entries == 2 and any("1 decision about its entries is kept" in n for n in gone.notes)
    assert status(db) == ["adrift", "adrift"]
    with open_for_writing(db) as ledger, ledger.transaction():
        put(ledger, "beta", [(MILL, 1650.5), (KILN, 1203.5)])
    relink(db)
    assert status(db) == ["holds", "holds"] and D.pair(db, *ids(db, KILN).values()).state == "different"


def test_the_nth_of_equal_titles_is_meant(db: Path) -> None:
    with open_for_writing(db) as ledger, ledger.transaction():
        put(ledger, "beta", [(KILN, 1203.5), (KILN, 1203.5), (BRIDGE, 1890.5)])
    relink(db)
    frame = T.table(db, "entries", source="beta", title=KILN)
    second = int(frame[frame["nth"] == 2]["entry"].iloc[0])
    D.decide(db, ids(db, KILN)["alpha"], second, "same", who="Ina")
    row = D.listing(db).iloc[0]
    assert (row["source_b"], row["nth_b"], row["status"]) == ("beta", 2, "holds")
    relink(db)
    assert T.table(db, "links", state="same")["nth_b"].tolist() == [2]


def test_what_is_refused(db: Path) -> None:
    kiln = ids(db, KILN)
    for arguments, words in (
        ((kiln["alpha"], kiln["alpha"], "same"), "itself"),
        ((kiln["alpha"], 999, "same"), "no entry 999"),
        ((kiln["alpha"], kiln["beta"], "maybe"), "same or different"),
    ):
        with pytest.raises(WrongUse, match=words):
            D.decide(db, *arguments, who="Ina")
    with pytest.raises(WrongUse, match="give a name"):
        D.decide(db, kiln["alpha"], kiln["beta"], "same", who=" ")
    with pytest.raises(WrongUse, match="no decision 1; .*--list"):
        D.withdraw(db, 1)
    with pytest.raises(WrongUse, match="no decision 1"):
        D.undo(db, 1)
    with pytest.raises(WrongUse, match="no entry 998"):
        D.pair(db, 998, 999)
    D.decide(db, kiln["alpha"], kiln["beta"], "same", who="Ina")
    D.withdraw(db, 1)
    with pytest.raises(WrongUse, match="withdrawn before"):
        D.withdraw(db, 1)
    assert T.table(db, "decisions")["status"].tolist() == ["withdrawn"]


def test_pending_shows_both_rows_and_leaves_out_what_was_settled(db: Path) -> None:
    with open_for_writing(db) as ledger:
        ledger.run("UPDATE ledger.link SET state = 'review', score = 0.4")
        ledger.run("UPDATE ledger.link SET score = 0.2 WHERE a = (SELECT min(a) FROM ledger.link)")
    pairs = D.pending(db)
    assert len(pairs) == len(T.table(db, "links")) >= 2
    assert [p.score for p in pairs][-1] == 0.2  # nearest to even odds first
    D.decide(db, pairs[0].a.entry, pairs[0].b.entry, "same", who="Ina")
    assert len(D.pending(db)) == len(pairs) - 1
    assert D.pending(db, "implied") == ()


def _csv(db: Path, path: Path, change: dict[str, str], separator: str = ",", **more: str) -> Path:
    """What ``links --format csv`` writes, with the verdicts of ``change`` by title put into the column state."""
    frame = T.table(db, "links")
    frame["state"] = [change.get(t, s) for t, s in zip(frame["title_a"], frame["state"], strict=True)]
    frame.assign(**more).to_csv(path, index=False, sep=separator, encoding="utf-8-sig")
    return path


def test_a_spreadsheet_round_trip(db: Path, tmp_path: Path) -> None:
    file = _csv(db, tmp_path / "links.csv", {KILN: "different", MILL: "Same"}, separator=";", why="by hand")
    total = len(T.table(db, "links"))
    read = D.read_file(db, file, who="Ina")
    assert (read.rows, read.decided, read.unchanged, read.skipped) == (total, 2, 0, total - 2)
    relink(db)
    assert sorted(D.listing(db)["verdict"]) == ["different", "same"] and set(D.listing(db)["why"]) == {"by hand"}
    again = D.read_file(db, _csv(db, tmp_path / "again.csv", {}), who="Ina")
    assert (again.decided, again.unchanged) == (0, 2)


def test_a_guard_against_formulas_is_seen_through(db: Path, tmp_path: Path) -> None:
    with open_for_writing(db) as ledger, ledger.transaction():
        put(ledger, "beta", [("=first kiln", 1203.5), (BRIDGE, 1890.5)])
    file = tmp_path / "d.csv"
    file.write_text(f"source_a,title_a,source_b,title_b,verdict\nalpha,{KILN},beta,'=first kiln,same\n", encoding="utf-8")
    assert D.read_file(db, file, who="Ina").decided == 1


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("title_a,title_b\n", "lacks the column source_a"),
        ("source_a,title_a,source_b,title_b\n", "lacks the column verdict"),
        ("source_a,title_a,source_b,title_b,verdict\nalpha,{kiln},beta,{kiln},yes\n", "line 2: verdict 'yes'"),
        ("source_a,title_a,source_b,title_b,verdict\nalpha,{kiln},gamma,{kiln},same\n", "line 2: there is no entry .* in a list 'gamma'"),
        ("source_a,title_a,source_b,title_b,verdict\nalpha,{kiln},alpha,{kiln},same\n", "both sides are the same entry"),
        ("source_a,title_a,source_b,title_b,nth_a,verdict\nalpha,{kiln},beta,{kiln},x,same\n", "no whole number"),
        (
            "source_a,title_a,source_b,title_b,verdict\nalpha,{kiln},beta,{kiln},same\nbeta,{kiln},alpha,{kiln},different\n",
            "line 2 says same",
        ),
        ("source_a,title_a,source_b,title_b,verdict\nalpha,{kiln},beta,{kiln},same\nalpha,{kiln},beta,x,same\n", "line 3"),
    ],
)
def test_a_bad_file_names_its_line_and_changes_nothing(db: Path, tmp_path: Path, text: str, words: str) -> None:
    file = tmp_path / "d.csv"
    file.write_text(text.format(kiln=KILN), encoding="utf-8")
    with pytest.raises(ListRefused, match=words):
        D.read_file(db, file, who="Ina")
    assert len(D.listing(db)) == 0


def test_unreadable_files(db: Path, tmp_path: Path) -> None:
    with pytest.raises(ListRefused, match="cannot be read"):
        D.read_file(db, tmp_path / "none.csv", who="Ina")
    (tmp_path / "d.csv").write_bytes(b"source_a\xff")
    with pytest.raises(ListRefused, match="not UTF-8 at byte 8"):
        D.read_file(db, tmp_path / "d.csv", who="Ina")
    with open_for_writing(db) as ledger, ledger.transaction():
        put(ledger, "beta", [(KILN, 1203.5), (KILN, 1204.5)])
    (tmp_path / "e.csv").write_text(f"source_a,title_a,source_b,title_b,verdict\nalpha,{KILN},beta,{KILN},same\n", encoding="utf-8")
    with pytest.raises(ListRefused, match="2 times; say which in the column nth_b"):
        D.read_file(db, tmp_path / "e.csv", who="Ina")
