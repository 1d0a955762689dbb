# SPDX-License-Identifier: Apache-2.0
"""Delimited text: both ways of reading give the same rows, and every line of the file is accounted for."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator, Sequence
from pathlib import Path

import duckdb
import pytest
from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st

from chronos_acc.dating import Settings
from chronos_acc.errors import ListRefused
from chronos_acc.store import delimited
from chronos_acc.store.ledger import Ledger
from chronos_acc.store.rows import SPACES, fill
from chronos_acc.store.sheets import bare_sheet, columns_of, match_columns
from chronos_acc.store.table import Asked, Table

OFTEN = settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
CELL = st.text(alphabet=st.sampled_from(list("ab1 ,;\"|\t\n\r'é\\x")), max_size=8)


@pytest.fixture(scope="module")
def ledger() -> Iterator[Ledger]:
    """A database in memory."""
    with duckdb.connect(config={"python_enable_replacements": "false"}) as connection:
        yield Ledger(connection, Path("memory"), writable=True)


def table_of(content: bytes, folder: Path, encoding: str | None = None) -> Table:
    """The list in some bytes."""
    file = folder / "list.csv"
    file.write_bytes(content)
    return delimited.read(
        file, Asked("list.csv", lambda header: sum(key in match_columns(header, {}) for key in ("title", "date")), folder, encoding)
    )


def both(ledger: Ledger, table: Table) -> tuple[list[tuple[object, ...]], list[tuple[object, ...]] | None]:
    """The rows as the careful reader gives them, and as the database does (None where it is not trusted with the file)."""
    columns = columns_of(table.header, bare_sheet("x", None), "x")
    listed = "title, date" + (", rest" if len(table.header) > 2 else "")

    def rows(one: Table) -> tuple[list[tuple[object, ...]], bool]:
        made = fill(ledger, one, columns, Settings(), "x")
        assert made.count == len(made.refused) + ledger.value("SELECT count(*) FROM list_rows")
        return ledger.rows(f"SELECT {made.row}, {listed} FROM list_rows ORDER BY rowid"), made.has_raw

    careful, _ = rows(Table(table.header, table.lines))
    if table.fast is None:
        return careful, None
    fast, fell_back = rows(table)
    return careful, None if fell_back else fast


@OFTEN
@given(
    st.lists(st.tuples(CELL, CELL, CELL), min_size=1, max_size=6), st.sampled_from(",;\t|"), st.sampled_from(["\n", "\r\n"]), st.booleans()
)
@example([("a", "1", ""), ("b", '"', "x")], ",", "\n", False)
def test_what_is_written_by_the_rules_comes_back(
    ledger: Ledger, tmp_path: Path, rows: list[tuple[str, str, str]], delimiter: str, end: str, marked: bool
) -> None:
    out = io.StringIO()
    writer = csv.writer(out, delimiter=delimiter, lineterminator=end)
    writer.writerow(["Title", "DATE", "more"])
    writer.writerows(rows)
    table = table_of(out.getvalue().encode("utf-8-sig" if marked else "utf-8"), tmp_path)
    assert table.header == ("Title", "DATE", "more")
    careful, fast = both(ledger, table)
    expected = [tuple(bare(cell) for cell in row[:2]) for row in rows if any(row) or delimiter != " "]
    if "\r" not in "".join(map("".join, rows)):  # a carriage return inside a cell is a line end to some programs
        assert [row[1:3] for row in careful] == expected
    if fast is not None:
        assert fast == careful


def bare(cell: str) -> str | None:
    """A cell as it is held, line ends inside it in one spelling."""
    return cell.replace("\r\n", "\n").strip(SPACES) or None


@OFTEN
@given(
    st.text(alphabet=st.sampled_from(list('ab1 ,,,;""\n\n\né\r')), max_size=60),
    st.sampled_from(["title,date\n", 'date,"title"\n', "title,date,x\r\n"]),
)
@example(' "a"b,c\n"x\ny",1\n"z', "title,date\n")
def test_every_line_is_accounted_for(ledger: Ledger, tmp_path: Path, text: str, header: str) -> None:
    table = table_of((header + text).encode(), tmp_path)
    width = len(table.header)
    lines = list(table.lines(frozenset(), frozenset()))
    body = (header + text).split("\r" if "\n" not in header + text else "\n")
    assert all((line.cells is None) == bool(line.reason) for line in lines)
    assert all(line.cells is None or len(line.cells) == width for line in lines)
    covered = [number for line in lines for number in range(line.row, line.row + line.raw.count("\n") + 1)]
    assert covered == sorted(set(covered))
    left = set(range(2, len(body) + 1)) - set(covered)
    assert all(not body[number - 1].removesuffix("\r").strip(" ") for number in left)
    careful, fast = both(ledger, table)
    if fast is not None:
        assert fast == careful


@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.binary(max_size=80), st.sampled_from([None, "cp1252", "utf-16", "shift_jis"]))
def test_any_bytes_are_read_or_refused(ledger: Ledger, tmp_path: Path, content: bytes, encoding: str | None) -> None:
    head = "title,date\n".encode("utf-16" if encoding == "utf-16" else "ascii")
    try:
        table = table_of(head + content, tmp_path, encoding)
        both(ledger, table)
    except ListRefused as refused:
        assert "\n" not in str(refused)


def cells(content: bytes | str, folder: Path, encoding: str | None = None) -> list[tuple[int, Sequence[str | None] | None, str]]:
    """(row, cells, reason) of each row."""
    table = table_of(content if isinstance(content, bytes) else content.encode(), folder, encoding)
    return [(line.row, line.cells, line.reason) for line in table.lines(frozenset(), frozenset())]


def test_a_quote_that_never_closes_spoils_its_own_line_only(tmp_path: Path) -> None:
    found = cells('title,date\na,1\n"b,2\nc,3\n"d",4\n', tmp_path)
    assert [(row, cell) for row, cell, _ in found] == [(2, ["a", "1"]), (3, None), (4, ["c", "3"]), (5, ["d", "4"])]
    assert "goes on after its closing quote" in found[1][2]
    found = cells('title,date\na,1\n"b,2\nc,3\n', tmp_path)
    assert found[1][2] == "a quote is opened here and never closed" and found[2][1] == ["c", "3"]


def test_ragged_rows_are_refused_and_empty_cells_at_the_end_are_let_pass(tmp_path: Path) -> None:
    found = cells("title,date\na\nb,1,2\nc,1,,\n,\n", tmp_path)
    assert [cell for _, cell, _ in found] == [None, None, ["c", "1"], ["", ""]]
    assert "the row has 1 cell, the header 2" in found[0][2] and "the row has 3 cells" in found[1][2]


def test_nul_and_undecodable_bytes_spoil_their_row(tmp_path: Path) -> None:
    found = cells(b"title,date\na\0b,1\nc\xe9,2\nd,3\n", tmp_path)
    assert [cell for _, cell, _ in found] == [None, None, ["d", "3"]]
    assert "NUL" in found[0][2] and "byte 0xE9 is not utf-8" in found[1][2]


def test_encodings(tmp_path: Path) -> None:
    text = "title,date\ncafé,1850\n"
    for encoding in ("cp1252", "utf-16", "utf-8-sig", "utf-16-le", "mac-roman"):
        assert cells(text.encode(encoding), tmp_path, encoding)[0][1] == ["café", "1850"], encoding
    for encoding in ("utf-16", "utf-32", "utf-8-sig"):  # told by the byte order mark
        assert cells(text.encode(encoding), tmp_path)[0][1] == ["café", "1850"], encoding
    assert cells("title,date\r\u3042,1\r".encode("shift_jis"), tmp_path, "shift_jis")[0][1] == ["\u3042", "1"]


def test_old_line_ends_and_blank_lines(tmp_path: Path) -> None:
    assert cells("title,date\ra,1\r\rb,2", tmp_path) == [(2, ["a", "1"], ""), (4, ["b", "2"], "")]
    assert cells("\n\ntitle,date\r\na,1\n\r\nb,2\r\n", tmp_path) == [(4, ["a", "1"], ""), (6, ["b", "2"], "")]


def test_a_cell_of_many_lines_and_a_huge_cell(tmp_path: Path) -> None:
    found = cells('title,date\n"a\nb\nc",1\nd,2\n' + "x" * 3_000_000 + ",3\ne,4\n", tmp_path)
    assert [(row, cell) for row, cell, _ in found] == [(2, ["a\nb\nc", "1"]), (5, ["d", "2"]), (6, None), (7, ["e", "4"])]
    assert "at most 2,097,152 are read" in found[2][2]


def test_the_delimiter_is_told_by_the_header(tmp_path: Path) -> None:
    for delimiter in ",;|\t":
        table = table_of(f"title{delimiter}note, or so{delimiter}date\n".encode() if delimiter != "," else b"title,date;x|y\n", tmp_path)
        assert "title" in table.header, delimiter
    assert table_of(b"title,date;x|y\n", tmp_path).header == ("title", "date;x|y")
