# SPDX-License-Identifier: Apache-2.0
"""A timeline as a folder and back; taking a list out."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from chronos_acc.errors import ListRefused, WrongUse
from chronos_acc.store import decisions as D
from chronos_acc.store import exchange as X
from chronos_acc.store import timeline as T
from chronos_acc.store.ledger import open_for_reading, open_for_writing
from chronos_acc.store.linking import relink
from chronos_acc.store.load import load
from chronos_acc.store.runs import record_run
from tests.store.timelines import KILN, make, put, two_lists


@pytest.fixture
def db(tmp_path: Path) -> Path:
    path = two_lists(tmp_path / "t.duckdb")
    with open_for_writing(path) as ledger:
        ledger.run("UPDATE ledger.source SET sheet = '[compilation]' || chr(10) || 'name = \"' || name || '\"' || chr(10)")
        ledger.run("INSERT INTO ledger.reject VALUES (1, 7, 'a;b', 'no date')")
        ledger.run("UPDATE ledger.source SET rows_read = rows_read + 1, rows_rejected = 1, notes = ['one', 'two'] WHERE source = 1")
    pair = T.table(path, "links", title_a=KILN).iloc[0]
    D.decide(path, int(pair["entry_a"]), int(pair["entry_b"]), "same", who="Ina", why='a, "b"\nc')
    relink(path)
    record_run(path, command="chronos-acc grid", seed=1, draws=10, record="abc", result={"share": 0.5, "bad": float("nan")})
    return path


def _all(db: Path) -> dict[str, list[tuple[object, ...]]]:
    with open_for_reading(db) as ledger:
        return {name: ledger.rows(f"FROM ledger.{name} ORDER BY {order}") for name, order in X.TABLES.items()}


def test_there_and_back_is_the_same_timeline(db: Path, tmp_path: Path) -> None:
    done = X.export(db, tmp_path / "out [1]")
    assert {f["file"] for f in done.files} == {p.relative_to(done.folder).as_posix() for p in done.folder.rglob("*") if p.is_file()} - {
        "manifest.json"
    }
    assert done.to_frame()["rows"].dtype == "Int64"
    back = tmp_path / "back.duckdb"
    restored = X.restore(back, done.folder)
    assert (
        restored.changed and [r[0] for r in restored.lists] == ["alpha", "beta"] and restored.milestones == len(T.table(db, "milestones"))
    )
    assert _all(back) == _all(db)
    assert T.record(back).hash == T.record(db).hash
    again = X.export(back, tmp_path / "again")
    assert [f["sha256"] for f in again.files] == [f["sha256"] for f in done.files]
    relink(back)  # the copy is alive
    assert _all(back) == _all(db)


def test_loading_the_same_twice_changes_nothing_and_other_lists_are_refused(db: Path, tmp_path: Path) -> None:
    folder = X.export(db, tmp_path / "out").folder
    assert "nothing was changed" in X.restore(db, folder).notes[0]
    other = make(tmp_path / "other.duckdb", {"gamma": [("x", 1900.5)]})
    with pytest.raises(ListRefused, match="already holds lists other than"):
        X.restore(other, folder)
    with open_for_writing(db) as ledger, ledger.transaction():
        put(ledger, "beta", [("x", 1900.5)])
    with pytest.raises(ListRefused, match="already holds"):
        X.restore(db, folder)
    assert T.table(other, "sources")["source"].tolist() == ["gamma"]


def test_load_takes_an_exported_folder_by_itself(db: Path, tmp_path: Path) -> None:
    folder = X.export(db, tmp_path / "out").folder
    loaded = load(tmp_path / "back.duckdb", folder)
    assert [(one.source, one.rows_read, one.rows_loaded, one.rows_rejected, one.added) for one in loaded] == [
        ("alpha", 15, 14, 1, 14),
        ("beta", 15, 15, 0, 15),
    ]
    assert T.record(tmp_path / "back.duckdb").hash == T.record(db).hash
    assert load(db, [folder])[0].added == 0
    with pytest.raises(ListRefused, match="load it by itself"):
        load(tmp_path / "other.duckdb", [folder, tmp_path / "list.csv"])


def test_a_folder_that_was_changed_is_refused(db: Path, tmp_path: Path) -> None:
    folder = X.export(db, tmp_path / "out").folder
    back = tmp_path / "back.duckdb"
    (folder / "sheets" / "alpha.toml").write_text("changed")
    with pytest.raises(ListRefused, match="sheets/alpha.toml is not what was exported"):
        X.restore(back, folder)
    (folder / "ledger" / "entry.parquet").unlink()
    manifest = json.loads((folder / "manifest.json").read_text(encoding="utf-8"))
    manifest["files"] = [f for f in manifest["files"] if not f["file"].startswith("sheets/")]
    (folder / "manifest.json").write_text(json.dumps(manifest), encoding="utf-8")
    with pytest.raises(ListRefused, match="lacks ledger/entry.parquet"):
        X.restore(back, folder)
    (folder / "manifest.json").write_text(json.dumps({**manifest, "schema_version": 99}), encoding="utf-8")
    with pytest.raises(ListRefused, match="schema version 99"):
        X.restore(back, folder)
    (folder / "manifest.json").write_text("{", encoding="utf-8")
    assert not X.is_export(folder) and not X.is_export(tmp_path / "none")
    with pytest.raises(ListRefused, match="chronos-acc export writes such a folder"):
        X.restore(back, folder)
    assert not back.exists()


def test_a_manifest_that_points_outside_is_refused(db: Path, tmp_path: Path) -> None:
    folder = X.export(db, tmp_path / "out").folder
    (tmp_path / "secret").write_text("x")
    manifest = json.loads((folder / "manifest.json").read_text(encoding="utf-8"))
    manifest["files"].append({"file": "../secret", "sha256": X._hash(tmp_path / "secret")})
    (folder / "manifest.json").write_text(json.dumps(manifest), encoding="utf-8")
    with pytest.raises(ListRefused, match="outside the folder"):
        X.restore(tmp_path / "back.duckdb", folder)


def test_export_takes_an_empty_or_new_folder(db: Path, tmp_path: Path) -> None:
    (tmp_path / "full").mkdir()
    (tmp_path / "full" / "a").touch()
    for place, words in ((tmp_path / "full", "not empty"), (tmp_path / "full" / "a", "a file")):
        with pytest.raises(WrongUse, match=words):
            X.export(db, place)


def test_names_of_lists_become_safe_and_distinct_file_names(tmp_path: Path) -> None:
    db = make(
        tmp_path / "t.duckdb", {"../a": [("x", 1.5)], "..\\a": [("y", 2.5)]}, **{"../a": {"sheet": "# one"}, "..\\a": {"sheet": "# two"}}
    )
    folder = X.export(db, tmp_path / "out").folder
    sheets = sorted((folder / "sheets").iterdir())
    assert len(sheets) == 2 and all(p.parent == folder / "sheets" for p in sheets) and {p.read_text() for p in sheets} == {"# one", "# two"}
    assert X.restore(tmp_path / "back.duckdb", folder).changed


def test_a_stale_timeline_stays_stale(tmp_path: Path) -> None:
    db = make(tmp_path / "t.duckdb", {"a": [("x", 1900.5)]}, link=False)
    X.restore(tmp_path / "back.duckdb", X.export(db, tmp_path / "out").folder)
    with open_for_reading(tmp_path / "back.duckdb") as ledger:
        assert ledger.about("linked") == "no"


def test_unloading_takes_all_of_a_list_and_links_the_rest(db: Path) -> None:
    gone = X.unload(db, "alpha")
    assert (gone.source, gone.entries, gone.rejects) == ("alpha", 14, 1)
    assert gone.milestones == len(T.table(db, "milestones")) == 15
    assert "chronos-acc load alpha.csv" in gone.notes[0]
    assert T.table(db, "sources")["source"].tolist() == ["beta"] and len(T.table(db, "rejects")) == 0
    with pytest.raises(WrongUse, match="did you mean beta"):
        X.unload(db, "betta")
    last = X.unload(db, "beta", link=False)
    assert last.milestones == 0 and any("chronos-acc link" in n for n in last.notes)


def test_runs_are_kept_without_nan(db: Path) -> None:
    frame = T.table(db, "runs")
    assert frame["command"].tolist() == ["chronos-acc grid"] and json.loads(frame["result"][0]) == {"share": 0.5, "bad": None}
    import numpy as np
    import pandas as pd

    record_run(db, command="x", result={"a": np.arange(2), "b": pd.DataFrame({"c": [1.0]}), "d": {1, 1}, "e": Path("f")})
    assert json.loads(T.table(db, "runs")["result"][1]) == {"a": [0, 1], "b": [{"c": 1.0}], "d": [1], "e": "f"}
