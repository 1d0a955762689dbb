# SPDX-License-Identifier: Apache-2.0
"""The schema: everything is explained, bounds are held, and older DuckDB opens it."""

from __future__ import annotations

import os
import subprocess
from pathlib import Path

import duckdb
import pytest

from chronos_acc import files
from chronos_acc.store.ledger import STORAGE, open_for_reading, open_for_writing
from tests.store.timelines import two_lists

VIEWS = [
    "decisions",
    "disagreement",
    "entries",
    "epochs",
    "gaps",
    "intervals",
    "links",
    "members",
    "milestones",
    "orders",
    "overlap",
    "rejects",
    "runs",
    "sources",
]


@pytest.fixture(scope="module")
def db(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return two_lists(tmp_path_factory.mktemp("schema") / "t.duckdb")


def test_show_tables_lists_what_people_should_see(db: Path) -> None:
    with open_for_reading(db) as ledger:
        assert [name for (name,) in ledger.rows("SHOW TABLES")] == VIEWS


@pytest.mark.parametrize(
    "catalogue",
    [
        "SELECT table_name AS name, comment FROM duckdb_tables() WHERE NOT internal",
        "SELECT view_name AS name, comment FROM duckdb_views() WHERE NOT internal",
        "SELECT table_name || '.' || column_name AS name, comment FROM duckdb_columns() WHERE NOT internal",
        "SELECT function_name AS name, comment FROM duckdb_functions() WHERE NOT internal",
    ],
)
def test_everything_has_a_comment_even_read_only(db: Path, catalogue: str) -> None:
    with open_for_reading(db) as ledger:
        rows = ledger.rows(f"SELECT name, comment FROM ({catalogue}) ORDER BY name")
    assert len(rows) > 5
    assert [name for name, comment in rows if not comment] == []


def test_the_contract_of_the_entries_view(db: Path) -> None:
    with open_for_reading(db) as ledger:
        columns = [c for c, *_ in ledger.rows("DESCRIBE entries")]
        assert columns[:10] == ["entry", "source", "title", "earliest", "best", "latest", "shape", "notation", "date_text", "row"]
        assert {r[0] for r in ledger.rows("SELECT shape FROM entries")} == {"uniform"}
        assert [c for c, *_ in ledger.rows("DESCRIBE links")][:6] == ["source_a", "title_a", "source_b", "title_b", "score", "state"]


@pytest.mark.parametrize("bounds", ["'nan', 1, 2", "1, 'nan', 2", "NULL, 1, 2", "2, 1, 3", "1, 3, 2", "'-inf', 1, 2", "1, 2, 'inf'"])
def test_bounds_are_finite_and_ordered(tmp_path: Path, bounds: str) -> None:
    with open_for_writing(tmp_path / "t.duckdb") as ledger, pytest.raises(duckdb.ConstraintException):
        ledger.run(
            f"INSERT INTO ledger.entry (entry, source, row, title, notation, earliest, best, latest) VALUES (1, 1, 1, 'a', 1, {bounds})"
        )


def test_rows_of_a_list_add_up(tmp_path: Path) -> None:
    with open_for_writing(tmp_path / "t.duckdb") as ledger, pytest.raises(duckdb.ConstraintException):
        ledger.run("INSERT INTO ledger.source (source, name, rows_read, rows_loaded, rows_rejected) VALUES (1, 'a', 3, 1, 1)")


def test_the_file_keeps_the_old_storage_format_over_later_writes(db: Path) -> None:
    for _ in range(2):
        with open_for_writing(db) as ledger:
            ledger.set_about("touched", "again")
            tags = ledger.value("SELECT tags FROM duckdb_databases() WHERE database_name = 't'")
            if tags:  # the oldest clients do not tell
                assert tags["storage_version"].startswith(STORAGE)


def test_an_older_duckdb_opens_it(db: Path) -> None:
    """With CHRONOS_ACC_OLDER_PYTHON naming an interpreter that has DuckDB 1.4 or 1.5: every view, macro and named query runs there."""
    python = os.environ.get("CHRONOS_ACC_OLDER_PYTHON")
    if not python:
        pytest.skip("CHRONOS_ACC_OLDER_PYTHON names no interpreter with an older DuckDB")
    code = """
import pathlib, sys, duckdb
con = duckdb.connect(sys.argv[1], read_only=True)
for (name,) in con.execute("SHOW TABLES").fetchall():
    con.execute(f"FROM {name}").fetchall()
con.execute("FROM intervals_of('alpha')").fetchall()
con.execute("SET VARIABLE present = 1900")
print(duckdb.__version__, con.execute("SELECT count(*) FROM intervals").fetchall()[0][0])
for path in sorted(pathlib.Path(sys.argv[2]).glob("*.sql")):
    con.execute(path.read_text(encoding="utf-8")).fetchall()
"""
    done = subprocess.run([python, "-c", code, str(db), str(files.queries())], capture_output=True, text=True, timeout=60)
    assert done.returncode == 0, done.stderr
    with open_for_reading(db) as ledger:
        ledger.run("SET VARIABLE present = 1900")
        assert done.stdout.split()[1] == str(ledger.value("SELECT count(*) FROM intervals"))
