# SPDX-License-Identifier: Apache-2.0
"""A whole timeline as a folder and back: Parquet tables, sheets, decisions, and a manifest with hashes. And taking a list out.

manifest.json           what is here: every file with its rows and SHA-256
ledger/*.parquet        the base tables; loading the folder reads these
entries.parquet, milestones.parquet, intervals.parquet      the views, for other programs
sheets/NAME.toml        the lists' sheets as they were
decisions.csv           decisions with their status
"""

from __future__ import annotations

import difflib
import hashlib
import json
import shutil
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

import duckdb

from .. import __version__
from ..errors import ListRefused, WrongUse
from ..progress import Tell, silent
from .ledger import SCHEMA_VERSION, Ledger, open_for_reading, open_for_writing
from .linking import relink_open

if TYPE_CHECKING:
    import pandas as pd

MANIFEST = "manifest.json"
FORMAT = "chronos_acc timeline"
TABLES = {
    "about": "key",
    "counter": "name",
    "source": "source",
    "notation": "code",
    "entry": "entry",
    "reject": "source, row, raw, reason",
    "link": "a, b",
    "decision": "decision",
    "milestone": "milestone",
    "member": "entry",
    "stated_order": "origin, earlier, later",
    "known_order": "earlier, later, stated_by",
    "run": "run",
}
VIEWS = {"entries": "entry", "milestones": "milestone", "intervals": "year, milestone"}


@dataclass(frozen=True)
class Exported:
    """The files that were written, in the order of the manifest: name, rows (None where it is no table), bytes, sha256."""

    folder: Path
    files: tuple[dict[str, Any], ...]

    def to_frame(self) -> pd.DataFrame:
        """One row a file."""
        import pandas as pd

        return pd.DataFrame(list(self.files), columns=["file", "rows", "bytes", "sha256"]).astype({"rows": "Int64"})


@dataclass(frozen=True)
class Restored:
    """What loading an exported folder brought back: its lists as (name, rows_read, rows_loaded, rows_rejected, duplicates), and remarks."""

    lists: tuple[tuple[str, int, int, int, int], ...]
    changed: bool
    milestones: int
    notes: tuple[str, ...] = ()


@dataclass(frozen=True)
class Unloaded:
    """What left with a list, how many milestones remain, and how to get the former state back."""

    source: str
    entries: int
    rejects: int
    milestones: int
    notes: tuple[str, ...] = ()


def export(db: str | Path, folder: str | Path, *, tell: Tell = silent) -> Exported:
    """Write the timeline into an empty or new folder; the same timeline gives the same bytes. WrongUse for a folder that is in use."""
    target = Path(folder)
    if target.exists() and (not target.is_dir() or any(target.iterdir())):
        raise WrongUse(f"{target} is {'not empty' if target.is_dir() else 'a file'}; export takes an empty or new folder")
    listed: list[dict[str, Any]] = []
    with open_for_reading(db) as ledger:
        (target / "ledger").mkdir(parents=True, exist_ok=True)
        jobs = [(f"ledger/{name}.parquet", f"FROM ledger.{name} ORDER BY {order}") for name, order in TABLES.items()]
        jobs += [(f"{name}.parquet", f"FROM {name} ORDER BY {order}") for name, order in VIEWS.items()]
        for i, (name, sql) in enumerate(jobs):
            tell(f"writing {name}", i / len(jobs))
            ledger.run(f"COPY ({sql}) TO {_text(target / name)} (FORMAT parquet, COMPRESSION zstd)")
            listed.append(_listed(target, name, int(ledger.value(f"SELECT count(*) FROM ({sql})"))))
        for source, sheet in ledger.rows("SELECT name, sheet FROM ledger.source WHERE sheet IS NOT NULL ORDER BY source"):
            (target / "sheets").mkdir(exist_ok=True)
            name = f"sheets/{_file_name(source)}.toml"
            if (target / name).exists():
                name = f"sheets/{_file_name(source)}-{hashlib.sha256(str(source).encode()).hexdigest()[:8]}.toml"
            (target / name).write_text(sheet, encoding="utf-8", newline="")
            listed.append(_listed(target, name, None))
        decisions = ledger.frame("SELECT * EXCLUDE (entry_a, entry_b) FROM decisions ORDER BY decision")
    decisions.to_csv(target / "decisions.csv", index=False, encoding="utf-8", lineterminator="\n")
    listed.append(_listed(target, "decisions.csv", len(decisions)))
    manifest = {"format": FORMAT, "schema_version": SCHEMA_VERSION, "made_by": f"chronos_acc {__version__}", "files": listed}
    (target / MANIFEST).write_text(json.dumps(manifest, indent=1, ensure_ascii=False) + "\n", encoding="utf-8")
    return Exported(target, tuple(listed))


def is_export(folder: str | Path) -> bool:
    """Whether a folder is one that ``export`` wrote."""
    path = Path(folder) / MANIFEST
    if not path.is_file():
        return False
    try:
        return bool(json.loads(path.read_text(encoding="utf-8")).get("format") == FORMAT)
    except (ValueError, AttributeError, OSError):
        return False


def restore(db: str | Path, folder: str | Path, *, tell: Tell = silent) -> Restored:
    """Bring an exported timeline back into a new or empty file: same ids, links, decisions and runs. All or nothing.

    Every file is held against its hash first. Raises ListRefused for a folder that is damaged or changed, or when the timeline
    already holds other lists; where it holds the very same, nothing changes.
    """
    source = Path(folder)
    _verify(source)
    with open_for_writing(db) as ledger, _plain_paths(source) as tables, ledger.transaction():
        reading = {name: f"read_parquet({_text(tables / f'{name}.parquet')})" for name in TABLES}
        try:
            changed = bool(ledger.value("SELECT count(*) FROM ledger.source")) is False
            if changed:
                for i, (name, path) in enumerate(reading.items()):
                    tell(f"reading {name}", i / len(reading))
                    ledger.run(f"DELETE FROM ledger.{name}")
                    ledger.run(f"INSERT INTO ledger.{name} BY NAME FROM {path}")
            elif any(not _alike(ledger, f"ledger.{name}", path) for name, path in reading.items()):
                raise ListRefused(f"{db} already holds lists other than those of {source}; load the folder into a new file with --db")
        except (duckdb.BinderException, duckdb.ConversionException, duckdb.ConstraintException, duckdb.InvalidInputException) as error:
            raise ListRefused(f"{source} does not hold a timeline of this version: {str(error).splitlines()[0][:200]}") from error
        lists = ledger.rows("SELECT name, rows_read, rows_loaded, rows_rejected, duplicates FROM ledger.source ORDER BY source")
        milestones = int(ledger.value("SELECT count(*) FROM ledger.milestone"))
    notes = () if changed else (f"{db} already holds this timeline; nothing was changed",)
    return Restored(tuple((str(n), int(r), int(k), int(x), int(d)) for n, r, k, x, d in lists), changed, milestones, notes)


def unload(db: str | Path, name: str, *, link: bool = True, tell: Tell = silent) -> Unloaded:
    """Take a list out and link the rest again (unless ``link`` is False). Decisions about its entries stay, adrift until it comes back.

    Raises WrongUse for a list that is not there.
    """
    with open_for_writing(db, create=False) as ledger, ledger.transaction():
        names = [str(n) for (n,) in ledger.rows("SELECT name FROM ledger.source ORDER BY source")]
        if name not in names:
            near = difflib.get_close_matches(name, names, n=1)
            raise WrongUse(
                f"there is no list {name!r} in {db}; {f'did you mean {near[0]}? ' if near else ''}it has {', '.join(names) or 'none'}"
            )
        source, file = ledger.rows("SELECT source, file FROM ledger.source WHERE name = ?", [name])[0]
        entries = int(ledger.value("SELECT count(*) FROM ledger.entry WHERE source = ?", [source]))
        rejects = int(ledger.value("SELECT count(*) FROM ledger.reject WHERE source = ?", [source]))
        decisions = int(
            ledger.value("SELECT count(*) FROM decisions WHERE status IN ('holds', 'date changed') AND ? IN (source_a, source_b)", [name])
        )
        ledger.entries_changed()
        for table in ("entry", "reject", "source"):
            ledger.run(f"DELETE FROM ledger.{table} WHERE source = ?", [source])
        notes = [f"to get the former state back: chronos-acc load {file or 'FILE'}"]
        if decisions:
            some = "decisions about its entries are" if decisions > 1 else "decision about its entries is"
            notes.append(f"{decisions} {some} kept, adrift until the list comes back")
        if link:
            done = relink_open(ledger, tell=tell)
            notes += [n for n in done.notes if "adrift" not in n]
        else:
            notes.append("milestones are not up to date; run: chronos-acc link")
        milestones = int(ledger.value("SELECT count(*) FROM ledger.milestone"))
    return Unloaded(name, entries, rejects, milestones, tuple(notes))


def _verify(folder: Path) -> None:
    if not is_export(folder):
        raise ListRefused(f"{folder} has no {MANIFEST} of an exported timeline; chronos-acc export writes such a folder")
    manifest = json.loads((folder / MANIFEST).read_text(encoding="utf-8"))
    if manifest.get("schema_version") != SCHEMA_VERSION:
        raise ListRefused(f"{folder} has schema version {manifest.get('schema_version')}; this chronos_acc reads {SCHEMA_VERSION}")
    hashes = {str(f.get("file")): str(f.get("sha256")) for f in manifest.get("files", [])}
    for name in [*hashes, *(f"ledger/{t}.parquet" for t in TABLES)]:
        path = folder / name
        if name not in hashes or not path.is_file():
            raise ListRefused(f"{folder} lacks {name}; export the timeline again")
        if not path.resolve().is_relative_to(folder.resolve()):
            raise ListRefused(f"{folder}: the manifest names {name}, which is outside the folder; export the timeline again")
        if _hash(path) != hashes[name]:
            raise ListRefused(f"{folder}: {name} is not what was exported (its SHA-256 differs); go back to a copy, or export again")


def _alike(ledger: Ledger, table: str, reading: str) -> bool:
    """Whether a table holds the same rows as a file, however often each."""
    columns = ", ".join(f'"{c}"' for c, *_ in ledger.rows(f"DESCRIBE {table}"))
    sides = (f"SELECT {columns} FROM {table}", f"SELECT {columns} FROM {reading}")
    return all(not ledger.rows(f"({a}) EXCEPT ALL ({b}) LIMIT 1") for a, b in (sides, sides[::-1]))


@contextmanager
def _plain_paths(folder: Path) -> Iterator[Path]:
    """The folder of the base tables under a path without the characters that would be taken for a pattern."""
    if not any(c in str(folder.resolve()) for c in "*?[]{}"):
        yield folder / "ledger"
        return
    with tempfile.TemporaryDirectory() as spare:
        yield Path(shutil.copytree(folder / "ledger", Path(spare) / "ledger"))


def _listed(folder: Path, name: str, rows: int | None) -> dict[str, Any]:
    path = folder / name
    return {"file": name, "rows": rows, "bytes": path.stat().st_size, "sha256": _hash(path)}


def _hash(path: Path) -> str:
    with path.open("rb") as handle:
        return hashlib.file_digest(handle, "sha256").hexdigest()


def _text(path: Path) -> str:
    return "'" + str(path).replace("'", "''") + "'"


def _file_name(name: object) -> str:
    """A list's name as a file name: letters, digits, dot, dash and underscore; no other character, and no leading dot."""
    return "".join(c if c.isalnum() or c in "-_." else "_" for c in str(name)).lstrip(".")[:80] or "list"
