# SPDX-License-Identifier: Apache-2.0
"""Small timelines for tests, written straight into the ledger: no file is read and no date text is parsed."""

from __future__ import annotations

import atexit
import json
import shutil
import tempfile
from collections.abc import Mapping, Sequence
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np

from chronos_acc.store.ledger import Ledger, now, open_for_writing
from chronos_acc.store.linking import relink_open

Row = tuple[str, float] | tuple[str, float, float] | Mapping[str, Any]


def put(ledger: Ledger, name: str, rows: Sequence[Row], **source: Any) -> int:
    """Put a list in place of one of the same name; an entry is (title, year), (title, year, half-width), or a mapping. Returns its id."""
    found = ledger.value("SELECT source FROM ledger.source WHERE name = ?", [name])
    number = int(found) if found is not None else ledger.new_ids("source")
    ids = {(t, n): e for e, t, n in ledger.rows("SELECT entry, title, nth FROM ledger.entry WHERE source = ?", [number])}
    for table in ("entry", "reject", "source"):
        ledger.run(f"DELETE FROM ledger.{table} WHERE source = ?", [number])
    values = {
        "compiled": 2020,
        "file": f"{name}.csv",
        "loaded_at": now(),
        "digest": name,
        "rows_read": len(rows),
        "rows_loaded": len(rows),
        **source,
    }
    if "precedes" in values:
        values["precedes"] = json.dumps(values["precedes"])
    ledger.run(
        f"INSERT INTO ledger.source (source, name, {', '.join(values)}) VALUES (?, ?{', ?' * len(values)})",
        [number, name, *values.values()],
    )
    counts: dict[str, int] = {}
    code = ledger.notation_codes(["year", "plus_minus"])
    columns: dict[str, list[Any]] = {}
    for at, row in enumerate(rows, start=1):
        given = dict(row) if isinstance(row, Mapping) else {"title": row[0], "best": row[1], "half": row[2] if len(row) > 2 else 0.5}
        half = given.pop("half", 0.5)
        title, best = given["title"], float(given["best"])
        counts[title] = counts.get(title, 0) + 1
        entry = ids.get((title, counts[title]))
        full = {
            "entry": entry if entry is not None else ledger.new_ids("entry"), "source": number, "row": at + 1, "nth": counts[title],
            "earliest": best - half, "latest": best + half, "normal": False, "date_text": f"{best:g}",
            "category": None, "importance": np.nan,
            "level": None, "parent": None, "note": None, "duplicate": False, **given,
        }  # fmt: skip
        full["notation"] = code["plus_minus" if full["normal"] else "year"]
        for key, value in full.items():
            columns.setdefault(key, []).append(value)
    ledger.insert("ledger.entry", columns)
    ledger.entries_changed()
    return number


@cache
def _kept(which: str) -> Path:
    """A file made once in this run, to be copied."""
    path = Path(tempfile.mkdtemp(prefix="chronos-acc-tests-")) / "kept.duckdb"
    atexit.register(shutil.rmtree, path.parent, ignore_errors=True)
    if which == "empty":
        with open_for_writing(path):
            pass
    else:
        _two_lists(path)
    return path


def make(path: Path, lists: Mapping[str, Sequence[Row]], link: bool = True, **sources: Mapping[str, Any]) -> Path:
    """A timeline of lists by name; ``sources`` holds more columns of a list by its name."""
    shutil.copyfile(_kept("empty"), path)
    with open_for_writing(path) as ledger, ledger.transaction():
        for name, rows in lists.items():
            put(ledger, name, rows, **sources.get(name, {}))
        if link:
            relink_open(ledger)
    return path


KILN, MILL, BRIDGE = "First kiln of the valley", "Water mill at Harnoy", "Stone bridge over the Isven"
ALPHA = (
    "Copper found in the northern scarp", "Salt road opened", "Plague year at Tolm", "Guild of dyers chartered", "Cathedral roof burns",
    "Silver coin struck",
    "Earthquake in autumn", "University statutes sealed", "Dyke along the marshes", "Printing house licensed", "Observatory dome built",
    "Vaccination made duty",
)  # fmt: skip
BETA = (
    "Windmills reach Brayle", "Heresy trial of the weavers", "Long frost", "Glass blown at Orrin", "Census ordered", "Opera founded",
    "Railway to Vessik", "Telegraph exchange", "Potato blight", "Womens franchise", "Aerodrome", "Reservoir filled",
)  # fmt: skip


def two_lists(path: Path) -> Path:
    """The timeline of ``_two_lists``, as a copy."""
    shutil.copyfile(_kept("two lists"), path)
    return path


def _two_lists(path: Path) -> Path:
    """Two lists that share two of four milestones, with different years for one of them among strangers."""
    far = [(t, 500.5 + 97 * i) for i, t in enumerate(ALPHA)]
    near = [(t, 531.5 + 97 * i) for i, t in enumerate(BETA)]
    return make(
        path,
        {
            "alpha": [
                {"title": KILN, "best": 1200.5, "category": "craft", "importance": 2.0},
                {"title": MILL, "best": 1650.5, "category": "water"},
                *far,
            ],
            "beta": [
                {"title": KILN, "best": 1203.5, "category": "craft", "importance": 4.0},
                {"title": MILL, "best": 1650.5},
                {"title": BRIDGE, "best": 1890.5},
                *near,
            ],
        },
        beta={"compiled": 2023},
    )
