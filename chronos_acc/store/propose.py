# SPDX-License-Identifier: Apache-2.0
"""A first sheet for a list: which column is which, how the dates are meant, and how many rows each choice would read."""

from __future__ import annotations

import json
import tempfile
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import UTC, datetime
from itertools import islice
from pathlib import Path
from typing import Any

from ..dating import read_row, settings_from
from ..errors import DateRefused, ListRefused
from . import formats
from .headers import HEADERS, plain
from .rows import SPACES
from .sheets import COLUMNS, NEEDED, Sheet, bare_sheet, name_problem
from .staging import Job, resolve, stage, table_of
from .table import Table

EXAMPLES = 5
LOOK = 5000  # rows that are looked at
CLEARLY = 0.1  # share of the rows by which a choice must read more than the plain one to be proposed
CHOICES: tuple[tuple[str, Mapping[str, Any]], ...] = (
    ("as the dates stand and the header says", {}),
    ("numbers are calendar years", {"counted": "calendar"}),
    ("numbers are years ago", {"counted": "ago"}),
    ("numbers are Ma", {"unit": "Ma"}),
    ("numbers are ka", {"unit": "ka"}),
    ("numbers are BP", {"unit": "BP"}),
    ("numbers are BCE", {"unit": "BCE"}),
    ("the comma is the decimal mark", {"decimal": ","}),
    ("03/04/1848 is 3 April", {"day_order": "dmy"}),
    ("03/04/1848 is 4 March", {"day_order": "mdy"}),
    ("1500s is a century", {"hundreds": "century"}),
    ("1500s is a decade", {"hundreds": "decade"}),
)
_UNIT_HINTS = (
    ("ma", "Ma"),
    ("mya", "Ma"),
    ("myr", "Ma"),
    ("ka", "ka"),
    ("kya", "ka"),
    ("kyr", "ka"),
    ("bp", "BP"),
    ("bce", "BCE"),
    ("bc", "BCE"),
    ("ga", "Ga"),
)


@dataclass(frozen=True)
class _Choice:
    words: str
    keys: Mapping[str, Any]
    read: int
    reads: Mapping[tuple[str | None, ...], bool]  # by the cells that date a row, in order of the rows

    def beyond(self, other: _Choice) -> str:
        """The first date that this choice reads and another does not, or nothing."""
        return next((str(cells[0]) for cells, read in self.reads.items() if read and not other.reads[cells]), "")


def propose_sheet(file: str | Path, *, as_format: str | None = None, encoding: str | None = None, compiled: int | None = None) -> str:
    """TOML text of a first sheet for a list, to be checked and filled in by a person. Raises ListRefused."""
    path = Path(file)
    if not path.exists():
        resolve([path], as_format=as_format)  # says what is wrong, and names the nearest file
    if path.is_dir():
        raise ListRefused(f"{path}: a folder; name one list, each has a sheet of its own")
    stem = Path(path.stem).stem if path.suffix.lower() == ".gz" else path.stem
    name = stem.replace(",", " ").strip() if name_problem(stem) else stem
    sheet = Sheet(name) if name_problem(name) else bare_sheet(name, None)
    chosen = formats.by_name(as_format) if as_format else formats.for_file(str(path))
    with tempfile.TemporaryDirectory(prefix="chronos-acc-") as folder:
        job = Job(str(path), path, chosen, sheet)
        staged = stage(job, Path(folder), None, encoding)
        table, cells, faults = _look(job, staged, Path(folder), encoding)
        if faults and not encoding:
            encoding = "cp1252"
            table, cells, _ = _look(job, staged, Path(folder), encoding)
    columns = _columns(table.header, cells)
    return _text(path, sheet.name, table, cells, columns, encoding, compiled)


def _look(job: Job, staged: Any, scratch: Path, encoding: str | None) -> tuple[Table, list[Sequence[str | None]], int]:
    table = table_of(job, staged, scratch, encoding)
    every = frozenset(range(len(table.header)))
    lines = list(islice(table.lines(every, frozenset()), LOOK))
    return table, [line.cells for line in lines if line.cells is not None], sum("encoding" in line.reason for line in lines)


def _columns(header: Sequence[str], cells: Sequence[Sequence[str | None]]) -> dict[str, int]:
    """The position of each column that can be told, by name; title and date also by what stands in them."""
    found: dict[str, int] = {}
    names = [plain(name) for name in header]
    for key in COLUMNS:
        for word in HEADERS[key]:
            place = next((i for i, name in enumerate(names) if name == plain(word) and i not in found.values()), None)
            if place is not None:
                found[key] = place
                break
    for key in ("date", "title"):
        if key not in found:  # a header that holds the word: "Event name", "Year (CE)"
            place = next((i for i, name in enumerate(names) if i not in found.values() and set(name.split()) & set(HEADERS[key])), None)
            if place is not None:
                found[key] = place
    free = [i for i in range(len(header)) if i not in found.values()]
    if "date" not in found and free:
        dated = {i: sum(_reads(row[i], {}, None) for row in cells[:200]) for i in free}
        best = max(free, key=lambda i: dated[i])
        if dated[best]:
            found["date"] = best
            free.remove(best)
    if "title" not in found and free:
        texts = {i: len({row[i] for row in cells if row[i] and not _reads(row[i], {}, None)}) for i in free}
        best = max(free, key=lambda i: texts[i])
        if texts[best]:
            found["title"] = best
    return {key: found[key] for key in COLUMNS if key in found}


def _reads(text: str | None, keys: Mapping[str, Any], year: int | None, **columns: str | None) -> bool:
    if not text or not text.strip(SPACES):
        return False
    settings = settings_from(keys if year is None else {"compiled": year, **keys})
    given: dict[str, Any] = columns
    try:
        read_row(text, settings=settings, **given)
    except DateRefused:
        return False
    return True


def _choices(cells: Sequence[Sequence[str | None]], columns: Mapping[str, int], base: Mapping[str, Any], year: int) -> list[_Choice]:
    """How many of the rows each choice reads, in the order of CHOICES."""
    if "date" not in columns:
        return []
    extra = {key: columns[key] for key in ("unit", "sigma", "plus_minus", "earliest", "latest") if key in columns}
    made: list[_Choice] = []
    for words, more in CHOICES:
        keys = {**base, **more} if "counted" not in more and "unit" not in more else more
        if made and keys == base:
            continue
        seen: dict[tuple[str | None, ...], bool] = {}
        read = 0
        for row in cells:
            key = (row[columns["date"]], *(row[place] for place in extra.values()))
            if key not in seen:
                seen[key] = _reads(key[0], keys, year, **dict(zip(extra, key[1:], strict=True)))
            read += seen[key]
        made.append(_Choice(words, keys, read, seen))
    return made


def _hint(header: str) -> Mapping[str, Any]:
    """The unit that a header names, such as Ma in "Age (Ma)"."""
    words = plain("".join(char if char.isalnum() else " " for char in header)).split()
    for word, unit in _UNIT_HINTS:
        if word in words:
            return {"unit": unit}
    return {"counted": "ago"} if "ago" in words or "age" in words else {}


def _chosen(choices: Sequence[_Choice], count: int) -> _Choice:
    """What is written into the sheet: the plainest choice, unless another alone reads clearly more rows; a tie is left to the person.

    A choice that gives another meaning to every number reads dates that the plain one rightly refuses (a year to come is read as an age),
    so that a single row is no reason to take it.
    """
    first = choices[0]
    most = max(choice.read for choice in choices)
    best = [choice for choice in choices if choice.read == most]
    gain = most - first.read
    if len(best) > 1 or gain < max(1, CLEARLY * count):
        return first
    changed = {key for key, value in best[0].keys.items() if first.keys.get(key) != value}
    return first if gain == 1 and changed & {"counted", "unit"} else best[0]


def _table(choices: Sequence[_Choice], chosen: _Choice, count: int) -> list[str]:
    """Comment lines: how many rows each choice reads, which is proposed, and a date that only another reads."""
    lines = [f"# rows that each choice reads, of {count:,}:"]
    width = max(len(_setting(choice.keys)) for choice in choices) + 2
    more = False
    for choice in choices:
        tail = "  <- proposed" if choice is chosen else ""
        if choice.read > chosen.read:
            more = True
            tail = f"; reads {_toml(' '.join(choice.beyond(chosen).split())[:60])} too"
        lines.append(f"#   {choice.read:>6,}  {_setting(choice.keys):{width}}{choice.words}{tail}")
    if more:
        lines.append("# more rows read is no proof: any number can be read as an age; look at the date that is named, it may be a slip")
    return lines


def _toml(value: object) -> str:
    return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")


def _text(
    path: Path,
    name: str,
    table: Table,
    cells: Sequence[Sequence[str | None]],
    columns: Mapping[str, int],
    encoding: str | None,
    compiled: int | None,
) -> str:
    count = len(cells)
    year = compiled if compiled is not None else datetime.now(UTC).year  # ages need some year to be read at all; the sheet leaves it open
    base = _hint(table.header[columns["date"]]) if "date" in columns else {}
    choices = _choices(cells, columns, base, year)
    lines = [
        f"# A first sheet for {_toml(path.name)}, from {count:,} of its rows. Check each line; take the # away where you know the answer.",
        *(f"# {' '.join(note.split())}" for note in table.notes),
        "",
        "[compilation]",
        f"name = {_toml(name)}",
        '# title = ""           # full title of the compilation',
        '# citation = ""        # how to cite it',
        f"compiled = {compiled}"
        if compiled is not None
        else "# compiled =           # the year the list was compiled, e.g. 2019: ages such as 12 ka or 66 Ma count back from it",
        '# criterion = ""       # what the compiler took in, and what not',
        '# derives_from = ""    # name of a list it was drawn from: such lists count once',
    ]
    if encoding:
        lines.append(f"encoding = {_toml(encoding)}    # the file is not UTF-8; check letters with accents in the result")
    lines += ["", "[columns]"]
    for key in COLUMNS:
        if key in columns:
            lines.append(f"{key} = {_toml(table.header[columns[key]])}")
        elif key in NEEDED:
            lines.append(f'# {key} = ""    # needed: no column was found for it')
    others = [header for i, header in enumerate(table.header) if i not in columns.values()]
    if others:
        lines.append(f"# kept as they are, without a meaning: {', '.join(map(_toml, others))}")
    left = [key for key in COLUMNS if key not in columns and key not in NEEDED]
    if left:
        lines.append(f"# also possible: {', '.join(left)}")
    lines += ["", "[dating]"]
    if choices:
        chosen = _chosen(choices, count)
        lines += [f"{key} = {_toml(value)}" for key, value in chosen.keys.items()]
        lines += _table(choices, chosen, count)
        unread = _unread(cells, columns, chosen.keys, year)
        if unread:
            lines += ["# not read as proposed, for example:", *(f"#   {reason}" for reason in unread)]
    return "\n".join(lines) + "\n"


def _unread(cells: Sequence[Sequence[str | None]], columns: Mapping[str, int], keys: Mapping[str, Any], year: int) -> list[str]:
    """Why the first few texts are not read under the choice that is proposed."""
    settings = settings_from({"compiled": year, **keys})
    extra = {key: columns[key] for key in ("unit", "sigma", "plus_minus", "earliest", "latest") if key in columns}
    reasons: dict[str, None] = {}
    for row in cells[:1000]:
        given: dict[str, Any] = {key: row[place] for key, place in extra.items()}
        try:
            read_row(row[columns["date"]], **given, settings=settings)
        except DateRefused as refused:
            reasons[" ".join(str(refused).split())] = None
        if len(reasons) == EXAMPLES:
            break
    return list(reasons)


def _setting(keys: Mapping[str, Any]) -> str:
    return ", ".join(f"{key} = {_toml(value)}" for key, value in keys.items()) or "(nothing set)"
