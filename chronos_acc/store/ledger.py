# SPDX-License-Identifier: Apache-2.0
"""Opens the timeline file: late, and closed early. Every refusal is one line, and everything read or written goes through one object.

One process may write, or many may read. A file is opened for one step and closed again, so two people can take turns; who holds the
file in between is named where DuckDB tells it.
"""

from __future__ import annotations

import os
import re
from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

import duckdb

from .. import __version__
from ..errors import TimelineRefused

if TYPE_CHECKING:
    import pandas as pd

SCHEMA_VERSION = 1
STORAGE = "v1.2.0"  # the oldest storage format we need; newer clients read it, and so do DuckDB 1.2 to 1.5
Config = dict[str, str | bool | int | float | list[str]]
PLAIN: Config = {"python_enable_replacements": "false", "autoinstall_known_extensions": "false"}
GUARDED: Config = {
    **PLAIN,
    "enable_external_access": "false",
    "autoload_known_extensions": "false",
    "lock_configuration": "true",
}
MAGIC, MAGIC_AT = b"DUCK", 8  # how a DuckDB file begins, after a checksum
FAILURES = (
    duckdb.IOException,
    duckdb.ConnectionException,
    duckdb.SerializationException,
    duckdb.OutOfMemoryException,
    duckdb.FatalException,
    duckdb.InternalException,
)
Params = Sequence[Any]


class Ledger:
    """An open timeline file. Results are fetched whole at once, because an open result keeps the connection to itself."""

    def __init__(self, connection: duckdb.DuckDBPyConnection, path: Path, *, writable: bool) -> None:
        self.connection = connection
        self.path = path
        self.writable = writable

    def rows(self, sql: str, params: Params = ()) -> list[tuple[Any, ...]]:
        """All rows of one statement; values are bound to ``?``."""
        with interrupts():
            return self.connection.execute(sql, list(params)).fetchall()

    def row(self, sql: str, params: Params = ()) -> tuple[Any, ...] | None:
        """The first row, or None."""
        found = self.rows(sql, params)
        return found[0] if found else None

    def value(self, sql: str, params: Params = ()) -> Any:
        """The first value of the first row, or None."""
        found = self.row(sql, params)
        return None if found is None else found[0]

    def frame(self, sql: str, params: Params = ()) -> pd.DataFrame:
        """The result as a data frame."""
        with interrupts():
            return self.connection.execute(sql, list(params)).df()

    def frame_of(self, statement: duckdb.Statement) -> pd.DataFrame:
        """The result of a statement that has been parsed already."""
        with interrupts():
            return self.connection.execute(statement).df()

    def columns(self, sql: str, params: Params = ()) -> dict[str, Any]:
        """The result as plain numpy arrays by column; masked where a column has missing values."""
        with interrupts():
            return self.connection.execute(sql, list(params)).fetchnumpy()

    def run(self, sql: str, params: Params = ()) -> None:
        """One statement whose result nobody needs."""
        self.rows(sql, params)

    def insert(self, table: str, frame: pd.DataFrame | Mapping[str, Any], columns: Mapping[str, str] | None = None) -> int:
        """Append a frame (or a mapping of columns) to a base table, matched by name, never by position.

        ``columns`` maps a column to an SQL expression over the frame's columns where a plain copy will not do. Returns the rows given.
        """
        import pandas as pd

        data = frame if isinstance(frame, pd.DataFrame) else pd.DataFrame(dict(frame))
        if not len(data):
            return 0
        chosen = dict.fromkeys(data.columns) if columns is None else columns
        listed = ", ".join(f"{quoted(n) if e is None else e} AS {quoted(n)}" for n, e in chosen.items())
        self.connection.register("incoming", data)
        try:
            self.run(f"INSERT INTO {table} BY NAME SELECT {listed} FROM incoming")
        finally:
            self.connection.unregister("incoming")
        return len(data)

    @contextmanager
    def transaction(self) -> Iterator[Ledger]:
        """All or nothing: commits at the end, rolls back when anything is raised. Inside another transaction it joins that one."""
        if getattr(self, "_inside", False):
            yield self
            return
        self.connection.begin()
        self._inside = True
        try:
            yield self
            with interrupts():
                self.connection.commit()
        except BaseException:
            try:
                self.connection.rollback()
            except duckdb.Error:  # a failed commit has already ended the transaction
                pass
            raise
        finally:
            self._inside = False

    def new_ids(self, kind: str, count: int = 1) -> int:
        """Reserve ``count`` ids of a kind (source, entry, decision, run) and return the first; an id is never handed out twice."""
        last = self.rows("UPDATE ledger.counter SET last = last + ? WHERE name = ? RETURNING last", [count, kind])[0][0]
        return int(last) - count + 1

    def notation_codes(self, names: Sequence[str]) -> dict[str, int]:
        """Codes of the notations by name; names not seen before are given one."""
        known = {name: int(code) for code, name in self.rows("SELECT code, name FROM ledger.notation")}
        for name in dict.fromkeys(names):
            if name not in known:
                known[name] = max(known.values(), default=0) + 1
                self.run("INSERT INTO ledger.notation VALUES (?, ?)", [known[name], name])
        return known

    def about(self, key: str) -> str | None:
        """A fact about the file, or None."""
        found = self.value("SELECT value FROM ledger.about WHERE key = ?", [key])
        return None if found is None else str(found)

    def set_about(self, key: str, value: object) -> None:
        """Store a fact about the file."""
        self.run("INSERT OR REPLACE INTO ledger.about VALUES (?, ?)", [key, str(value)])

    def entries_changed(self) -> None:
        """To be called in every transaction that changes entries: remembers the year of the first load and takes the milestones away.

        Stale milestones are removed, not kept: a query must not show a link between entries that are gone.
        """
        if self.about("first_loaded_year") is None:
            self.set_about("first_loaded_year", now().year)
        for table in ("link", "member", "milestone", "known_order"):
            self.run(f"DELETE FROM ledger.{table}")
        self.set_about("linked", "no")

    def require_linked(self) -> None:
        """Refuse when milestones are older than entries or decisions."""
        if self.about("linked") == "no":
            raise TimelineRefused(
                f"the milestones of {self.path} are not up to date with its lists and decisions; run: chronos-acc link --db {self.path}"
            )


@contextmanager
def interrupts() -> Iterator[None]:
    """A Ctrl-C while DuckDB works, which DuckDB reports as an error of its own, is a KeyboardInterrupt again."""
    try:
        yield
    except duckdb.InterruptException:
        raise KeyboardInterrupt from None
    except RuntimeError as error:
        if "query interrupted" in str(error).lower():
            raise KeyboardInterrupt from None
        raise


def now() -> datetime:
    """The time now, UTC, without a zone and to the second: as it is stored."""
    return datetime.now(UTC).replace(tzinfo=None, microsecond=0)


def quoted(identifier: str) -> str:
    """An SQL identifier in quotes. The only way a name gets into a statement; values are bound."""
    return '"' + identifier.replace('"', '""') + '"'


@contextmanager
def open_for_reading(db: str | Path, *, config: Config = PLAIN) -> Iterator[Ledger]:
    """The timeline file, read-only. Raises TimelineRefused in one line when it cannot be."""
    path = Path(db)
    _look(path, must_exist=True)
    connection = _connect(path, read_only=True, config=config)
    try:
        _check_version(connection, path)
        with refusals(path):
            yield Ledger(connection, path, writable=False)
    finally:
        connection.close()


@contextmanager
def open_for_writing(db: str | Path, *, create: bool = True) -> Iterator[Ledger]:
    """The timeline file for writing; made when missing unless ``create`` is False. Raises TimelineRefused in one line.

    A file that was made here and that holds nothing when the work on it fails is taken away again.
    """
    path = Path(db)
    _look(path, must_exist=not create)
    made = not path.exists() and _make(path)
    connection = _connect(path, read_only=False, config=PLAIN)
    useless = False
    try:
        _check_version(connection, path, writing=True)
        with refusals(path):
            yield Ledger(connection, path, writable=True)
    except BaseException:
        useless = made and _holds_nothing(connection)
        raise
    finally:
        connection.close()  # writes the write-ahead file into the timeline, so that a copy of the one file is whole
        if useless:
            path.unlink(missing_ok=True)


def _connect(path: Path, *, read_only: bool, config: Config) -> duckdb.DuckDBPyConnection:
    """The database in a file. DuckDB is given the whole path, because it takes some bare names (:memory:, md:x) for something else."""
    try:
        with refusals(path), interrupts():
            return duckdb.connect(str(path.absolute()), read_only=read_only, config=dict(config))
    except duckdb.Error as error:  # whatever else it says of a file that it will not open
        said = _first(" ".join(str(error).split()))
        raise TimelineRefused(f"{path} cannot be opened as a timeline: {said}; choose another --db") from error


def _holds_nothing(connection: duckdb.DuckDBPyConnection) -> bool:
    """Whether nobody has put anything into a timeline yet."""
    try:
        return all(
            connection.execute(f"SELECT count(*) FROM ledger.{name}").fetchall() == [(0,)]
            for name in ("source", "decision", "stated_order", "run")
        )
    except (duckdb.Error, RuntimeError):
        return False


def _make(path: Path) -> bool:
    """A new timeline, made beside its place and then put there: whoever is killed meanwhile leaves no half file under its name.

    Returns whether it was made here: False where somebody else made one in the meantime.
    """
    spare = path.with_name(f".{path.name}.{os.getpid()}.new")
    try:
        with refusals(path):
            spare.unlink(missing_ok=True)
            connection = duckdb.connect(str(spare.absolute()), config={**PLAIN, "storage_compatibility_version": STORAGE})
            try:
                _create(connection)
            finally:
                connection.close()
            try:
                os.link(spare, path)  # unlike a rename, it never replaces a file that somebody else made in the meantime
            except FileExistsError:
                return False
            except OSError:  # a file system without hard links
                if path.exists():
                    return False
                os.replace(spare, path)
            return True
    finally:
        spare.unlink(missing_ok=True)
        spare.with_name(f"{spare.name}.wal").unlink(missing_ok=True)


def _create(connection: duckdb.DuckDBPyConnection) -> None:
    """Tables, views and comments, in one transaction."""
    here = Path(__file__).parent
    connection.begin()
    for name in ("schema.sql", "views.sql", "analysis.sql"):
        connection.execute((here / name).read_text(encoding="utf-8")).fetchall()
    facts = {"schema_version": SCHEMA_VERSION, "made_by": f"chronos_acc {__version__}", "created": now().isoformat(), "linked": "yes"}
    for key, value in facts.items():
        connection.execute("INSERT INTO ledger.about VALUES (?, ?)", [key, str(value)]).fetchall()
    connection.commit()


def _look(path: Path, *, must_exist: bool) -> None:
    """Refuse what cannot be a timeline before DuckDB sees it, which would open a list of rows as a database of its own."""
    from .formats import of_file  # here, because a format needs this module

    with refusals(path):
        if path.is_dir():
            raise TimelineRefused(f"{path} is a folder; --db takes a timeline file")
        if not path.exists():
            if must_exist:
                raise TimelineRefused(f"there is no timeline file {path}; make one with: chronos-acc load FILE --db {path}")
            if not path.absolute().parent.is_dir():
                raise TimelineRefused(f"the folder of {path} does not exist; make it first")
            if of_file(path.name):
                raise TimelineRefused(f"{path} has the ending of a list; give a timeline another, such as {path.stem}.duckdb")
            return
        if not path.is_file():
            raise TimelineRefused(f"{path} is a device or a pipe; --db takes a timeline file")
        if path.stat().st_size == 0:
            raise TimelineRefused(f"{path} is empty (0 bytes), so it is no timeline file; remove it or choose another --db")
        with path.open("rb") as file:
            known = file.read(MAGIC_AT + len(MAGIC))[MAGIC_AT:] == MAGIC
    if not known:
        hint = f"it is a list: load it into a timeline with chronos-acc load {path}" if of_file(path.name) else "choose another --db"
        raise TimelineRefused(f"{path} is no DuckDB file; {hint}")


def _check_version(connection: duckdb.DuckDBPyConnection, path: Path, *, writing: bool = False) -> None:
    with refusals(path):
        try:
            found = connection.execute("SELECT value FROM ledger.about WHERE key = 'schema_version'").fetchall()
        except (duckdb.CatalogException, duckdb.BinderException):
            if writing and not connection.execute("SHOW ALL TABLES").fetchall():
                _create(connection)  # a database without any table: nobody's
                return
            raise TimelineRefused(f"{path} is a DuckDB file, but no timeline; choose another --db") from None
    version = int(found[0][0]) if found and str(found[0][0]).isdigit() else 0
    if version > SCHEMA_VERSION:
        raise TimelineRefused(
            f"{path} has schema version {version}, made by a newer chronos_acc; this one reads up to {SCHEMA_VERSION}; update the program"
        )
    if version < SCHEMA_VERSION:
        raise TimelineRefused(
            f"{path} has schema version {version or 'unknown'}; this chronos_acc reads {SCHEMA_VERSION}; load the lists into a new file"
        )


@contextmanager
def refusals(path: Path) -> Iterator[None]:
    """Turn what DuckDB and the system say about the file into one line of ours."""
    try:
        with interrupts():
            yield
    except duckdb.InvalidInputException as error:
        if "read-only" in str(error):
            raise TimelineRefused(f"{path} is open for reading only; open it for writing first") from error
        raise
    except FAILURES as error:
        raise TimelineRefused(_sentence(path, str(error))) from error
    except duckdb.TransactionException as error:  # a commit that failed, most often for want of room
        if "failed to commit" in str(error).lower():
            raise TimelineRefused(_sentence(path, str(error))) from error
        raise
    except OSError as error:
        if error.filename is None or Path(str(error.filename)).name.strip(".").startswith(path.name):
            raise TimelineRefused(_sentence(path, str(error))) from error
        raise


def _sentence(path: Path, said: str) -> str:
    text = " ".join(said.split())
    low = text.lower()
    held = re.search(r"held in (\S+) \(PID (\d+)\)", text)
    if held:
        return f"{path} is held by process {held[2]} ({Path(held[1]).name}); wait until it is done, or end it, and try again"
    if "could not set lock" in low:
        return f"{path} is held by another process; wait until it is done and try again"
    if "different configuration" in low or "same database file" in low or "unique file handle" in low:
        return f"{path} is already open in this process; close it first"
    if "no space left" in low or "disk full" in low or "could not write" in low or "file size" in low or "maximum swap" in low:
        return f"{path} could not be written: {_first(text)}; nothing was changed; make room and try again"
    if "not a valid duckdb" in low:
        return f"{path} is no DuckDB file; choose another --db"
    if "version number" in low or "storage version" in low or "newer version" in low:
        return f"{path} was written in a storage format this DuckDB does not read: {_first(text)}; update duckdb"
    if "permission denied" in low or "read-only file system" in low:
        return f"{path} may not be read or written here (permission denied); change its rights or choose another --db"
    if "out of memory" in low:
        return f"{path}: out of memory: {_first(text)}; close other programs and try again"
    if path.name in text or "database" in low or "checksum" in low:
        return f"{path} cannot be used: {_first(text)}; if it was damaged, go back to a copy or load the lists into a new file"
    return f"work on {path} was stopped: {_first(text)}; nothing was changed"


def _first(text: str) -> str:
    return text.split(". See ")[0].split(" See also")[0].rstrip(".")[:200]
