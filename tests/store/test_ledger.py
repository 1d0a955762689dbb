# SPDX-License-Identifier: Apache-2.0
"""The timeline file: what it refuses, in one line, and what survives a kill."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
from pathlib import Path

import duckdb
import pytest

from chronos_acc.errors import TimelineRefused
from chronos_acc.store import ledger as L
from chronos_acc.store.ledger import open_for_reading, open_for_writing, quoted

ROOT = Path(__file__).resolve().parents[2]


def _python(code: str, *, check: bool = True) -> subprocess.CompletedProcess[str]:
    return subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, check=check, timeout=60)


def _refused(path: Path, writing: bool = False) -> str:
    with pytest.raises(TimelineRefused) as caught:
        with open_for_writing(path) if writing else open_for_reading(path):
            pass
    message = str(caught.value)
    assert "\n" not in message and path.name in message
    return message


@pytest.fixture
def db(tmp_path: Path) -> Path:
    path = tmp_path / "t.duckdb"
    with open_for_writing(path):
        pass
    return path


def test_missing_file_names_the_command_that_makes_one(tmp_path: Path) -> None:
    assert "chronos-acc load" in _refused(tmp_path / "none.duckdb")
    with pytest.raises(TimelineRefused, match="chronos-acc load"), open_for_writing(tmp_path / "none.duckdb", create=False):
        pass
    assert "does not exist; make it first" in _refused(tmp_path / "no" / "none.duckdb", writing=True)


@pytest.mark.parametrize("writing", [False, True])
def test_files_that_are_no_timeline(tmp_path: Path, writing: bool) -> None:
    empty, text, foreign = tmp_path / "empty.duckdb", tmp_path / "text.duckdb", tmp_path / "foreign.duckdb"
    empty.touch()
    text.write_text("title,date\nkiln,1200\n" * 500)
    with duckdb.connect(str(foreign)) as con:
        con.execute("CREATE TABLE kilns (a INTEGER)")
    assert "0 bytes" in _refused(empty, writing)
    assert "no DuckDB file" in _refused(text, writing)
    assert "no timeline" in _refused(foreign, writing)
    assert "is a folder" in _refused(tmp_path, writing)


@pytest.mark.parametrize(("version", "words"), [("2", "newer chronos_acc"), ("0", "load the lists into a new file"), ("x", "unknown")])
def test_other_schema_versions(db: Path, version: str, words: str) -> None:
    with open_for_writing(db) as ledger:
        ledger.set_about("schema_version", version)
    assert words in _refused(db)
    assert words in _refused(db, writing=True)


def test_a_file_held_by_another_process_names_it(db: Path) -> None:
    code = f"import duckdb, sys; c = duckdb.connect({str(db)!r}); print('up', flush=True); sys.stdin.read()"
    with subprocess.Popen([sys.executable, "-c", code], stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True) as holder:
        assert holder.stdout is not None and holder.stdout.readline() == "up\n"
        for writing in (False, True):
            assert f"held by process {holder.pid}" in _refused(db, writing)
    with open_for_reading(db) as ledger:
        assert ledger.about("schema_version") == str(L.SCHEMA_VERSION)


def test_open_twice_in_one_process_is_one_line(db: Path) -> None:
    with open_for_reading(db):
        assert "already open in this process" in _refused(db, writing=True)


def test_writing_to_a_reader_is_refused(db: Path) -> None:
    with pytest.raises(TimelineRefused, match="for reading only"), open_for_reading(db) as ledger:
        ledger.set_about("a", 1)


def test_a_place_that_cannot_be_written(tmp_path: Path) -> None:
    if os.geteuid() == 0:
        place = Path("/sys")  # even the superuser may not write there
    else:
        place = tmp_path / "shut"
        place.mkdir()
        place.chmod(0o500)
    if not place.is_dir():
        pytest.skip("no folder here that refuses everybody")
    assert "may not be read or written" in _refused(place / "t.duckdb", writing=True)
    assert not [p for p in place.iterdir() if p.name.startswith(".t.duckdb")]


def test_a_full_disk_is_one_line_and_changes_nothing(db: Path) -> None:
    code = f"""
import resource, signal
from chronos_acc.errors import TimelineRefused
from chronos_acc.store.ledger import open_for_writing
signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
resource.setrlimit(resource.RLIMIT_FSIZE, (1_500_000, 1_500_000))
try:
    with open_for_writing({str(db)!r}) as ledger, ledger.transaction():
        ledger.run("INSERT INTO ledger.reject SELECT 1, i, md5(i::VARCHAR) || md5((i + 1)::VARCHAR), 'x' FROM range(300000) AS r(i)")
except TimelineRefused as refused:
    print(refused)
"""
    said = _python(code).stdout.strip()
    assert "could not be written" in said and "make room" in said and "\n" not in said
    with open_for_reading(db) as ledger:
        assert ledger.value("SELECT count(*) FROM ledger.reject") == 0


def test_a_killed_writer_leaves_what_was_committed(db: Path) -> None:
    code = f"""
import os, signal
from chronos_acc.store.ledger import open_for_writing
with open_for_writing({str(db)!r}) as ledger:
    with ledger.transaction():
        ledger.set_about("first", 1)
    ledger.connection.begin()
    ledger.set_about("second", 2)
    ledger.run("INSERT INTO ledger.reject SELECT 1, i, 'y', 'x' FROM range(200000) AS r(i)")
    os.kill(os.getpid(), signal.SIGKILL)
"""
    assert _python(code, check=False).returncode == -signal.SIGKILL
    with open_for_reading(db) as ledger:
        assert (ledger.about("first"), ledger.about("second")) == ("1", None)
        assert ledger.value("SELECT count(*) FROM ledger.reject") == 0


def test_making_a_file_never_replaces_one_and_leaves_no_scraps(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "t.duckdb"
    with open_for_writing(path) as ledger:
        ledger.set_about("mine", "yes")
    L._make(path)  # as if another process had looked before the file was there
    with open_for_reading(path) as ledger:
        assert ledger.about("mine") == "yes"
    assert [p.name for p in tmp_path.iterdir()] == ["t.duckdb"]

    def no_links(*_: object) -> None:
        raise OSError(95, "not supported")

    monkeypatch.setattr(L.os, "link", no_links)
    other = tmp_path / "other.duckdb"
    with open_for_writing(other) as ledger:
        assert ledger.about("linked") == "yes"


def test_transactions_are_all_or_nothing_and_nest(db: Path) -> None:
    with open_for_writing(db) as ledger:
        with pytest.raises(KeyError), ledger.transaction():
            ledger.set_about("a", 1)
            with ledger.transaction():
                ledger.set_about("b", 2)
            raise KeyError
        assert (ledger.about("a"), ledger.about("b")) == (None, None)
        with ledger.transaction():
            ledger.set_about("a", 3)
    with open_for_reading(db) as ledger:
        assert ledger.about("a") == "3"


def test_ids_are_never_handed_out_twice(db: Path) -> None:
    with open_for_writing(db) as ledger:
        assert [ledger.new_ids("entry", 3), ledger.new_ids("entry"), ledger.new_ids("run")] == [1, 4, 1]
        assert ledger.notation_codes(["year", "range", "year"]) == {"year": 1, "range": 2}
        assert ledger.notation_codes(["range", "decade"])["decade"] == 3


def test_frames_are_matched_by_name(db: Path) -> None:
    with open_for_writing(db) as ledger:
        ledger.insert(
            "ledger.member",
            {"high": [4.0], "low": [1.0], "mode": [2.0], "weight": [1.0], "normal": [False], "milestone": [7], "entry": [9]},
        )
        assert ledger.rows("SELECT entry, milestone, low, mode, high FROM ledger.member") == [(9, 7, 1.0, 2.0, 4.0)]
        assert ledger.insert("ledger.member", {"entry": []}) == 0


def test_identifiers_are_quoted_in_one_way() -> None:
    assert quoted('a"b') == '"a""b"'
