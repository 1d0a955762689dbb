# SPDX-License-Identifier: Apache-2.0
"""A person's SQL: it reads the timeline and nothing else."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from chronos_acc.errors import QueryRefused, TimelineRefused
from chronos_acc.store import query as Q
from chronos_acc.store.ledger import GUARDED, open_for_reading
from tests.store.timelines import make, two_lists

FORBIDDEN = (
    # reading files and folders
    "SELECT * FROM read_csv('{file}')",
    "SELECT * FROM read_text('{file}')",
    "SELECT * FROM read_blob('{file}')",
    "SELECT * FROM read_json('{file}')",
    "SELECT * FROM read_parquet('{file}')",
    "SELECT * FROM sniff_csv('{file}')",
    "SELECT * FROM glob('{folder}/*')",
    "FROM '{file}'",
    "SELECT * FROM query('SELECT * FROM read_text(''{file}'')')",
    "SELECT (SELECT count(*) FROM read_text('{file}')) FROM entries",
    "WITH a AS (SELECT * FROM read_csv('{file}')) SELECT * FROM a",
    "FROM 'https://example.org/list.csv'",
    # writing files
    "COPY (SELECT 1) TO '{folder}/out.csv'",
    "COPY entries TO '{folder}/out.parquet'",
    "EXPORT DATABASE '{folder}/out'",
    "IMPORT DATABASE '{folder}'",
    # other databases and extensions
    "ATTACH '{folder}/other.duckdb'",
    "ATTACH ':memory:' AS other",
    "DETACH t",
    "USE main",
    "INSTALL httpfs",
    "LOAD httpfs",
    "SELECT * FROM sqlite_scan('{file}', 'a')",
    # settings
    "SET threads = 1",
    "SET enable_external_access = true",
    "SET VARIABLE present = 1900",
    "RESET threads",
    "PRAGMA database_list",
    "PRAGMA enable_profiling",
    "CALL enable_logging()",
    "SELECT * FROM enable_logging()",
    "FROM truncate_duckdb_logs()",
    "FROM checkpoint()",
    "/* a */ -- b\nPRAGMA version",
    # changing the timeline
    "CREATE TABLE a (b INTEGER)",
    "CREATE TEMP TABLE a AS SELECT 1",
    "CREATE OR REPLACE VIEW entries AS SELECT 1",
    "CREATE MACRO f(x) AS x",
    "CREATE SECRET (TYPE s3)",
    "INSERT INTO ledger.about VALUES ('a', 'b')",
    "UPDATE ledger.entry SET best = 0",
    "DELETE FROM ledger.entry",
    "TRUNCATE ledger.entry",
    "DROP VIEW entries",
    "ALTER TABLE ledger.entry ADD COLUMN a INTEGER",
    "COMMENT ON VIEW entries IS 'a'",
    "WITH a AS (DELETE FROM ledger.entry RETURNING *) SELECT * FROM a",
    "MERGE INTO ledger.about USING (SELECT 1) ON false WHEN NOT MATCHED THEN INSERT VALUES ('a', 'b')",
    # more than one statement, none, or another kind
    "SELECT 1; SELECT 2",
    "SELECT 1; DROP VIEW entries",
    "SELECT 1;; COPY (SELECT 1) TO '{folder}/out.csv'",
    "",
    " -- nothing",
    "BEGIN",
    "BEGIN TRANSACTION",
    "CHECKPOINT",
    "VACUUM ANALYZE",
    "PREPARE a AS SELECT 1",
    "EXECUTE a",
    "EXPLAIN ANALYZE SELECT 1",
    "PIVOT entries ON source USING count(*)",
    # mistakes
    "SELEC 1",
    "SELECT no_such_column FROM entries",
    "SELECT * FROM no_such_table",
    "SELECT ?",
    "SELECT $a",
    "SELECT error('made up')",
    "SELECT 'x'::DOUBLE",
)


@pytest.fixture(scope="module")
def db(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Path]:
    """Held open as ``run`` opens it, which makes opening it again cheap."""
    path = two_lists(tmp_path_factory.mktemp("guard") / "t.duckdb")
    with open_for_reading(path, config=GUARDED):
        yield path


def test_forbidden_statements_fail_with_one_line_and_leave_no_trace(db: Path) -> None:
    file = db.with_name("list.csv")
    file.write_text("title,date\nkiln,1200\n")
    (db.with_name("other.duckdb")).unlink(missing_ok=True)
    before, names = db.read_bytes(), sorted(p.name for p in db.parent.iterdir())
    texts = [s.replace("{file}", str(file)).replace("{folder}", str(db.parent)) for s in FORBIDDEN]

    def refused(attempt: Callable[[], object]) -> None:
        with pytest.raises(QueryRefused) as caught:
            attempt()
        assert "\n" not in str(caught.value) and len(str(caught.value)) < 500

    for text in texts:
        refused(lambda text=text: Q.run(db, text))
    assert db.read_bytes() == before and sorted(p.name for p in db.parent.iterdir()) == names


@pytest.mark.parametrize(
    "statement",
    [
        "SELECT count(*) AS n FROM entries",
        "FROM milestones ORDER BY best LIMIT 3;",
        "WITH a AS (SELECT 1 AS b) SELECT b FROM a",
        "VALUES (1), (2)",
        "SHOW TABLES",
        "DESCRIBE entries",
        "SUMMARIZE milestones",
        "SELECT comment FROM duckdb_views() WHERE view_name = 'entries'",
        "-- why not\nSELECT 1 /* ; */ AS a",
        "SELECT ';' AS a",
        "FROM intervals_at_support(1)",
    ],
)
def test_what_reads_the_timeline_is_allowed(db: Path, statement: str) -> None:
    assert len(Q.run(db, statement)) > 0


def test_python_variables_are_not_seen(db: Path) -> None:
    import pandas as pd

    frame = pd.DataFrame({"a": [1]})
    with pytest.raises(QueryRefused, match="frame does not exist"):
        Q.run(db, "SELECT * FROM frame")
    assert len(frame) == 1


def test_settings_become_variables(db: Path) -> None:
    assert Q.run(db, "SELECT getvariable('a') AS a, getvariable('b') AS b", {"a": "007", "b": "-1.5e2"}).iloc[0].tolist() == ["007", -150.0]
    young = Q.run(db, "SELECT max(year) AS y FROM intervals", {"present": "1700"})["y"][0]
    assert young <= 1700
    assert Q.run(db, "SELECT min(year) AS y FROM intervals", {"start": 1500})["y"][0] >= 1500
    with pytest.raises(QueryRefused, match="no parameter 'presnt'; did you mean present"):
        Q.run(db, "SELECT 1", {"presnt": 1})
    with pytest.raises(QueryRefused, match="the parameter present takes a number, not 'soon'"):
        Q.run(db, "SELECT * FROM intervals", {"present": "soon"})


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("1850", 1850),
        ("-500", -500),
        ("0", 0),
        ("007", "007"),
        ("1.5", 1.5),
        ("1e3", 1000.0),
        (".5", ".5"),
        ("1_000", "1_000"),
        ("nan", "nan"),
        ("", ""),
        ("٣", "٣"),
        ("1" * 30, 1e30 / 9),
    ],
)
def test_text_that_is_written_as_a_number_is_one(text: str, value: object) -> None:
    found = Q.as_value(text)
    assert type(found) is type(value)
    assert found == (pytest.approx(value) if isinstance(value, float) else value)


def test_remarks_tell_when_linking_is_due(tmp_path: Path) -> None:
    assert Q.remarks(two_lists(tmp_path / "t.duckdb")) == ()
    stale = make(tmp_path / "s.duckdb", {"a": [("x", 1900.5)]}, link=False)
    assert "chronos-acc link" in Q.remarks(stale)[0]
    with pytest.raises(TimelineRefused, match="no timeline file"):
        Q.run(tmp_path / "none.duckdb", "SELECT 1")
