# SPDX-License-Identifier: Apache-2.0
"""A load that is killed leaves each list whole or not at all; a second process is told who holds the file."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from chronos_acc.errors import TimelineRefused
from chronos_acc.store.ledger import open_for_reading
from chronos_acc.store.load import load

ROWS = 10_000
CHILD = """
import sys
from chronos_acc.store.load import load
print("ready", flush=True)
for turn in range(1000):
    load(sys.argv[1], sys.argv[2 + turn % 2 :: 2], link=False)
    print("loaded", flush=True)
"""


def list_of(path: Path, shift: int) -> Path:
    """A list of ROWS events; the shift is in every date, so that a mixture of two states shows."""
    path.write_text("title,date\n" + "".join(f"event {i},{shift + i % 7}\n" for i in range(ROWS)))
    return path


def state(db: Path) -> dict[str, tuple[int, int]]:
    """For each list its entries, and the earliest year (the shift)."""
    with open_for_reading(db) as ledger:
        rows = ledger.rows(
            "SELECT s.name, s.rows_loaded, count(e.entry), min(e.earliest), max(e.earliest) FROM ledger.source s "
            "LEFT JOIN ledger.entry e ON e.source = s.source GROUP BY ALL"
        )
    assert all(loaded == entries and high - low == 6 for _, loaded, entries, low, high in rows)
    return {name: (entries, int(low)) for name, _, entries, low, _ in rows}


def test_killed_at_any_instant_each_list_is_whole_or_absent(tmp_path: Path) -> None:
    db = tmp_path / "t.duckdb"
    first = [list_of(tmp_path / "a" / "x.csv", 1000), list_of(tmp_path / "a" / "y.csv", 1000)] if (tmp_path / "a").mkdir() is None else []
    (tmp_path / "b").mkdir()
    second = [list_of(tmp_path / "b" / "x.csv", 2000), list_of(tmp_path / "b" / "y.csv", 2000)]
    arguments = [str(path) for pair in zip(first, second, strict=True) for path in pair]
    seen = set()
    for delay in (0.02, 0.1, 0.2, 0.4):
        child = subprocess.Popen([sys.executable, "-c", CHILD, str(db), *arguments], stdout=subprocess.PIPE)
        assert child.stdout is not None
        child.stdout.readline()
        time.sleep(delay)
        os.kill(child.pid, signal.SIGKILL)
        child.wait()
        child.stdout.close()
        if db.exists():
            found = state(db)
            assert set(found) <= {"x", "y"} and all(entries == ROWS and low in (1000, 2000) for entries, low in found.values())
            seen.add(tuple(sorted(found.items())))
    load(db, first, link=False)
    assert state(db) == {"x": (ROWS, 1000), "y": (ROWS, 1000)}


def test_a_second_process_is_told_who_holds_the_file(tmp_path: Path) -> None:
    db, file = tmp_path / "t.duckdb", list_of(tmp_path / "x.csv", 1000)
    load(db, [file], link=False)
    holder = (
        "import sys, time\nfrom chronos_acc.store.ledger import open_for_writing\n"
        "with open_for_writing(sys.argv[1]):\n print('held', flush=True)\n time.sleep(60)"
    )
    child = subprocess.Popen([sys.executable, "-c", holder, str(db)], stdout=subprocess.PIPE)
    try:
        assert child.stdout is not None and child.stdout.readline() == b"held\n"
        with pytest.raises(TimelineRefused, match=f"held by process {child.pid}"):
            load(db, [file])
    finally:
        child.kill()
        child.wait()
        if child.stdout:
            child.stdout.close()
