# SPDX-License-Identifier: Apache-2.0
"""Linking held against the truth."""

from __future__ import annotations

from pathlib import Path

import pytest

from chronos_acc.errors import ListRefused, TimelineRefused
from chronos_acc.store.gold import check_gold, pairs_inside, read_gold
from chronos_acc.store.ledger import open_for_reading, open_for_writing
from chronos_acc.store.linking import stored_options
from tests.store.timelines import ALPHA, BRIDGE, KILN, MILL, two_lists


@pytest.fixture
def db(tmp_path: Path) -> Path:
    return two_lists(tmp_path / "t.duckdb")


def _gold(path: Path, *rows: str, header: str = "source,title,milestone") -> Path:
    path.write_text("\n".join([header, *rows]) + "\n", encoding="utf-8")
    return path


def test_right_links_score_one(db: Path, tmp_path: Path) -> None:
    file = _gold(tmp_path / "g.csv", f"alpha,{KILN},m1", f"beta,{KILN},m1", f"alpha,{MILL},m2", f"beta,{MILL},m2", f"beta,{BRIDGE},m3")
    check = check_gold(db, file)
    assert (check.precision, check.recall, check.f1, check.pairs, check.gold_pairs, check.right) == (1.0, 1.0, 1.0, 2, 2, 2)
    assert check.notes == () and check.to_frame().shape == (1, 6)


def test_wrong_and_missed_links_are_counted(db: Path, tmp_path: Path) -> None:
    """Two pairs found, one of them right; two in the file: precision and recall are both 1/2."""
    file = _gold(
        tmp_path / "g.csv",
        f"alpha,{KILN},m1",
        f"beta,{KILN},m1",
        f"alpha,{MILL},m2",
        f"beta,{MILL},m3",
        f"alpha,{ALPHA[0]},m4",
        f"beta,{BRIDGE},m4",
    )
    check = check_gold(db, file)
    assert (check.precision, check.recall, check.f1) == (0.5, 0.5, 0.5)
    assert check.curve.loc[check.curve["threshold"] == 0.5, ["precision", "recall", "f1"]].to_numpy().tolist() == [[0.5, 0.5, 0.5]]


def test_the_curve_at_the_chosen_threshold_is_the_present_state(db: Path, tmp_path: Path) -> None:
    file = _gold(tmp_path / "g.csv", f"alpha,{KILN},m1", f"beta,{KILN},m1", f"alpha,{MILL},m2", f"beta,{MILL},m2")
    check = check_gold(db, file)
    with open_for_reading(db) as ledger:
        accept = stored_options(ledger).accept
    row = check.curve[check.curve["threshold"] == accept].iloc[0]
    assert (row["precision"], row["recall"], row["pairs"]) == (check.precision, check.recall, check.pairs)
    assert check.curve["pairs"].is_monotonic_decreasing


def test_pairs_may_be_given_instead(db: Path, tmp_path: Path) -> None:
    file = _gold(tmp_path / "g.csv", f"alpha,{KILN},beta,{KILN}", f"alpha,{MILL},,", header="source_a,title_a,source_b,title_b")
    check = check_gold(db, file)
    assert (check.pairs, check.gold_pairs, check.right) == (1, 1, 1)


def test_entries_that_are_not_there_are_left_out_and_named(db: Path, tmp_path: Path) -> None:
    check = check_gold(db, _gold(tmp_path / "g.csv", f"alpha,{KILN},m1", "gamma,no such thing,m1"))
    assert (check.precision, check.recall, check.f1) == (None, None, None)
    assert "1 of 2 entries" in check.notes[0] and "'no such thing' of gamma" in check.notes[0] and "no pair" in check.notes[1]


def test_groups_are_closed_and_only_pairs_of_different_lists_count(tmp_path: Path) -> None:
    file = _gold(tmp_path / "g.csv", "a,x,b,y", "b,y,c,z", "d,w,,", header="source_a,title_a,source_b,title_b")
    groups = read_gold(file)
    assert groups[("a", "x", 1)] == groups[("b", "y", 1)] == groups[("c", "z", 1)] != groups[("d", "w", 1)]
    assert pairs_inside([(1, 7), (3, 7), (2, 7), (4, 8)], {1: 1, 2: 1, 3: 2, 4: 2}) == {(1, 3), (2, 3)}


def test_files_that_are_no_gold_and_timelines_that_are_stale(db: Path, tmp_path: Path) -> None:
    with pytest.raises(ListRefused, match="its columns are source, title, milestone, or"):
        check_gold(db, _gold(tmp_path / "g.csv", header="title,milestone"))
    with pytest.raises(ListRefused, match="cannot be read"):
        check_gold(db, tmp_path / "none.csv")
    with pytest.raises(ListRefused, match="line 2: nth 'x'"):
        check_gold(db, _gold(tmp_path / "h.csv", "a,x,m,x", header="source,title,milestone,nth"))
    with open_for_writing(db) as ledger:
        ledger.set_about("linked", "no")
    with pytest.raises(TimelineRefused, match="chronos-acc link"):
        check_gold(db, _gold(tmp_path / "i.csv", f"alpha,{KILN},m1"))
