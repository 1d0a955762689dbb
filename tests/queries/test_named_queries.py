# SPDX-License-Identifier: Apache-2.0
"""The named queries: documented, ordered, and the same in any client."""

from __future__ import annotations

import re
import shutil
from collections.abc import Iterator
from pathlib import Path

import duckdb
import numpy as np
import pandas as pd
import pytest

from chronos_acc import files
from chronos_acc.errors import QueryRefused
from chronos_acc.store import decisions as D
from chronos_acc.store import query as Q
from chronos_acc.store import timeline as T
from chronos_acc.store.ledger import GUARDED, open_for_reading, open_for_writing
from chronos_acc.store.linking import relink
from chronos_acc.store.runs import record_run
from tests.store.timelines import BRIDGE, KILN, MILL, put, two_lists

QUERIES = Q.named()
VALUES = {
    "list": "alpha", "rows": 2, "present": 1900.0, "start": 1000.0, "min_support": 2, "category": "craft", "at_least": 1,
    "least_shared": 1, "status": "holds",
}  # fmt: skip


@pytest.fixture(scope="module")
def db(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Path]:
    """A timeline in which every named query finds something; held open as ``run`` opens it, which makes opening it again cheap."""
    path = two_lists(tmp_path_factory.mktemp("named") / "t.duckdb")
    with open_for_writing(path) as ledger, ledger.transaction():
        put(
            ledger,
            "gamma",
            [("gate", 1500.5), {"title": "gate", "best": 1500.5, "duplicate": True}, (KILN, 1200.5), (MILL, 1650.5), (BRIDGE, 1890.5)],
            derives_from=["beta"],
        )
        ledger.run(
            "INSERT INTO ledger.reject VALUES (1, 9, 'a;b', 'date ''12/03/04'' reads in two ways'),"
            " (1, 8, 'c;d', 'date ''01/02/03'' reads in two ways'), (2, 3, 'e', 'no date')"
        )
        ledger.run("UPDATE ledger.source SET rows_read = rows_read + 2, rows_rejected = 2 WHERE source = 1")
    relink(path)
    entries = T.table(path, "entries", title=MILL)["entry"].tolist()
    D.decide(path, int(entries[0]), int(entries[1]), "same", who="Ina")
    relink(path)
    with open_for_writing(path) as ledger:
        ledger.run("UPDATE ledger.decision SET date_a = 'another'")
    record_run(path, command="chronos-acc grid", seed=1, draws=10, record="abc")
    with open_for_reading(path, config=GUARDED):
        yield path


def test_there_are_at_least_fifteen() -> None:
    assert len(QUERIES) >= 15
    assert [q.name for q in QUERIES] == sorted(p.stem for p in files.queries().glob("*.sql"))
    assert len({q.question for q in QUERIES}) == len(QUERIES)


@pytest.fixture(scope="module")
def client(db: Path, tmp_path_factory: pytest.TempPathFactory) -> Iterator[duckdb.DuckDBPyConnection]:
    """Any DuckDB client, on a copy of the same timeline."""
    copy = tmp_path_factory.mktemp("client") / "t.duckdb"
    copy.write_bytes(db.read_bytes())
    with duckdb.connect(str(copy), read_only=True) as connection:
        yield connection


@pytest.mark.parametrize("query", QUERIES, ids=lambda q: q.name)
class TestEachQuery:
    def test_it_documents_its_columns_truthfully_and_finds_something(self, db: Path, query: Q.NamedQuery) -> None:
        frame = Q.run(db, query.name)
        assert list(frame.columns) == list(query.columns)
        assert len(frame) > 0
        assert query.question.endswith("?") and all(query.columns.values()) and all("default" in p for p in query.parameters.values())

    def test_it_is_one_select_with_a_total_order(self, client: duckdb.DuckDBPyConnection, query: Q.NamedQuery) -> None:
        """No two rows share all keys of the last ORDER BY."""
        assert [s.type for s in client.extract_statements(query.sql)] == [duckdb.StatementType.SELECT]
        keys = re.findall(r"^ORDER BY (.*)$", query.sql, flags=re.MULTILINE)[-1]
        body = re.sub(r"^(ORDER BY|LIMIT) .*\n?", "", query.sql, flags=re.MULTILINE)
        plain = _named_only(re.sub(r" (DESC|ASC|NULLS LAST|NULLS FIRST)", "", keys), query)
        assert client.execute(f"SELECT count(*) FROM (SELECT {plain} FROM ({body}) GROUP BY ALL HAVING count(*) > 1)").fetchall() == [(0,)]

    def test_its_parameters_are_used_and_documented(self, query: Q.NamedQuery) -> None:
        assert set(re.findall(r"getvariable\('(\w+)'\)", query.sql)) == set(query.parameters) - {
            p for p in query.parameters if f"'{p}'" not in query.sql
        }
        assert all(f"'{name}'" in query.sql or name in Q.VIEW_VARIABLES for name in query.parameters)  # the views follow these themselves

    def test_the_file_runs_unchanged_in_any_client(self, db: Path, client: duckdb.DuckDBPyConnection, query: Q.NamedQuery) -> None:
        expected = Q.run(db, query.name, {n: VALUES[n] for n in query.parameters})
        for name in query.parameters:
            client.execute(f"SET VARIABLE {name} = ?", [VALUES[name]])
        found = client.execute((files.queries() / f"{query.name}.sql").read_text(encoding="utf-8")).df()
        for name in query.parameters:
            client.execute(f"RESET VARIABLE {name}")
        pd.testing.assert_frame_equal(found, expected)


def _named_only(keys: str, query: Q.NamedQuery) -> str:
    """Order keys as they can be asked of the result: an expression or a prefixed name is read off the column it stands for."""
    out = []
    for key in keys.split(", "):
        bare = re.sub(r"^abs\((\w+)\)$", r"\1", key).rpartition(".")[2]
        out.append(bare)
    assert set(out) <= set(query.columns), (out, query.name)
    return ", ".join(dict.fromkeys(out))


def test_values(db: Path, tmp_path: Path) -> None:
    """A few answers known by hand."""
    overlap = Q.run(db, "overlap").set_index(["source_a", "source_b"])
    assert overlap.loc[("alpha", "beta"), "shared"] == 2 and overlap.loc[("beta", "gamma"), "shared"] == 3
    rejects = Q.run(db, "rejects_by_reason")
    assert rejects.iloc[0].tolist() == ["alpha", "date ... reads in two ways", 2, 8, "c;d"]
    assert Q.run(db, "duplicates")["title"].tolist() == ["gate"]
    assert Q.run(db, "decisions_to_look_at")["status"].tolist() == ["date changed"]
    support = Q.run(db, "support_by_epoch")
    assert (
        support["milestones"].sum() == len(T.record(shutil.copy(db, tmp_path)).window.times)
        and (support["single"] + support["shared"] == support["milestones"]).all()
    )
    series = Q.run(db, "intervals")
    counts = Q.run(db, "counts_per_decade_of_age")
    assert counts["milestones"].sum() == len(series) and counts["cumulative"].iloc[-1] == len(series)
    gaps = Q.run(db, "gaps")
    np.testing.assert_allclose(gaps["interval"], np.sort(series.loc[~series["open"], "interval"])[::-1][: len(gaps)])
    assert Q.run(db, "shortest_intervals", {"rows": 1})["interval"][0] == series.loc[~series["open"], "interval"].min()
    assert (Q.run(db, "systematic_disagreement", {"least_shared": 1})["shared"] >= 1).all()
    alone = Q.run(db, "single_source_milestones", {"list": "gamma"})
    assert alone["title"].tolist() == ["gate", "gate"]


def test_names_that_are_not_there_are_helped(db: Path) -> None:
    with pytest.raises(QueryRefused, match="the query overlap has no parameter 'colour'; it takes none"):
        Q.run(db, "overlap", {"colour": "red"})
    with pytest.raises(QueryRefused, match="no parameter 'lst'; did you mean list"):
        Q.run(db, "entries", {"lst": "alpha"})
    with pytest.raises(QueryRefused, match="did you mean overlap"):
        Q.run(db, "overlp")
    with pytest.raises(QueryRefused, match="query without a name lists them"):
        Q.run(db, "zzzz")
    assert Q.find("SELECT 1") is None and Q.find("overlap") is not None


def test_a_query_file_needs_its_header(tmp_path: Path) -> None:
    (tmp_path / "bare.sql").write_text("SELECT 1\n")
    with pytest.raises(QueryRefused, match="bare.sql needs a question"):
        Q.named(tmp_path)
    found = Q.parse(
        "a", "-- question: What\n--   is it?\n-- parameters:\n--   x = 3: a: b\n-- columns:\n--   y: z\n\nSELECT 1 AS y\n-- after\n"
    )
    assert found.question == "What is it?" and found.parameters == {"x": "a: b (default 3)"} and found.columns == {"y": "z"}
    assert found.sql == "SELECT 1 AS y\n-- after\n"
