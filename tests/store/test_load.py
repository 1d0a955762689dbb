# SPDX-License-Identifier: Apache-2.0
"""Loading: what is held afterwards, what is refused, and what a second load changes."""

from __future__ import annotations

from pathlib import Path

import pytest

from chronos_acc.errors import ListRefused, WrongUse
from chronos_acc.store.ledger import open_for_reading
from chronos_acc.store.load import load

LIST = 'Title,Date,Region\nFirst kiln,1850,north\n"Second, mill",1902.5,\n\nThird,,south\nFourth,44 BCE,\nFirst kiln,1850,\n'


def held(db: Path, columns: str = "entry, title, earliest, best, latest") -> list[tuple[object, ...]]:
    """The entries of a timeline."""
    with open_for_reading(db) as ledger:
        return ledger.rows(f"SELECT {columns} FROM entries ORDER BY row")


@pytest.fixture
def db(tmp_path: Path) -> Path:
    """A timeline file that does not exist yet."""
    return tmp_path / "timeline.duckdb"


def write(path: Path, text: str) -> Path:
    """A text file, its line ends as given."""
    path.write_text(text, encoding="utf-8", newline="")
    return path


def test_every_row_is_loaded_or_refused(db: Path, tmp_path: Path) -> None:
    file = write(tmp_path / "kilns.csv", LIST)
    (one,) = load(db, [file], link=False)
    assert (one.source, one.rows_read, one.rows_loaded, one.rows_rejected, one.duplicates) == ("kilns", 5, 4, 1, 1)
    assert held(db) == [
        (1, "First kiln", 1850.0, 1850.5, 1851.0),
        (2, "Second, mill", 1902.45, 1902.5, 1902.55),
        (4, "Fourth", -43.0, -42.5, -42.0),
        (5, "First kiln", 1850.0, 1850.5, 1851.0),
    ]
    with open_for_reading(db) as ledger:
        assert ledger.rows("SELECT source, row, raw, reason FROM rejects") == [("kilns", 5, "Third,,south", "the row has no date")]
        assert ledger.rows("SELECT nth, duplicate, rest FROM entries WHERE title = 'First kiln' ORDER BY row") == [(1, False, '{"Region":"north"}'), (2, True, None)]
