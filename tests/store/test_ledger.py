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


@pytest.mark.parametrize("writing", [False, True])
def test_a_list_or_a_device_is_no_timeline_and_stays_as_it_is(tmp_path: Path, writing: bool) -> None:
    for name in ("list.csv", "list.tsv", "list.json", "list.csv.gz"):
        file = tmp_path / name
        file.write_text("title,date\nkiln,1200\n")
        assert "it is a list: load it" in _refused(file, writing)
        assert file.read_text() == "title,date\nkiln,1200\n"
    packed = tmp_path / "list.parquet"
    duckdb.sql("SELECT 'kiln' AS title, 1200 AS date").write_parquet(str(packed))
    assert "it is a list" in _refused(packed, writing)
    (tmp_path / "short.duckdb").write_bytes(b"DUCK")
    assert "no DuckDB file" in _refused(tmp_path / "short.duckdb", writing)
    (tmp_path / "cut.duckdb").write_bytes(b"\0" * 8 + b"DUCK" + b"\0" * 100)
    _refused(tmp_path / "cut.duckdb", writing)
    assert "a device" in _refused(Path(os.devnull), writing)
    new = _refused(tmp_path / "new.csv", writing)
    assert "new.duckdb" in new if writing else "there is no timeline file" in new
    assert not (tmp_path / "new.csv").exists()


def test_whatever_duckdb_raises_on_opening_is_one_line(db: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def connect(*_: object, **__: object) -> None:
        raise duckdb.CatalogException("Catalog Error: Cannot launch\nanything")

    monkeypatch.setattr(L.duckdb, "connect", connect)
    for writing in (False, True):
        assert "Cannot launch anything" in _refused(db, writing)


def test_names_that_mean_something_to_duckdb_are_files_here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    with open_for_writing(":memory:") as ledger:
        ledger.set_about("mine", "yes")
    with open_for_reading(":memory:") as ledger:
        assert ledger.about("mine") == "yes"


class _Interrupted:
    """A connection on which somebody presses Ctrl-C."""

    def execute(self, *_: object) -> None:
        raise RuntimeError("Query interrupted")

    commit = execute

    def begin(self) -> None:
        """A transaction that can be begun."""

    rollback = begin


@pytest.mark.parametrize("how", ["rows", "row", "value", "frame", "columns", "run", "frame_of", "transaction"])
def test_an_interrupt_inside_duckdb_is_a_keyboard_interrupt(how: str) -> None:
    ledger = L.Ledger(_Interrupted(), Path("t.duckdb"), writable=True)  # type: ignore[arg-type]
    with pytest.raises(KeyboardInterrupt):
        if how == "transaction":
            with ledger.transaction():
                pass
        else:
            getattr(ledger, how)("SELECT 1")


def test_other_runtime_errors_pass(db: Path) -> None:
    with pytest.raises(RuntimeError, match="mine"), open_for_reading(db):
        raise RuntimeError("mine")
    with pytest.raises(KeyboardInterrupt), open_for_reading(db):
        raise duckdb.InterruptException("INTERRUPT Error: Interrupted!")


def test_a_file_made_for_work_that_failed_is_taken_away(tmp_path: Path) -> None:
    path = tmp_path / "t.duckdb"
    with pytest.raises(KeyError), open_for_writing(path) as ledger, ledger.transaction():
        ledger.new_ids("source")
        raise KeyError
    assert not list(tmp_path.iterdir())
    with pytest.raises(KeyError), open_for_writing(path) as ledger:
        ledger.run("INSERT INTO ledger.source (source, name) VALUES (1, 'kept')")
        raise KeyError
    with open_for_reading(path) as ledger:
        assert ledger.value("SELECT name FROM ledger.source") == "kept"


def test_an_empty_timeline_that_was_there_stays(db: Path) -> None:
    with pytest.raises(KeyError), open_for_writing(db):
        raise KeyError
    assert db.exists()


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
