# SPDX-License-Identifier: Apache-2.0
"""The sheet of a list: a small TOML file beside it that says who compiled it, which column is which, and how its dates are meant.

The sheet of ``list.csv`` is ``list.csv.toml`` or ``list.toml`` in the same folder, or any ``*.toml`` there whose ``[compilation] file``
names it. Everything in it is checked, key by key: a wrong key or value is one line that names the file, the key, what is allowed, and
the nearest right one.
"""

from __future__ import annotations

import difflib
import json
import tomllib
import unicodedata
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from ..dating.settings import SETTINGS, Settings, as_mapping, problem, settings_from
from ..errors import ListRefused, SheetRefused, WrongUse
from .text import known_encoding

COLUMNS = (
    "title", "date", "unit", "sigma", "plus_minus", "earliest", "latest", "category", "importance", "level", "parent", "note",
)  # fmt: skip
NEEDED = ("title", "date")
COMPILATION = {
    "name": "a short name for the list, without commas",
    "title": "the full title of the compilation, a text",
    "citation": "how to cite it, a text",
    "compiled": "the year in which it was compiled, a whole number",
    "criterion": "what the compiler took in, a text",
    "file": "the file of the list, beside the sheet",
    "encoding": "the character encoding of the file, such as utf-8, cp1252, utf-16",
    "derives_from": "the name of the list it was drawn from, or an array of such names",
    "precedes": 'known orders: an array of ["earlier title", "later title"]',
}
TABLES = ("compilation", "columns", "dating")
DATING = (*(setting.name for setting in SETTINGS if setting.name != "compiled"), "periods")


@dataclass(frozen=True)
class Sheet:
    """What is known about a list beside its rows. ``text`` is the sheet as it was ("" without one); ``path`` is where it stands."""

    name: str
    title: str | None = None
    citation: str | None = None
    compiled: int | None = None
    criterion: str | None = None
    file: str | None = None
    encoding: str | None = None
    derives_from: tuple[str, ...] = ()
    precedes: tuple[tuple[str, str], ...] = ()
    columns: Mapping[str, str] = field(default_factory=dict)
    settings: Settings = Settings()
    path: Path | None = None
    text: str = ""

    @property
    def settings_json(self) -> str:
        """The dating settings in force that were given or differ from their default, as JSON."""
        given: dict[str, Any] = as_mapping(self.settings)
        if self.settings.periods is not None:
            given["periods"] = "the period table of the sheet"
        return json.dumps(given, ensure_ascii=False, sort_keys=True)

    @property
    def precedes_json(self) -> str | None:
        """The known orders as JSON, or None."""
        return json.dumps(self.precedes, ensure_ascii=False) if self.precedes else None


def nearest(word: str, allowed: Iterable[str]) -> str:
    """The end of a message: the nearest right word, or nothing."""
    found = difflib.get_close_matches(word.strip().lower().replace("-", "_").replace(" ", "_"), list(allowed), n=1, cutoff=0.55)
    return f"; nearest is {found[0]!r}" if found else ""


def find_sheet(file: Path) -> Path | None:
    """The sheet of a list, or None. Raises SheetRefused where two sheets claim it."""
    stem = Path(file.stem).stem if file.suffix.lower() == ".gz" else file.stem
    for beside in (f"{file.name}.toml", f"{stem}.toml"):
        path = file.with_name(beside)
        if path.is_file() and path != file:
            return path
    claims = [path for path in sheets_in(file.parent) if names_file(path) == file.name]
    if len(claims) > 1:
        raise SheetRefused(f"{' and '.join(map(str, claims))} both say file = {file.name!r}; keep one of the two")
    return claims[0] if claims else None


def sheets_in(folder: Path) -> list[Path]:
    """The TOML files of a folder, sorted."""
    try:
        return sorted(path for path in folder.iterdir() if path.suffix.lower() == ".toml" and path.is_file())
    except OSError:
        return []


def names_file(sheet: Path) -> str | None:
    """The file that a sheet's ``[compilation] file`` names; None where it names none or is no sheet."""
    try:
        found = tomllib.loads(sheet.read_text(encoding="utf-8-sig"))
    except (OSError, ValueError):
        return None
    compilation = found.get("compilation")
    named = compilation.get("file") if isinstance(compilation, dict) else None
    return named if isinstance(named, str) else None


def read_sheet(path: Path, *, stem: str, compiled: int | None = None) -> Sheet:
    """The sheet in a file. ``stem`` names the list where the sheet does not; ``compiled`` is the year that was given beside it.

    Raises SheetRefused.
    """
    try:
        text = path.read_text(encoding="utf-8-sig")
        found = tomllib.loads(text)
    except OSError as error:
        raise SheetRefused(f"{path}: cannot be read ({error.strerror or error})") from None
    except UnicodeDecodeError:
        raise SheetRefused(f"{path}: a sheet is UTF-8 text; save it as UTF-8") from None
    except tomllib.TOMLDecodeError as error:
        raise SheetRefused(f"{path}: no sound TOML: {error}") from None
    except RecursionError:
        raise SheetRefused(f"{path}: no sound TOML: values nested too deeply") from None
    checked = _Checked(path, found)
    compilation, columns, dating = checked.compilation(), checked.columns(), checked.dating()
    if compilation.get("compiled") is None and compiled is not None:
        compilation["compiled"] = compiled
    elif compiled is not None and compilation["compiled"] != compiled:
        raise SheetRefused(f"{path}: [compilation] compiled is {compilation['compiled']}, but --compiled {compiled} was given; keep one")
    name = compilation.pop("name", None) or stem
    settings = checked.settings(dating, compilation.get("compiled"))
    return Sheet(name=checked.name(name), columns=columns, settings=settings, path=path, text=text, **compilation)


def bare_sheet(stem: str, compiled: int | None) -> Sheet:
    """What is known of a list without a sheet: its name and, where given, its year."""
    if compiled is not None:
        wrong = problem("compiled", compiled)
        if wrong:
            raise WrongUse(f"--compiled {wrong}")
    wrong = name_problem(stem)
    if wrong:
        raise ListRefused(f"the list cannot take its name from the file, {stem!r}: a name {wrong}; write a sheet with a [compilation] name")
    given: dict[str, Any] = {} if compiled is None else {"compiled": compiled}
    return Sheet(name=stem, compiled=compiled, settings=settings_from(given))


def name_problem(name: str) -> str:
    """Why a text cannot be the name of a list, or nothing."""
    if not name.strip() or name != name.strip():
        return "is not empty and has no spaces around it"
    if "," in name:
        return "has no comma, because options take several names with commas between"
    if any(unicodedata.category(char) in ("Cc", "Cs") for char in name):
        return "has no control characters"
    return "" if len(name) <= 200 else "has at most 200 characters"


class _Checked:
    """Checks the tables of one sheet."""

    def __init__(self, path: Path, found: Mapping[str, Any]) -> None:
        self.path = path
        self.found = found
        for table, value in found.items():
            if table not in TABLES:
                raise self.wrong(f"unknown table or key [{table}]", f"a sheet has the tables {', '.join(TABLES)}", table, TABLES)
            if not isinstance(value, dict):
                raise self.wrong(f"{table} must be a table", f"write [{table}] on a line of its own")

    def wrong(self, what: str, allowed: str, word: str = "", among: Sequence[str] = ()) -> SheetRefused:
        """One line: file, key, allowed, nearest."""
        return SheetRefused(f"{self.path}: {what}; {allowed}{nearest(word, among) if word else ''}")

    def compilation(self) -> dict[str, Any]:
        """The checked keys of [compilation]."""
        made: dict[str, Any] = {}
        for key, value in self.found.get("compilation", {}).items():
            if key not in COMPILATION:
                raise self.wrong(f"unknown key [compilation] {key}", f"allowed are {', '.join(COMPILATION)}", key, tuple(COMPILATION))
            made[key] = self._compilation(key, value)
        return made

    def _compilation(self, key: str, value: Any) -> Any:
        bad = self.wrong(f"[compilation] {key} is {value!r}", f"it takes {COMPILATION[key]}")
        if key == "compiled":
            if problem("compiled", value):
                raise bad
            return value
        if key == "derives_from":
            names = [value] if isinstance(value, str) else value
            if not isinstance(names, list) or not all(isinstance(name, str) and name.strip() for name in names):
                raise bad
            return tuple(dict.fromkeys(name.strip() for name in names))
        if key == "precedes":
            if not isinstance(value, list) or not all(_is_pair(pair) for pair in value):
                raise bad
            return tuple((pair[0].strip(), pair[1].strip()) for pair in value)
        if not isinstance(value, str) or not value.strip():
            raise bad
        if key == "encoding":
            try:
                return known_encoding(value.strip())
            except WrongUse as error:
                raise SheetRefused(f"{self.path}: [compilation] {error}") from None
        if key == "file" and (Path(value).name != value or value in (".", "..")):
            raise self.wrong(f"[compilation] file is {value!r}", "it takes the name of a file in the folder of the sheet, without a path")
        return value.strip()

    def name(self, name: str) -> str:
        """A checked name of a list."""
        wrong = name_problem(name)
        if wrong:
            raise self.wrong(f"[compilation] name is {name!r}", f"a name {wrong}")
        return name

    def columns(self) -> dict[str, str]:
        """The checked keys of [columns]."""
        made: dict[str, str] = {}
        for key, value in self.found.get("columns", {}).items():
            if key not in COLUMNS:
                raise self.wrong(f"unknown key [columns] {key}", f"allowed are {', '.join(COLUMNS)}", key, COLUMNS)
            if not isinstance(value, str) or not value.strip():
                raise self.wrong(f"[columns] {key} is {value!r}", "it takes the header of a column, a text")
            if value.strip().casefold() in (other.casefold() for other in made.values()):
                raise self.wrong(f"[columns] {key} is {value!r}", "another key names that column already; each column has one use")
            made[key] = value.strip()
        return made

    def dating(self) -> dict[str, Any]:
        """The keys of [dating], names checked."""
        made: dict[str, Any] = {}
        for key, value in self.found.get("dating", {}).items():
            if key == "compiled":
                raise self.wrong("[dating] compiled", "the compile year stands under [compilation]")
            if key not in DATING:
                raise self.wrong(f"unknown key [dating] {key}", f"allowed are {', '.join(DATING)}", key, DATING)
            wrong = None if key == "periods" else problem(key, value)
            if wrong:
                words = next(setting.words for setting in SETTINGS if setting.name == key)
                raise self.wrong(f"[dating] {key} {wrong}", "correct the value", str(value), words)
            made[key] = value
        return made

    def settings(self, dating: dict[str, Any], compiled: int | None) -> Settings:
        """The settings of the list."""
        from ..dating import periods as module

        periods = None
        if "periods" in dating:
            named = dating.pop("periods")
            if not isinstance(named, str) or not named.strip():
                raise self.wrong(f"[dating] periods is {named!r}", "it takes the name of a CSV file: name, earliest, latest, unit, source")
            try:
                periods = module.read_periods(self.path.parent / named)
            except (SheetRefused, ListRefused) as error:
                raise SheetRefused(f"{self.path}: [dating] periods: {error}") from None
        given = dating if compiled is None else {"compiled": compiled, **dating}
        try:
            return settings_from(given, periods=periods)
        except SheetRefused as error:
            raise SheetRefused(f"{self.path}: {error}") from None


def _is_pair(value: Any) -> bool:
    return isinstance(value, list) and len(value) == 2 and all(isinstance(text, str) and text.strip() for text in value)


def match_columns(header: Sequence[str], columns: Mapping[str, str]) -> dict[str, int | list[int]]:
    """For each contract column the position of its column in the header (all positions, where several fit); letter case does not matter."""
    folded = [name.strip().casefold() for name in header]
    taken = {value.casefold() for value in columns.values()}
    found: dict[str, int | list[int]] = {}
    for key in COLUMNS:
        wanted = columns.get(key, key).casefold()
        if key not in columns and wanted in taken:
            continue  # the sheet uses this column for something else
        places = [i for i, name in enumerate(folded) if name == wanted]
        if places:
            found[key] = places[0] if len(places) == 1 else places
    return found


def columns_of(header: Sequence[str], sheet: Sheet, name: str) -> dict[str, int]:
    """The positions of the contract columns in a header. Raises ListRefused; SheetRefused where the sheet names one that is not there."""
    found = match_columns(header, sheet.columns)
    shown = ", ".join(repr(column) for column in header[:20]) + (", …" if len(header) > 20 else "")
    for key, wanted in sheet.columns.items():
        if key not in found:
            hint = nearest_header(wanted, header)
            raise SheetRefused(f"{sheet.path}: [columns] {key} is {wanted!r}, but {name} has the columns {shown}{hint}")
    for key in NEEDED:
        if key == "date" and "earliest" in found and "latest" in found:
            continue  # bounds of their own date a row as well
        if key not in found:
            raise ListRefused(
                f"{name}: no column {key!r}; its columns are {shown}; name the right one under [columns] of a sheet "
                f"(chronos-acc sheet {name} writes a first one){nearest_header(key, header)}"
            )
    for key, places in found.items():
        if isinstance(places, list):
            raise ListRefused(
                f"{name}: {len(places)} columns have the header {header[places[0]]!r}, so {key} is not clear; rename one of them"
            )
    return {key: place for key, place in found.items() if isinstance(place, int)}


def nearest_header(word: str, header: Sequence[str]) -> str:
    """The end of a message: the nearest column, or nothing."""
    by_fold = {name.casefold(): name for name in header if name}
    found = difflib.get_close_matches(word.casefold(), list(by_fold), n=1, cutoff=0.55)
    return f"; nearest is {by_fold[found[0]]!r}" if found else ""
