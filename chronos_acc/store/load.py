# SPDX-License-Identifier: Apache-2.0
"""Load lists: one transaction each, every row accounted for.

Each list is read and dated in temporary tables first; only then one transaction takes the former entries of that list out and puts the new
ones in. A process that is killed leaves the list as it was or as it should be, never between.
"""

from __future__ import annotations

import tempfile
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import TYPE_CHECKING, Any, BinaryIO

from ..errors import ListRefused, Refused, SheetRefused
from ..notebook import ShowsInNotebook
from ..progress import Tell, silent
from .dates import date_rows
from .enter import Change, Former, enter, former
from .exchange import is_export, restore
from .ledger import Ledger, open_for_writing
from .remarks import remarks_of
from .rows import Rows, fill, raw_of
from .sheets import columns_of
from .staging import STDIN, Job, resolve, stage, table_of
from .timeline import unknown_kin

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True)
class Loaded(ShowsInNotebook):
    """What became of one list.

    rows_read = rows_loaded + rows_rejected. added, changed and gone compare its entries with those of the load before; duplicates are
    entries that repeat title and dating of an earlier row. ``linked`` is the summary of the linking that followed, or None.
    """

    source: str
    rows_read: int
    rows_loaded: int
    rows_rejected: int
    added: int = 0
    changed: int = 0
    gone: int = 0
    duplicates: int = 0
    notes: tuple[str, ...] = field(default=())
    linked: Any = None

    def to_frame(self) -> pd.DataFrame:
        """One row: source, rows_read, rows_loaded, rows_rejected, added, changed, gone, duplicates, notes joined by "; "."""
        import pandas as pd

        names = ("source", "rows_read", "rows_loaded", "rows_rejected", "added", "changed", "gone", "duplicates")
        return pd.DataFrame([{**{name: getattr(self, name) for name in names}, "notes": "; ".join(self.notes)}])


def load(
    db: str | Path,
    files: Sequence[str | Path] | str | Path,
    *,
    compiled: int | None = None,
    as_format: str | None = None,
    link: bool = True,
    strict: bool = False,
    stdin: BinaryIO | None = None,
    encoding: str | None = None,
    tell: Tell = silent,
) -> list[Loaded]:
    """Load lists into a timeline file, which is made where it is missing; then link its entries anew unless ``link`` is False.

    ``files``: lists, folders of lists with sheets, sheets, "-" for standard input, or by itself a folder that ``export`` wrote, which
    brings the exported timeline back into a new file. With several lists each is loaded that can be; when any was refused, ListRefused is
    raised at the end and its ``loaded`` holds what was loaded. A list none of whose rows can be read is refused; if it was not held before,
    its refused rows are kept to be looked at. ``strict`` refuses a list with any row refused, and keeps nothing of it.

    Raises ListRefused, SheetRefused, TimelineRefused, WrongUse.
    """
    given = [files] if isinstance(files, (str, Path)) else list(files)
    exported = [one for one in given if str(one) != STDIN and is_export(one)]
    if exported:
        if len(given) > 1:
            raise ListRefused(f"{exported[0]} is an exported timeline; load it by itself into a new file, then the others")
        return _bring_back(db, exported[0], tell)
    jobs = resolve(given, compiled=compiled, as_format=as_format)
    done: list[Loaded] = []
    refusals: list[Refused] = []
    with open_for_writing(db) as ledger:
        for place, job in enumerate(jobs):
            share = _Share(tell, job.sheet.name, place, len(jobs))
            try:
                done.append(_load(ledger, job, strict=strict, stdin=stdin, encoding=encoding, tell=share))
            except (ListRefused, SheetRefused) as refused:
                if len(jobs) == 1:
                    raise
                refusals.append(refused)
        if link and done and ledger.about("linked") == "no":
            from .linking import relink_open

            summary = relink_open(ledger, tell=tell)
            done = [replace(one, linked=summary) for one in done]
        strangers = unknown_kin(ledger)
        done = [replace(one, notes=(*one.notes, *strangers.get(one.source, ()))) for one in done]
        if refusals:
            kept = f"{len(done)} of {len(jobs)} lists were loaded" if done else "no list was loaded"
            error = ListRefused(f"{kept}; refused: {'; '.join(map(str, refusals))}")
            error.loaded = tuple(done)
            raise error  # while the file is open, because one that was made for nothing is taken away again
    return done


def _bring_back(db: str | Path, folder: str | Path, tell: Tell) -> list[Loaded]:
    """An exported timeline: as it was, so that nothing is linked anew."""
    back = restore(db, folder, tell=tell)
    added = [loaded if back.changed else 0 for _, _, loaded, _, _ in back.lists]
    return [
        Loaded(name, read, loaded, rejected, added=new, duplicates=duplicates, notes=back.notes)
        for (name, read, loaded, rejected, duplicates), new in zip(back.lists, added, strict=True)
    ]


@dataclass(frozen=True)
class _Share:
    """Progress of one list among several."""

    tell: Tell
    name: str
    place: int
    count: int

    def __call__(self, what: str, share: float) -> None:
        self.tell(f"{self.name}: {what}", (self.place + min(1.0, max(0.0, share))) / self.count)


def _load(ledger: Ledger, job: Job, *, strict: bool, stdin: BinaryIO | None, encoding: str | None, tell: Tell) -> Loaded:
    with tempfile.TemporaryDirectory(prefix="chronos-acc-") as folder:
        scratch = Path(folder)
        tell("opening", 0.0)
        before = former(ledger, job.sheet.name)
        job = _year_kept(job, before)
        staged = stage(job, scratch, stdin, encoding)
        if before is not None and before.digest == staged.digest:
            return _unchanged(before.counts, job, before.loaded_at)
        table = table_of(job, staged, scratch, encoding)
        columns = columns_of(table.header, job.sheet, job.label)
        try:
            tell("reading rows", 0.1)
            rows = fill(ledger, table, columns, job.sheet.settings, job.label)
            if not rows.count:
                raise ListRefused(f"{job.label}: the list has a header but no row")
            dates = date_rows(ledger, rows, job.sheet.settings, lambda what, share: tell(what, 0.3 + 0.4 * share))
            tell("checking rows", 0.7)
            rejects = _rejects(ledger, rows, table)
            loaded = rows.count - len(rejects)
            if strict and rejects:
                raise ListRefused(
                    f"{job.label}: {_first(rejects, rows.count, table.unit)}; nothing of it was loaded, because --strict was given"
                )
            if not loaded and before is not None and before.counts["rows_loaded"]:
                raise ListRefused(f"{job.label}: {_first(rejects, rows.count, table.unit)}; the list {job.sheet.name!r} stays as it was")
            notes = [*job.notes, *table.notes, *remarks_of(ledger, rows, table, columns, len(rejects)), *dates.notes()]
            tell("entering", 0.8)
            change = enter(ledger, job, staged, table, rows, rejects, notes, before)
        finally:
            for statement in (
                "VIEW IF EXISTS dated",
                "TABLE IF EXISTS list_rows",
                "TABLE IF EXISTS list_texts",
                "TABLE IF EXISTS list_readings",
            ):
                ledger.run(f"DROP {statement}")
        tell("entered", 1.0)
    if not loaded:
        raise ListRefused(f"{job.label}: {_first(rejects, rows.count, table.unit)}; the refused rows are kept, see: chronos-acc rejects")
    return _loaded(job, rows.count, loaded, change, change.notes)


def _year_kept(job: Job, before: Former | None) -> Job:
    """The list with the compile year it had before, where nothing gives one now; that, or a change of the year, is said."""
    if before is None or before.compiled == job.sheet.compiled:
        return job
    sheet, was = job.sheet, before.compiled
    if sheet.compiled is None:
        sheet = replace(sheet, compiled=was, settings=replace(sheet.settings, compiled=was))
        said = f"compile year {was} kept from the load before; --compiled or a sheet changes it"
    elif was is None:
        said = f"compile year {sheet.compiled}; the load before had none"
    else:
        said = f"compile year {sheet.compiled} in place of {was}: dates counted \"ago\" and the present move with it"
    return replace(job, sheet=sheet, notes=(*job.notes, said))


def _loaded(job: Job, read: int, loaded: int, change: Change, notes: Sequence[str]) -> Loaded:
    return Loaded(job.sheet.name, read, loaded, read - loaded, change.added, change.changed, change.gone, change.duplicates, tuple(notes))


def _unchanged(counts: dict[str, int], job: Job, loaded_at: object) -> Loaded:
    """The same file, sheet and options as before. Raises ListRefused where it gave no row then either."""
    if not counts["rows_loaded"]:
        raise ListRefused(f"{job.label}: none of its {counts['rows_read']:,} rows can be read, as before; see: chronos-acc rejects")
    return Loaded(
        job.sheet.name, counts["rows_read"], counts["rows_loaded"], counts["rows_rejected"], duplicates=counts["duplicates"],
        notes=(f"the same as was loaded on {loaded_at} UTC; nothing was changed", *job.notes),
    )  # fmt: skip


def _rejects(ledger: Ledger, rows: Rows, table: Any) -> list[tuple[int, str, str]]:
    """Every refused row: number, raw text, reason; in the order of the file."""
    found = [
        (int(row), str(reason)) for row, reason in ledger.rows("SELECT row, reason FROM dated WHERE reason IS NOT NULL ORDER BY place")
    ]
    raw = raw_of(ledger, rows, table, [row for row, _ in found])
    return sorted([*rows.refused, *((row, raw.get(row, ""), reason) for row, reason in found)], key=lambda reject: reject[0])


def _first(rejects: Sequence[tuple[int, str, str]], count: int, unit: str) -> str:
    """How many rows were refused, and why the first of them was."""
    row, _, reason = rejects[0]
    many = "none of its" if len(rejects) == count else f"{len(rejects):,} of its"
    return (
        f"{many} {count:,} rows can be read; {unit} {row}: {reason}"
        if len(rejects) == count
        else f"{many} {count:,} rows cannot be read; {unit} {row}: {reason}"
    )
