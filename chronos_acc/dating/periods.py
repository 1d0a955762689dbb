# SPDX-License-Identifier: Apache-2.0
"""Named periods: a table of names with bounds, the shipped one or a person's own CSV (name, earliest, latest, unit, source)."""

from __future__ import annotations

import csv
import io
import re
from dataclasses import dataclass, field
from functools import lru_cache
from pathlib import Path

from ..errors import ListRefused
from .units import find_unit

COLUMNS = ("name", "earliest", "latest", "unit", "source")
_NOISE = re.compile(r"\A(?:the )|(?: (?:period|era|eon|epoch|age|series|system))\Z")


@dataclass(frozen=True, slots=True)
class Period:
    """One row: earliest and latest are numbers as written, in ``unit`` ("" is a calendar year); the earlier bound comes first."""

    name: str
    earliest: str
    latest: str
    unit: str
    source: str


def key(name: str) -> str:
    """The form in which names are compared: lower case, single spaces, without "the" and "period", "era", "eon", "epoch" or "age"."""
    return _NOISE.sub("", " ".join(name.lower().split()))


@dataclass(frozen=True)
class Periods:
    """A table of periods, and where it came from."""

    rows: tuple[Period, ...]
    origin: str
    index: dict[str, Period] = field(init=False, repr=False, compare=False, hash=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "index", {key(row.name): row for row in self.rows})

    def find(self, name: str) -> Period | None:
        """The period of that name, or None."""
        return self.index.get(key(name))


def parse_periods(text: str, origin: str) -> Periods:
    """The table in a CSV text; ListRefused names the line and what is wrong with it."""
    lines = csv.DictReader(io.StringIO(text, newline=""))
    missing = [column for column in COLUMNS if column not in (lines.fieldnames or ())]
    if missing:
        raise ListRefused(f"{origin}: a period table needs the columns {', '.join(COLUMNS)}; {', '.join(missing)} is missing")
    rows: list[Period] = []
    seen: set[str] = set()
    for line in lines:
        row = Period(*((line[column] or "").strip() for column in COLUMNS))
        where = f"{origin}, line {lines.line_num}"
        if not row.name or not row.earliest or not row.latest:
            raise ListRefused(f"{where}: a period needs a name, an earliest and a latest bound")
        if row.unit and find_unit(row.unit) is None:
            raise ListRefused(
                f"{where}: unit {row.unit!r} is not known; use one such as Ma, ka BP, BCE, or leave it empty for calendar years"
            )
        if key(row.name) in seen:
            raise ListRefused(f"{where}: {row.name!r} stands twice; keep one row a name")
        seen.add(key(row.name))
        rows.append(row)
    return Periods(tuple(rows), origin)


def read_periods(path: str | Path) -> Periods:
    """A person's period table from a UTF-8 CSV file."""
    try:
        return parse_periods(Path(path).read_text(encoding="utf-8-sig"), Path(path).name)
    except (OSError, UnicodeDecodeError) as error:
        raise ListRefused(f"{path}: no period table could be read ({error.__class__.__name__}); give a UTF-8 CSV file") from None


@lru_cache(maxsize=1)
def shipped_periods() -> Periods:
    """The table shipped with the tool: eons, eras, periods and epochs of the chronostratigraphic chart; its version in each row."""
    package = Path(__file__).resolve().parent.parent
    for folder in (package / "_files" / "datasets", package.parent / "datasets"):
        if (folder / "periods.csv").is_file():
            return read_periods(folder / "periods.csv")
    return Periods((), "no period table: datasets/periods.csv is missing")
