# SPDX-License-Identifier: Apache-2.0
"""The formats of lists: the family, and what each makes of cells."""

from __future__ import annotations

import datetime as dt
import gzip
import io
import json
from pathlib import Path
from typing import Any

import duckdb
import openpyxl
import pytest

from chronos_acc.errors import ListRefused, WrongUse
from chronos_acc.store import formats
from chronos_acc.store.ledger import open_for_reading
from chronos_acc.store.load import load
from chronos_acc.store.propose import propose_sheet


def entries(folder: Path, file: Path, columns: str = "row, title, date_text, rest", **options: Any) -> list[tuple[Any, ...]]:
    """Load one file into a new timeline and give its entries."""
    db = folder / "t.duckdb"
    db.unlink(missing_ok=True)
    load(db, [file], link=False, **options)
    with open_for_reading(db) as ledger:
        return ledger.rows(f"SELECT {columns} FROM entries ORDER BY row")


def rejects(folder: Path) -> list[tuple[Any, ...]]:
    """The refused rows of that timeline."""
    with open_for_reading(folder / "t.duckdb") as ledger:
        return ledger.rows("SELECT row, raw, reason FROM rejects ORDER BY row")


def test_the_family_is_the_folder() -> None:
    here = Path(formats.__file__).parent
    assert sorted(one.name for one in formats.FORMATS) == sorted(path.stem for path in here.glob("*.py") if path.stem != "__init__")
    endings = [ending for one in formats.FORMATS for ending in one.suffixes]
    assert len(endings) == len(set(endings)) and all(one.words for one in formats.FORMATS)


def test_a_format_is_told_by_the_ending_or_the_name() -> None:
    assert formats.for_file("A.CSV").name == "csv"
    assert formats.for_file("a.b.tsv.gz").name == "tsv"
    assert formats.by_name("Parquet").name == "parquet"
    with pytest.raises(WrongUse, match="choose one of csv, tsv, json, ndjson, parquet, excel"):
        formats.by_name("xml")
    with pytest.raises(ListRefused, match="known are .csv"):
        formats.for_file("a.gz")


def test_json_keeps_numbers_as_written(tmp_path: Path) -> None:
    file = tmp_path / "x.json"
    file.write_text(
        '[{"Title": "a", "date": 1850.0, "tags": [1, 2.50], "n": 1e3, "none": null}, {"Title": "b", "date": "44 BCE", "ok": true}]'
    )
    assert entries(tmp_path, file) == [
        (1, "a", "1850.0", '{"tags": [1, 2.50], "n": 1e3}'),
        (2, "b", "44 BCE", '{"ok": true}'),
    ]
    assert entries(tmp_path, file, "latest - earliest") == [(pytest.approx(0.1),), (1.0,)]


def test_json_rows_that_are_no_rows_are_refused_one_by_one(tmp_path: Path) -> None:
    file = tmp_path / "x.json"
    file.write_text(
        '{"source": "s", "items": [{"title": "a", "date": 1}, 5, {"title": ["x"], "date": 2}, {"title": "b", "title": "c", "date": 3},'
        ' {"title": "d"}, {"title": "\\ud800", "date": 4}, {"title": "e", "date": true}]}'
    )
    assert [row[1] for row in entries(tmp_path, file)] == ["a"]
    assert [(row, reason.split(";")[0]) for row, _, reason in rejects(tmp_path)] == [
        (2, "a row must be an object with a key for each column"),
        (3, "the value of 'title' must be a text or a number"),
        (4, "a key stands twice in this object"),
        (5, "the row has no date"),
        (6, "the row holds half of a surrogate pair, which is no character"),
        (7, "the value of 'date' must be a text or a number"),
    ]


@pytest.mark.parametrize(
    "text", ["[" * 100_000, '[{"title": 1' + "0" * 5000 + "}", "nul", '{"a": [{"x": 1}], "b": [{"x": 1}]}', "[1, 2]", "[]", "\ufeff  "]
)
def test_odd_json_is_one_line(tmp_path: Path, text: str) -> None:
    file = tmp_path / "x.json"
    file.write_text(text, encoding="utf-8")
    with pytest.raises(ListRefused) as caught:
        entries(tmp_path, file)
    assert "\n" not in str(caught.value) and len(str(caught.value)) < 500


def test_ndjson_accounts_for_each_line(tmp_path: Path) -> None:
    file = tmp_path / "x.jsonl"
    file.write_bytes(
        b'{"title": "a", "date": 1}\n\n{"title": "b", "da\n"x"\n{"title": "c\xe9", "date": 2}\n'
        b'{"title": "d", "date": NaN}\n{"date": 3, "title": "e"}'
    )
    assert [row[:2] for row in entries(tmp_path, file)] == [(1, "a"), (7, "e")]
    assert [(row, reason.partition(":")[0]) for row, _, reason in rejects(tmp_path)][:3] == [
        (3, "no sound JSON"),
        (4, "a row must be an object with a key for each column"),
        (5, 'byte 0xE9 is not utf-8; name the file\'s encoding in its sheet, for example encoding = "cp1252"'),
    ]


def test_parquet_types_become_what_people_write(tmp_path: Path) -> None:
    file = tmp_path / "x[1].parquet"  # a name the database would take for a pattern
    duckdb.execute(
        "COPY (SELECT * FROM (VALUES ('a', 1850.0::DOUBLE, 1::INT, DATE '1850-05-06', [1]), "
        "('b', 1850.25, NULL, DATE '0044-03-15 (BC)', NULL), "
        "('c', 'nan'::DOUBLE, 2, NULL, NULL)) t(title, date, n, d, l)) TO '" + str(tmp_path / "y.parquet") + "' (FORMAT parquet)"
    ).fetchall()
    (tmp_path / "y.parquet").rename(file)
    assert entries(tmp_path, file) == [
        (1, "a", "1850", '{"n":"1","d":"1850-05-06","l":"[1]"}'),
        (2, "b", "1850.25", '{"d":"-0043-03-15"}'),
    ]
    assert rejects(tmp_path) == [(3, '{"title": "c", "n": "2"}', "the row has no date")]


def test_parquet_dates_and_times(tmp_path: Path) -> None:
    file = tmp_path / "x.parquet"
    duckdb.execute(
        "COPY (SELECT 'day' AS title, TIMESTAMP '1969-07-20 00:00:00' AS date "
        "UNION ALL SELECT 'time', TIMESTAMP '1969-07-20 20:17:40') TO '" + str(file) + "' (FORMAT parquet)"
    ).fetchall()
    assert sorted(row[2] for row in entries(tmp_path, file)) == ["1969-07-20", "1969-07-20T20:17:40"]


def workbook(rows: list[list[Any]], *more: str) -> openpyxl.Workbook:
    """A workbook of one sheet with rows, and further sheets."""
    book = openpyxl.Workbook()
    for row in rows:
        book.active.append(row)
    for title in more:
        book.create_sheet(title).append(["x"])
    return book


def test_excel_reads_the_first_sheet_with_cells(tmp_path: Path) -> None:
    file = tmp_path / "x.xlsx"
    rows = [
        ["Title", "Date", "More"],
        ["a", 1850, 2.0],
        [],
        ["b", dt.datetime(1850, 5, 6), None],
        ["c", 1850.25, True],
        ["d", None, "x"],
        ["e", 1, 2, 3],
    ]
    workbook(rows, "second").save(file)
    assert entries(tmp_path, file) == [
        (2, "a", "1850", '{"More":"2"}'),
        (4, "b", "1850-05-06", None),
        (5, "c", "1850.25", '{"More":"true"}'),
    ]
    assert [(row, reason) for row, _, reason in rejects(tmp_path)] == [
        (6, "the row has no date"),
        (7, "the row has cells beyond the 3 columns of the header"),
    ]
    with open_for_reading(tmp_path / "t.duckdb") as ledger:
        assert "worksheet 'Sheet' was read; not read: 'second'" in ledger.value("SELECT notes FROM sources")


def test_excel_without_its_package_says_what_to_install(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    import sys

    file = tmp_path / "x.xlsx"
    workbook([["title", "date"], ["a", 1]]).save(file)
    monkeypatch.setitem(sys.modules, "openpyxl", None)
    with pytest.raises(ListRefused, match=r"pip install 'chronos-acc\[excel\]'"):
        entries(tmp_path, file)


def test_an_empty_workbook_is_refused(tmp_path: Path) -> None:
    workbook([]).save(tmp_path / "x.xlsx")
    with pytest.raises(ListRefused, match="the workbook is empty"):
        entries(tmp_path, tmp_path / "x.xlsx")


@pytest.mark.parametrize("ending", ["csv", "tsv", "json", "ndjson", "parquet", "xlsx"])
def test_one_list_in_every_format_is_one_list(tmp_path: Path, ending: str) -> None:
    rows = [{"title": f"event {i}, été", "date": ["1850", "c. 1700", "44 BCE"][i % 3], "kind": "x" if i % 2 else None} for i in range(9)]
    file = tmp_path / f"list.{ending}"
    if ending in ("csv", "tsv"):
        mark = "," if ending == "csv" else "\t"
        file.write_text(
            mark.join(["title", "date", "kind"])
            + "\n"
            + "".join(mark.join([f'"{r["title"]}"', r["date"], r["kind"] or ""]) + "\n" for r in rows)
        )
    elif ending == "json":
        file.write_text(json.dumps(rows))
    elif ending == "ndjson":
        file.write_text("".join(json.dumps(row) + "\n" for row in rows))
    elif ending == "parquet":
        import pandas as pd

        pd.DataFrame(rows).to_parquet(file)
    else:
        workbook([list(rows[0]), *(list(row.values()) for row in rows)]).save(file)
    plain = entries(tmp_path, file, "title, date_text, earliest, latest, json_extract_string(rest, '$.kind')")
    assert [(title, date, kind) for title, date, _, _, kind in plain] == [(r["title"], r["date"], r["kind"]) for r in rows]
    packed = tmp_path / f"packed.{ending}.gz"
    if ending not in ("parquet", "xlsx"):
        packed.write_bytes(gzip.compress(file.read_bytes()))
        assert entries(tmp_path, packed, "title, date_text, earliest, latest, json_extract_string(rest, '$.kind')") == plain
    db = tmp_path / "t.duckdb"
    name = {"xlsx": "excel"}.get(ending, ending)
    (one,) = load(db, ["-"], as_format=name, stdin=io.BytesIO(file.read_bytes()), link=False)
    assert (one.rows_read, one.rows_loaded) == (9, 9)


def test_a_heading_above_the_header_of_a_worksheet_is_no_row(tmp_path: Path) -> None:
    file = tmp_path / "x.xlsx"
    workbook([["Milestones of the valley", "2019"], [], ["title", "date"], ["kiln", 1200], ["mill", 1300]]).save(file)
    (one,) = load(tmp_path / "t.duckdb", file, link=False)
    assert (one.rows_read, one.rows_loaded, one.notes) == (2, 2, ("the header was found in row 3; the line above it is no row",))


def test_the_names_of_the_sheet_or_usual_ones_tell_the_header(tmp_path: Path) -> None:
    file = tmp_path / "x.xlsx"
    workbook([["Liste"], ["aus dem Archiv"], ["Ereignis", "Jahr"], ["kiln", 1200]]).save(file)
    with pytest.raises(ListRefused, match="no column 'title'; its columns are 'Liste'"):
        load(tmp_path / "t.duckdb", file)
    sheet = tmp_path / "x.toml"
    sheet.write_text('[columns]\ntitle = "Ereignis"\ndate = "Jahr"\n')
    (one,) = load(tmp_path / "t.duckdb", file, link=False)
    assert (one.rows_read, one.notes) == (1, ("the header was found in row 3; the 2 lines above it are no rows",))
    sheet.unlink()
    workbook([["Valley"], ["Event", "Age (ka)"], ["kiln", 12]]).save(file)
    text = propose_sheet(file)
    assert 'title = "Event"' in text and 'date = "Age (ka)"' in text and 'unit = "ka"' in text
    assert "# the header was found in row 2; the line above it is no row" in text


def test_nothing_else_is_guessed_about_headers(tmp_path: Path) -> None:
    file = tmp_path / "x.xlsx"
    for rows in (
        [["Ereignis", "Jahr"], ["First entry", "66 Ma"], ["x", "1850"]],  # no row names columns
        [["Note"], ["title", "date"], ["x", "1850"]],  # the first row names one
        [[f"line {i}"] for i in range(10)] + [["title", "date"], ["x", "1850"]],  # too far down
    ):
        workbook(rows).save(file)
        with pytest.raises(ListRefused, match="no column 'title'"):
            load(tmp_path / "t.duckdb", file)


@pytest.mark.parametrize(
    "heading", ["Milestones of the valley", '"Milestones, of the valley"', "Milestones; 2019; north", "Milestones,,", "\nMilestones"]
)
def test_a_heading_of_one_cell_above_the_header_of_a_text_is_no_row(tmp_path: Path, heading: str) -> None:
    file = tmp_path / "x.csv"
    file.write_text(f"{heading}\ntitle,date,where\nkiln,1200,a\nmill,1300,b\n")
    (one,) = load(tmp_path / "t.duckdb", file, link=False)
    line = 2 + heading.count("\n")
    assert (one.rows_read, one.rows_loaded, one.notes) == (2, 2, (f"the header was found in line {line}; the line above it is no row",))
    with open_for_reading(tmp_path / "t.duckdb") as ledger:
        assert ledger.rows("SELECT row, title, rest FROM entries ORDER BY row")[0] == (line + 1, "kiln", '{"where":"a"}')


def test_a_heading_of_several_cells_in_a_text_is_left_to_the_person(tmp_path: Path) -> None:
    file = tmp_path / "x.csv"
    file.write_text("Milestones,of the valley\ntitle,date\nkiln,1200\n")
    with pytest.raises(ListRefused, match="no column 'title'"):
        load(tmp_path / "t.duckdb", file)
    file.write_text("Valley\nEvent;Year\nkiln;1200\n")
    assert 'title = "Event"' in propose_sheet(file)
