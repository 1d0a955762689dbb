# SPDX-License-Identifier: Apache-2.0
"""From what a person names (files, folders, sheets, "-") to files that can be read: found, unpacked, with their sheets."""

from __future__ import annotations

import difflib
import gzip
import hashlib
import shutil
import zlib
from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from typing import BinaryIO

from .. import __version__
from ..errors import ListRefused, SheetRefused, WrongUse
from . import formats
from .headers import header_at
from .sheets import Sheet, bare_sheet, find_sheet, match_columns, names_file, read_sheet, sheets_in
from .table import Asked, Format, Table

BLOCK = 1 << 22
STDIN = "-"
_GLOB = frozenset("*?[]{}")


@dataclass(frozen=True)
class Job:
    """One list to be loaded: how messages call its file, where it is (None: standard input), its format, what is known of it, remarks."""

    label: str
    path: Path | None
    format: Format
    sheet: Sheet
    notes: tuple[str, ...] = ()


@dataclass(frozen=True)
class Staged:
    """A plain file that the database may read, and the digest of what was given: file, sheet, options and version of the reader."""

    path: Path
    digest: str


def resolve(files: Sequence[str | Path], *, compiled: int | None = None, as_format: str | None = None) -> list[Job]:
    """The lists that are meant, all checked before anything is loaded. Raises ListRefused, SheetRefused, WrongUse."""
    if not files:
        raise WrongUse("no file was given; name the files of lists, folders of lists with sheets, or - for standard input")
    chosen = formats.by_name(as_format) if as_format else None
    jobs: dict[Path | None, Job] = {}
    for file in files:
        for job in _jobs(str(file), compiled, chosen):
            jobs.setdefault(job.path.resolve() if job.path else None, job)
    by_name: dict[str, Job] = {}
    for job in jobs.values():
        other = by_name.setdefault(job.sheet.name, job)
        if other is not job:
            raise ListRefused(
                f"{other.label} and {job.label} both give the list {job.sheet.name!r}; write a [compilation] name into the sheet of one"
            )
    return list(jobs.values())


def _jobs(label: str, compiled: int | None, chosen: Format | None) -> list[Job]:
    if label == STDIN:
        if chosen is None:
            raise WrongUse(f"standard input has no ending that tells its format; name it with --as: {', '.join(formats.names())}")
        return [Job("standard input", None, chosen, bare_sheet("stdin", compiled))]
    path = Path(label)
    try:
        if path.is_dir():
            return _folder(path, compiled, chosen)
        there = path.exists()
    except (OSError, ValueError) as error:
        raise ListRefused(f"{label}: cannot be read ({getattr(error, 'strerror', None) or error})") from None
    if not there:
        raise ListRefused(f"{label}: there is no such file{_nearest_file(path)}")
    if path.suffix.lower() == ".toml" and chosen is None:
        return [_job(_list_of(path), compiled, None, path)]
    return [_job(path, compiled, chosen, find_sheet(path))]


def _job(path: Path, compiled: int | None, chosen: Format | None, sheet: Path | None, notes: tuple[str, ...] = ()) -> Job:
    made = chosen or formats.for_file(str(path))
    stem = Path(path.stem).stem if path.suffix.lower() == ".gz" else path.stem
    if sheet is None:
        return Job(str(path), path, made, bare_sheet(stem, compiled), notes)
    known = read_sheet(sheet, stem=stem, compiled=compiled)
    if known.file not in (None, path.name, path.name.removesuffix(".gz")):
        raise SheetRefused(f"{sheet}: [compilation] file is {known.file!r}, but the sheet stands beside {path.name}; correct one of them")
    return Job(str(path), path, made, known, notes)


def _folder(folder: Path, compiled: int | None, chosen: Format | None) -> list[Job]:
    """The lists of a folder that have sheets, by name of file; lists without are named in a remark."""
    sheets: dict[Path, Path] = {}
    for sheet in sheets_in(folder):
        named = names_file(sheet)
        if named is not None or _beside(sheet):
            path = _list_of(sheet)
            if sheets.setdefault(path, sheet) != sheet:
                raise SheetRefused(f"{sheets[path]} and {sheet} are both sheets of {path.name}; keep one of the two")
    lists = sorted(path for path in folder.iterdir() if path.is_file() and formats.of_file(path.name))
    left = [path.name for path in lists if path not in sheets]
    if not sheets:
        raise ListRefused(
            f"{folder}: the folder holds no list with a sheet; name the files one by one, "
            "or write sheets (chronos-acc sheet FILE > FILE.toml)"
        )
    notes = (f"left out of {folder}, having no sheet: {', '.join(left)}",) if left else ()
    ordered = sorted(sheets)
    return [_job(path, compiled, chosen, sheets[path], notes if path == ordered[0] else ()) for path in ordered]


def _beside(sheet: Path) -> list[Path]:
    """The lists whose name, with or without its ending, is that of the sheet."""
    found = sorted(sheet.parent.iterdir())
    lists = [path for path in found if path.is_file() and formats.of_file(path.name)]
    same = [path for path in lists if path.name == sheet.stem]
    return same or [path for path in lists if path.name.split(".gz")[0].rpartition(".")[0] == sheet.stem]


def _list_of(sheet: Path) -> Path:
    """The file of the list that a sheet describes. Raises SheetRefused."""
    named = names_file(sheet)
    if named is not None:
        path = sheet.with_name(named)
        if not path.is_file():
            raise SheetRefused(f"{sheet}: [compilation] file is {named!r}, but there is no such file beside it{_nearest_file(path)}")
        return path
    found = _beside(sheet)
    if len(found) == 1:
        return found[0]
    said = "there are " + " and ".join(path.name for path in found) if found else "there is no list of that name beside it"
    raise SheetRefused(f'{sheet}: which list does it describe? {said}; write file = "…" under [compilation]')


def _nearest_file(path: Path) -> str:
    try:
        names = [other.name for other in path.parent.iterdir() if other.is_file()][:5000]
    except OSError:
        return "; its folder does not exist either" if not path.parent.exists() else ""
    near = difflib.get_close_matches(path.name, names, n=1, cutoff=0.6)
    return f"; nearest is {near[0]!r}" if near else ""


def stage(job: Job, scratch: Path, stdin: BinaryIO | None, encoding: str | None) -> Staged:
    """The file of a job, unpacked, under a name that the database takes for one file. Raises ListRefused."""
    digest = hashlib.sha256()
    path = job.path
    try:
        if path is None:
            if stdin is None:
                import sys

                stdin = sys.stdin.buffer
            path = scratch / "stdin"
            with path.open("wb") as copy:
                shutil.copyfileobj(stdin, copy, BLOCK)
        elif not path.is_file():  # a pipe or a device: it can be read once
            copied = scratch / "piped"
            with path.open("rb") as pipe, copied.open("wb") as copy:
                shutil.copyfileobj(pipe, copy, BLOCK)
            path = copied
        with path.open("rb") as file:
            packed = file.read(2) == b"\x1f\x8b"
        if packed and job.format.name != "parquet":
            plain = scratch / "unpacked"
            with gzip.open(path, "rb") as archive, plain.open("wb") as copy:
                shutil.copyfileobj(archive, copy, BLOCK)
            path = plain
        with path.open("rb") as file:
            while block := file.read(BLOCK):
                digest.update(block)
    except (gzip.BadGzipFile, EOFError, zlib.error) as error:
        raise ListRefused(f"{job.label}: the gzip data are damaged or cut off ({error}); fetch the file again") from None
    except (OSError, ValueError) as error:
        raise ListRefused(f"{job.label}: cannot be read ({getattr(error, 'strerror', None) or error})") from None
    if _GLOB & set(str(path)):  # the database would take such a path for a pattern
        link = scratch / f"list{path.suffix}"
        try:
            link.symlink_to(path.resolve())
        except OSError:
            shutil.copyfile(path, link)
        path = link
    known = (job.sheet.text, job.sheet.name, job.sheet.settings_json, job.format.name, encoding or "", __version__)
    digest.update("\0".join(("", *known)).encode("utf-8", "replace"))
    return Staged(path, digest.hexdigest())


def table_of(job: Job, staged: Staged, scratch: Path, encoding: str | None) -> Table:
    """The list in a staged file. Raises ListRefused, WrongUse."""

    def fits(header: Sequence[str]) -> int:
        return sum(key in match_columns(header, job.sheet.columns) for key in ("title", "date"))

    below = partial(header_at, columns=job.sheet.columns)
    return job.format.read(staged.path, Asked(job.label, fits, scratch, encoding or job.sheet.encoding, below))
