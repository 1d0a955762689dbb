# SPDX-License-Identifier: Apache-2.0
"""Records from the file: present, start, lists, support, and the same intervals from SQL and from Python."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from chronos_acc.errors import RecordRefused, TimelineRefused, WrongUse
from chronos_acc.intervals import interval_series
from chronos_acc.mixture import NORMAL, summary_of_parts
from chronos_acc.store import query as Q
from chronos_acc.store import timeline as T
from chronos_acc.store.decisions import decide
from chronos_acc.store.ledger import open_for_reading, open_for_writing
from chronos_acc.store.linking import relink
from tests.store.timelines import BRIDGE, KILN, MILL, Row, make, put, two_lists


@pytest.fixture(scope="module")
def db(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Path]:
    """Held open for reading, which makes opening it again cheap."""
    path = two_lists(tmp_path_factory.mktemp("timeline") / "t.duckdb")
    with open_for_reading(path):
        yield path


def test_the_record_says_what_the_milestones_say(db: Path) -> None:
    record, frame = T.record(db), T.table(db, "milestones").sort_values("milestone")
    assert record.id.tolist() == frame["milestone"].tolist()
    assert list(record.title) == frame["title"].tolist()
    assert record.support.tolist() == frame["support"].tolist()
    np.testing.assert_allclose(np.bincount(record.owner, weights=record.weight), 1.0)
    for j in range(len(record)):
        p = slice(*np.searchsorted(record.owner, [j, j + 1]))
        best, earliest, latest, unit, sd = summary_of_parts(record.weight[p], record.kind[p], record.low[p], record.mode[p], record.high[p])
        np.testing.assert_allclose(
            [record.best[j], record.earliest[j], record.latest[j], record.unit[j], record.sd[j]], [best, earliest, latest, unit, sd]
        )


def test_a_shared_milestone_holds_both_lists(db: Path) -> None:
    record = T.record(db)
    j = record.title.index(KILN)
    assert record.mentions[j].tolist() == [True, True] and record.support[j] == 2
    assert record.category[j] == "craft" and record.importance[j] == 3.0
    found = T.milestone(db, int(record.id[j]))
    assert found.entries["source"].tolist() == ["alpha", "beta"] and found.entries["date_text"].tolist() == ["1200.5", "1203.5"]
    assert found.milestone["sources"].tolist() == ["alpha; beta"] and bool(found.milestone["disjoint"][0])
    assert found.links["state"].tolist()[0] == "linked"


def test_default_present_is_the_earliest_compile_year_of_the_chosen_lists(db: Path) -> None:
    both, beta = T.record(db), T.record(db, sources=["beta"])
    assert (both.present, both.present_from) == (2021.0, "end of 2020, the compile year of alpha")
    assert (beta.present, beta.present_from) == (2024.0, "end of 2023, the compile year of beta")
    given = T.record(db, present=2024)
    assert (given.present, given.present_from) == (2024.0, "given")


def test_default_present_without_compile_years_is_the_year_of_the_first_load(tmp_path: Path) -> None:
    db = make(tmp_path / "t.duckdb", {"a": [("x", 1900.5), ("y", 1950.5)]}, a={"compiled": None})
    with open_for_writing(db) as ledger:
        ledger.set_about("first_loaded_year", 2019)
    record = T.record(db)
    assert (record.present, record.present_from) == (2020.0, "end of 2019, the year of the first load")
    with open_for_reading(db) as ledger:
        assert ledger.value("SELECT present_year()") == 2020.0


def test_what_lies_after_the_present_is_counted_and_the_option_named(db: Path) -> None:
    record = T.record(db, present=1650)
    assert record.window.after == int((record.best > 1650).sum()) > 1
    assert any("after the present 1650" in n and "--present 1891" in n for n in record.notes)


def test_start_support_and_category_choose(db: Path) -> None:
    assert T.record(db, start=1300).window.before > 0
    assert set(T.record(db, min_support=2).title) == {KILN, MILL}
    assert T.record(db, category="water").title == (MILL,)
    assert BRIDGE not in T.record(db, sources=["alpha"]).title
    with pytest.raises(WrongUse, match="it has alpha, beta"):
        T.record(db, sources=["gamma"])
    with pytest.raises(WrongUse, match="craft, water"):
        T.record(db, category="fire")


def test_kin_counts_once(tmp_path: Path) -> None:
    rows = [(f"{w} of the hill", 1000.5 + 60 * i) for i, w in enumerate(("gate", "mill", "wall", "ditch", "kiln", "tower"))]
    db = make(tmp_path / "t.duckdb", {"a": rows, "b": rows, "c": rows}, b={"derives_from": ["a", "lost"]}, c={"derives_from": ["lost"]})
    record = T.record(db)
    assert record.support.tolist() == [1] * 6 and record.group.tolist() == [0, 0, 0]
    assert T.table(db, "milestones")["support"].tolist() == [1] * 6
    assert T.table(db, "milestones")["entries"].tolist() == [3] * 6


def test_stale_milestones_are_refused_and_link_is_named(tmp_path: Path) -> None:
    db = make(tmp_path / "t.duckdb", {"a": [("x", 1900.5)]}, link=False)
    for ask in (lambda: T.record(db), lambda: T.entries(db), lambda: T.table(db, "milestones"), lambda: T.milestone(db, 1)):
        with pytest.raises(TimelineRefused, match="chronos-acc link"):
            ask()
    assert len(T.table(db, "entries")) == 1 and T.table(db, "sources")["milestones"].tolist() == [0]


def test_an_empty_timeline(tmp_path: Path) -> None:
    db = make(tmp_path / "t.duckdb", {})
    with pytest.raises(RecordRefused, match="no list in the timeline yet"):
        T.record(db)
    assert len(T.table(db, "intervals")) == 0
    with pytest.raises(RecordRefused, match="there is no milestone 3"):
        T.milestone(db, 3)


def test_tables_by_name_and_filter(db: Path) -> None:
    assert all(isinstance(len(T.table(db, name)), int) for name in T.TABLES)
    assert set(T.table(db, "links", state="linked")["state"]) == {"linked"}
    with pytest.raises(WrongUse, match="the tables are entries, sources"):
        T.table(db, "kilns")
    with pytest.raises(WrongUse, match="has no column 'stat'; it has source_a"):
        T.table(db, "links", stat="review")


def test_entries_in_order_with_their_milestones(db: Path) -> None:
    entries, milestone = T.entries(db)
    assert (np.diff(entries.id) > 0).all() and len(milestone) == len(entries)
    assert entries.sources == ("alpha", "beta") and entries.present == 2021.0
    assert set(milestone.tolist()) == set(T.record(db).id.tolist())


def test_normal_datings_arrive_as_normal(tmp_path: Path) -> None:
    row = {"title": "bed", "best": -1000.0, "half": 196.0, "normal": True}
    record = T.record(make(tmp_path / "t.duckdb", {"a": [row, ("x", 1900.5)]}))
    assert record.kind.tolist() == [NORMAL, 0]
    assert record.sd[0] == pytest.approx(100.0, rel=1e-3) and record.sd[1] == 0


def _some_lists(seed: int) -> dict[str, list[Row]]:
    rng = np.random.default_rng(seed)
    lists: dict[str, list[Row]] = {}
    for name in ("a", "b"):
        years = np.round(2020 - 10 ** rng.uniform(0, 5, 40), int(rng.integers(0, 3)))
        lists[name] = [
            {"title": f"{name}{i} event", "best": float(y), "half": 0.5, "category": ("c", "d", None)[i % 3]}
            for i, y in enumerate(np.concatenate([years, years[:5], [2020.0, 2021.0]]))
        ]
    return lists


@pytest.mark.parametrize("seed", range(3))
def test_sql_and_python_give_the_same_interval_series(tmp_path: Path, seed: int) -> None:
    """Ties, milestones exactly at the start and at the present, and filters included. (Ages are log-uniform, so intervals shrink.)"""
    db = make(tmp_path / "t.duckdb", _some_lists(seed))
    middle = float(T.record(db).window.times[20])
    choices: list[dict[str, float | str]] = [
        {}, {"present": 2020.0}, {"present": 2021.0, "start": middle}, {"present": middle}, {"start": 2021.0, "present": 2022.5},
        {"min_support": 2}, {"category": "c"}, {"present": -1e9}, {"min_support": 1, "category": "d", "start": middle},
    ]  # fmt: skip
    with open_for_reading(db) as ledger:
        for choice in choices:
            record = T.record_open(ledger, **choice)  # type: ignore[arg-type]
            python = interval_series(record, draws=0).to_frame()
            for name in Q.VIEW_VARIABLES:
                ledger.run(f"SET VARIABLE {name} = ?", [choice.get(name)])
            assert ledger.value("SELECT present_year()") == record.present
            _same_series(ledger.frame("FROM intervals ORDER BY year, milestone"), python, str(choice))


def _same_series(sql: pd.DataFrame, python: pd.DataFrame, choice: str) -> None:
    assert sql["milestone"].tolist() == python["milestone"].tolist(), choice
    for column in ("year", "age", "interval", "support"):
        np.testing.assert_array_equal(sql[column].to_numpy(float), python[column].to_numpy(float), err_msg=f"{column} {choice}")
    np.testing.assert_array_equal(sql["open"].to_numpy(bool), python["open"].to_numpy(bool))
    assert sql["title"].tolist() == python["title"].tolist()
    assert [None if np.isnan(v) else int(v) for v in sql["next_milestone"].to_numpy(float)] == [
        None if v is None or v != v else int(v)
        for v in python["next_milestone"].astype(object).where(python["next_milestone"].notna(), None)
    ]


def test_the_macros_give_the_same_series_too(db: Path) -> None:
    with open_for_reading(db) as ledger:
        for sql, choice in (
            ("FROM intervals_of('beta')", {"sources": ["beta"]}),
            ("FROM intervals_at_support(2)", {"min_support": 2}),
            ("FROM intervals_in('craft')", {"category": "craft"}),
        ):
            python = interval_series(T.record(db, **choice), draws=0).to_frame()  # type: ignore[arg-type]
            sql_frame = ledger.frame(sql)
            np.testing.assert_allclose(sql_frame["interval"].to_numpy(float), python["interval"].to_numpy(float))
            np.testing.assert_allclose(sql_frame["age"].to_numpy(float), python["age"].to_numpy(float))
        assert ledger.value("SELECT count(*) FROM entries_of('alpha')") == 14
        first = int(T.record(db).id[0])
        assert {r[0] for r in ledger.rows("SELECT milestone FROM milestone_members(?)", [first])} == {first}


def test_reloading_a_list_keeps_the_ids_of_what_stays(db: Path, tmp_path: Path) -> None:
    fresh = two_lists(tmp_path / "t.duckdb")
    before = dict(zip(T.table(fresh, "entries")["title"], T.table(fresh, "entries")["entry"], strict=True))
    with open_for_writing(fresh) as ledger, ledger.transaction():
        put(ledger, "beta", [(BRIDGE, 1891.5), ("a new thing", 1900.5)])
    after = T.table(fresh, "entries")
    assert int(after[after["title"] == BRIDGE]["entry"].iloc[0]) == before[BRIDGE]
    assert int(after[after["title"] == "a new thing"]["entry"].iloc[0]) > max(before.values())


def test_copies_that_count_as_milestones_are_said(tmp_path: Path) -> None:
    copy = {"title": "gate", "best": 1900.5, "duplicate": True}
    db = make(tmp_path / "t.duckdb", {"a": [("gate", 1900.5), copy, ("mill", 1700.5)], "b": [("weir", 1500.5)]})
    (note,) = T.record(db).notes
    assert note == (
        "1 milestone repeats title and date of another of the same list and counts as an event (entries 1 and 2); "
        "if they are copies, settle them as same with chronos-acc review --pair ID ID --verdict same"
    )
    assert T.record(db, sources=["b"]).notes == ()
    decide(db, 1, 2, "same", who="tester")
    relink(db)
    assert T.record(db).notes == ()
    with open_for_writing(db) as ledger, ledger.transaction():
        put(ledger, "c", [("ford", 1600.5), *({"title": "ford", "best": 1600.5, "duplicate": True} for _ in range(2))])
    relink(db)
    (note,) = T.record(db).notes
    assert note.startswith("2 milestones repeat title and date of another of the same list and count as events (entries 5 and 6, and so on")
