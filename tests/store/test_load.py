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
        assert ledger.rows("SELECT nth, duplicate, rest FROM entries WHERE title = 'First kiln' ORDER BY row") == [
            (1, False, '{"Region":"north"}'),
            (2, True, None),
        ]


def test_the_same_again_changes_nothing(db: Path, tmp_path: Path) -> None:
    file = write(tmp_path / "kilns.csv", LIST)
    load(db, [file], link=False)
    before = held(db, "*")
    (again,) = load(db, [file], link=False)
    assert (again.added, again.changed, again.gone, again.rows_loaded) == (0, 0, 0, 4)
    assert "nothing was changed" in again.notes[0]
    assert held(db, "*") == before


def test_a_changed_list_keeps_ids_and_says_what_changed(db: Path, tmp_path: Path) -> None:
    file = write(tmp_path / "kilns.csv", LIST)
    load(db, [file], link=False)
    write(file, 'Title,Date,Region\nNew first,1700,\n"Second, mill",1903,\nFirst kiln,1850,north\nFirst kiln,1851,\n')
    (one,) = load(db, [file], link=False)
    assert (one.added, one.changed, one.gone, one.duplicates) == (1, 2, 1, 0)
    assert "in place of what" in one.notes[-1] and "to go back" in one.notes[-1]
    assert held(db, "entry, title, row, nth, earliest") == [
        (6, "New first", 2, 1, 1700.0),
        (2, "Second, mill", 3, 1, 1903.0),
        (1, "First kiln", 4, 1, 1850.0),
        (5, "First kiln", 5, 2, 1851.0),
    ]
    with open_for_reading(db) as ledger:
        assert ledger.rows("SELECT count(*) FROM rejects") == [(0,)]
        assert ledger.rows("SELECT rows_read, rows_loaded, rows_rejected, duplicates FROM sources") == [(4, 4, 0, 0)]


def test_an_id_is_never_used_for_another_entry(db: Path, tmp_path: Path) -> None:
    file = write(tmp_path / "a.csv", "title,date\nx,1\ny,2\n")
    load(db, [file], link=False)
    load(db, [write(file, "title,date\nz,1\n")], link=False)
    assert held(db, "entry, title") == [(3, "z")]


def test_a_file_whose_rows_are_all_refused_is_refused_but_its_rejects_are_kept(db: Path, tmp_path: Path) -> None:
    file = write(tmp_path / "dark.csv", "title,date\nx,who knows\n,1850\n")
    for _ in range(2):
        with pytest.raises(ListRefused, match="none of its 2 rows can be read.*rejects"):
            load(db, [file], link=False)
    with open_for_reading(db) as ledger:
        assert ledger.rows("SELECT row FROM rejects ORDER BY row") == [(2,), (3,)]
        assert ledger.rows("SELECT rows_read, rows_loaded, rows_rejected FROM sources") == [(2, 0, 2)]
    load(db, [write(file, "title,date\nx,1850\n")], link=False)
    assert held(db, "title") == [("x",)]


def test_a_spoilt_file_does_not_take_a_good_list_away(db: Path, tmp_path: Path) -> None:
    file = write(tmp_path / "kilns.csv", LIST)
    load(db, [file], link=False)
    before = held(db)
    for text in ("", "title,date\n", "title,date\nx,who knows\n", "name;when\nx;1850\n"):
        with pytest.raises(ListRefused):
            load(db, [write(file, text)], link=False)
        assert held(db) == before


def test_strict_keeps_nothing_of_a_list_with_a_refused_row(db: Path, tmp_path: Path) -> None:
    file = write(tmp_path / "kilns.csv", LIST)
    with pytest.raises(ListRefused, match="1 of its 5 rows cannot be read; line 5: the row has no date.*--strict"):
        load(db, [file], link=False, strict=True)
    assert not db.exists()


def test_one_bad_list_among_several_does_not_stop_the_others(db: Path, tmp_path: Path) -> None:
    good, bad = write(tmp_path / "good.csv", LIST), write(tmp_path / "bad.csv", "title\nx\n")
    with pytest.raises(ListRefused, match="1 of 2 lists were loaded; refused: .*bad.csv") as caught:
        load(db, [bad, good])
    assert [one.source for one in caught.value.loaded] == ["good"]  # type: ignore[attr-defined]
    with open_for_reading(db) as ledger:
        assert ledger.about("linked") == "yes"


def test_a_sheet_that_names_a_missing_column_does_not_stop_the_others(db: Path, tmp_path: Path) -> None:
    good, bad = write(tmp_path / "good.csv", LIST), write(tmp_path / "bad.csv", "title,date\nx,1\n")
    write(tmp_path / "bad.toml", '[columns]\ndate = "When"\n')
    with pytest.raises(ListRefused, match=r"1 of 2 lists were loaded; refused: .*date is 'When'"):
        load(db, [bad, good], link=False)
    assert len(held(db)) == 4


def test_a_list_of_refused_rows_leaves_the_milestones_alone(db: Path, tmp_path: Path) -> None:
    load(db, [write(tmp_path / "good.csv", LIST)])
    with pytest.raises(ListRefused):
        load(db, [write(tmp_path / "bad.csv", "title,date\nx,who knows\n")])
    with open_for_reading(db) as ledger:
        assert ledger.about("linked") == "yes" and ledger.value("SELECT count(*) FROM ledger.milestone") == 4
        assert ledger.value("SELECT count(*) FROM rejects") == 2


def test_linking_follows_unless_it_is_put_off(db: Path, tmp_path: Path) -> None:
    a = write(tmp_path / "a.csv", "title,date\nFirst kiln at Ommer,1850\nOld mill,1700\n")
    b = write(tmp_path / "b.csv", "title,date\nThe first kiln at Ommer,1850\nLoom,1600\n")
    (one,) = load(db, [a], link=False)
    with open_for_reading(db) as ledger:
        assert ledger.about("linked") == "no"
    one, two = load(db, [a, b])
    assert one.linked is two.linked and one.linked.entries == 4
    with open_for_reading(db) as ledger:
        assert ledger.about("linked") == "yes"


def test_a_folder_gives_its_lists_with_sheets(db: Path, tmp_path: Path) -> None:
    folder = tmp_path / "lists"
    folder.mkdir()
    write(folder / "b.csv", "Event,Year\nx,1850\n")
    write(folder / "b.toml", '[compilation]\nname = "bee"\n[columns]\ntitle = "Event"\ndate = "Year"\n')
    write(folder / "a.tsv", "title\tdate\ny\t12\n")
    write(folder / "sheet of a.toml", '[compilation]\nfile = "a.tsv"\ncompiled = 2000\n[dating]\nunit = "ka"\n')
    write(folder / "truth.csv", "title,milestone\nx,1\n")
    write(folder / "pyproject.toml", "[project]\nname = 'no sheet'\n")
    done = load(db, [folder], link=False)
    assert [(one.source, one.rows_loaded) for one in done] == [("a", 1), ("bee", 1)]
    assert "having no sheet: truth.csv" in done[0].notes[0]
    assert load(db, [folder / "b.toml"], link=False)[0].source == "bee"
    with pytest.raises(ListRefused, match="no list with a sheet"):
        load(db, [tmp_path], link=False)


def test_standard_input_and_its_format(db: Path) -> None:
    import io

    (one,) = load(db, ["-"], as_format="ndjson", stdin=io.BytesIO(b'{"title": "x", "date": 1850}\n'), link=False)
    assert (one.source, one.rows_loaded) == ("stdin", 1)
    with pytest.raises(WrongUse, match="--as: csv, tsv, json, ndjson, parquet, excel"):
        load(db, ["-"], stdin=io.BytesIO(b""))
    with pytest.raises(WrongUse, match="no file was given"):
        load(db, [])


@pytest.mark.parametrize(
    ("name", "content", "said"),
    [
        ("missing.csv", None, "there is no such file"),
        ("empty.csv", b"", "the file is empty"),
        ("blank.csv", b"\n \n\n", "the file is empty"),
        ("only.csv", b"title,date\n", "a header but no row"),
        ("nodate.csv", b"title,when\nx,1850\n", "no column 'date'; its columns are 'title', 'when'"),
        ("twice.csv", b"title,date,Date\nx,1850,1851\n", "2 columns have the header 'date'"),
        ("list.docx", b"title,date\nx,1850\n", "the ending tells no format"),
        ("zip.csv", b"PK\x03\x04 and so on", "not text but a zip archive or an Excel workbook"),
        ("noise.csv", bytes(range(256)) * 40, "looks like binary data"),
        ("wide.csv", "title,date\nx,1850\n".encode("utf-16-le"), 'encoding = "utf-16-le"'),
        ("cut.csv.gz", b"\x1f\x8b\x08\x00\x00", "gzip data are damaged or cut off"),
        ("bad.json", b'[{"title": "x", "da', "no sound JSON"),
        ("odd.json", b'{"title": "x"}', "an array of objects"),
        ("bad.parquet", b"PAR1 no more", "no Parquet file that can be read"),
        ("bad.xlsx", b"PK\x03\x04 no more", "no workbook that can be read"),
        ("a,b.csv", b"title,date\nx,1850\n", "a name has no comma"),
    ],
)
def test_refusals_are_one_line_that_names_the_file(db: Path, tmp_path: Path, name: str, content: bytes | None, said: str) -> None:
    file = tmp_path / name
    if content is not None:
        file.write_bytes(content)
    with pytest.raises(ListRefused) as caught:
        load(db, [file], link=False)
    message = str(caught.value)
    assert said in message and "\n" not in message and Path(name).stem in message
    assert not db.exists() or held(db) == []


def test_the_nearest_file_is_named(db: Path, tmp_path: Path) -> None:
    write(tmp_path / "kilns.csv", LIST)
    with pytest.raises(ListRefused, match="nearest is 'kilns.csv'"):
        load(db, [tmp_path / "kiln.csv"])


def test_two_files_for_one_name_are_refused_before_anything_is_loaded(db: Path, tmp_path: Path) -> None:
    (tmp_path / "other").mkdir()
    files = [write(tmp_path / "kilns.csv", LIST), write(tmp_path / "other" / "kilns.tsv", "title\tdate\nx\t1\n")]
    with pytest.raises(ListRefused, match="both give the list 'kilns'"):
        load(db, files)
    assert not db.exists()
    assert len(load(db, [files[0], files[0]], link=False)) == 1


def test_importance_is_a_finite_number_or_empty(db: Path, tmp_path: Path) -> None:
    rows = {"a": "3", "b": "1.5e2", "c": "", "d": "high", "e": "nan", "f": "inf", "g": "1e999", "h": "1_000", "i": "-.5"}
    file = write(tmp_path / "x.csv", "title,date,importance\n" + "".join(f"{title},1850,{value}\n" for title, value in rows.items()))
    load(db, [file], link=False)
    assert held(db, "title, importance") == [("a", 3.0), ("b", 150.0), ("c", None), ("i", -0.5)]
    with open_for_reading(db) as ledger:
        assert [row for (row,) in ledger.rows("SELECT raw[1] FROM rejects ORDER BY row")] == list("defgh")
        assert "is no number" in ledger.value("SELECT reason FROM rejects ORDER BY row LIMIT 1")


def test_bounds_in_columns_date_a_row_and_stay_in_rest(db: Path, tmp_path: Path) -> None:
    file = write(tmp_path / "x.csv", "title,earliest,latest\na,1850,1860\nb,1850.5,1860.5\nc,,\n")
    (one,) = load(db, [file], link=False)
    assert (one.rows_loaded, one.rows_rejected) == (2, 1)
    assert held(db, "title, earliest, latest, date_text, rest")[0] == ("a", 1850.0, 1861.0, None, '{"earliest":"1850","latest":"1860"}')


def test_radiocarbon_in_another_column_is_remarked(db: Path, tmp_path: Path) -> None:
    file = write(tmp_path / "x.csv", "title,date,method\na,1850,14C\nb,1851,trees\n")
    (one,) = load(db, [file], link=False)
    assert any("1 row speaks of radiocarbon" in note for note in one.notes)


def test_defaults_are_counted_once_a_list(db: Path, tmp_path: Path) -> None:
    file = write(tmp_path / "x.csv", "title,date\na,66.0 Ma\nb,c. 1850\nc,12000 BP\nd,1200 BP\ne,1234 BP\n")
    (one,) = load(db, [file], link=False, compiled=2000)
    counted = [note for note in one.notes if note.startswith("default digits")]
    assert len(counted) == 1 and "= 2 was used for " in counted[0]


def test_source_holds_where_the_list_came_from(db: Path, tmp_path: Path) -> None:
    file = write(tmp_path / "x.csv", "title,date\na,12\n")
    sheet = '[compilation]\nname = "ex"\ntitle = "All ex"\ncitation = "C"\ncompiled = 1999\ncriterion = "k"\nencoding = "cp1252"\n'
    sheet += 'derives_from = "other"\nprecedes = [["a", "b"]]\n[dating]\nunit = "ka"\n'
    write(tmp_path / "x.toml", sheet)
    load(db, [file], link=False)
    with open_for_reading(db) as ledger:
        row = ledger.rows(
            "SELECT name, title, citation, compiled, criterion, file, encoding, derives_from, precedes, sheet, settings, length(digest) "
            "FROM ledger.source"
        )
    assert row == [
        ("ex", "All ex", "C", 1999, "k", str(file), "cp1252", ["other"], '[["a", "b"]]', sheet, '{"compiled": 1999, "unit": "ka"}', 64)
    ]


def test_a_changed_sheet_is_a_changed_list(db: Path, tmp_path: Path) -> None:
    file = write(tmp_path / "x.csv", "title,date\na,12\n")
    load(db, [file], link=False, compiled=2000)
    write(tmp_path / "x.toml", '[compilation]\ncompiled = 2000\n[dating]\nunit = "ka"\n')
    (one,) = load(db, [file], link=False)
    assert (one.added, one.changed, one.gone) == (0, 1, 0)
    assert held(db, "entry, best") == [(1, -10000.0)]


def test_progress_is_told(db: Path, tmp_path: Path) -> None:
    said: list[tuple[str, float]] = []
    load(db, [write(tmp_path / "x.csv", LIST)], link=False, tell=lambda what, share: said.append((what, share)))
    assert said[0][0] == "x: opening" and said[-1] == ("x: entered", 1.0)
    assert [share for _, share in said] == sorted(share for _, share in said)


def test_titles_stay_as_they_are_written(db: Path, tmp_path: Path) -> None:
    titles = ["=SUM(A1)", "\x1b[31mred\x1b[0m", "[bold]x[/bold]", "Ünï  ço\u0301de", "<b>t</b>", 'it\'s "so"']
    import csv

    with (tmp_path / "x.csv").open("w", newline="", encoding="utf-8") as out:
        csv.writer(out).writerows([["title", "date"], *([f"\u00a0 {title} ", "1850"] for title in titles)])
    load(db, [tmp_path / "x.csv"], link=False)
    assert [title for (title,) in held(db, "title")] == titles


@pytest.mark.parametrize("with_sheet", [False, True])
def test_the_compile_year_is_kept_where_nothing_gives_another(db: Path, tmp_path: Path, with_sheet: bool) -> None:
    (tmp_path / "lists").mkdir()
    file = write(tmp_path / "lists" / "dup.csv", "title,date\na,12 years ago\nb,1850\n")
    if with_sheet:
        write(tmp_path / "lists" / "dup.toml", '[compilation]\ntitle = "All"\n')
    given = file.parent if with_sheet else file
    load(db, given, compiled=2020)
    before = held(db, "*")
    kept = "compile year 2020 kept from the load before; --compiled or a sheet changes it"
    (again,) = load(db, given)
    assert "nothing was changed" in again.notes[0] and again.notes[1:] == (kept,)
    write(file, "title,date\na,12 years ago\nb,1850\nc,1900\n")
    (more,) = load(db, given)
    assert kept in more.notes and (more.added, more.changed, more.gone) == (1, 0, 0)
    assert held(db, "*")[:2] == before
    (other,) = load(db, given, compiled=2010)
    assert 'compile year 2010 in place of 2020: dates counted "ago" and the present move with it' in other.notes
    assert (other.changed, held(db, "earliest")[0]) == (1, (1997.5,))
    write(file.with_name("dup.toml"), "[compilation]\ncompiled = 2015\n")
    (sheet,) = load(db, given)
    assert any("compile year 2015 in place of 2010" in note for note in sheet.notes)
    with open_for_reading(db) as ledger:
        assert ledger.value("SELECT compiled FROM ledger.source") == 2015
        assert any("2015 in place of 2010" in note for note in ledger.value("SELECT notes FROM ledger.source"))


def test_a_compile_year_given_late_is_said(db: Path, tmp_path: Path) -> None:
    file = write(tmp_path / "x.csv", LIST)
    load(db, file, link=False)
    assert "compile year 2020; the load before had none" in load(db, file, link=False, compiled=2020)[0].notes


@pytest.mark.parametrize("link", [False, True])
def test_an_unknown_ancestor_is_said_until_it_is_loaded(db: Path, tmp_path: Path, link: bool) -> None:
    first = write(tmp_path / "dup.csv", "title,date\na,1850\n")
    second = write(tmp_path / "other.csv", "title,date\nb,1900\n")
    sheet = write(tmp_path / "other.toml", '[compilation]\nderives_from = "dupp"\n')
    one, two = load(db, [first, second], link=link)
    said = (
        "derives_from of other names 'dupp', which is no list here (did you mean 'dup'?); "
        "until it is loaded the lists count as independent"
    )
    assert said in two.notes and said not in one.notes
    assert two.linked is None or said in two.linked.notes
    assert said in load(db, second, link=link)[0].notes
    write(sheet, '[compilation]\nderives_from = "dup"\n')
    assert not [note for note in load(db, second, link=link)[0].notes if "derives_from" in note]


def test_lists_with_one_unknown_ancestor_count_once(db: Path, tmp_path: Path) -> None:
    for name in ("a", "b"):
        write(tmp_path / f"{name}.csv", "title,date\nx,1850\n")
        write(tmp_path / f"{name}.toml", '[compilation]\nderives_from = "lost"\n')
    loaded = load(db, tmp_path)
    assert all("no list here; the lists that name it count once" in one.notes[-1] for one in loaded)


def test_a_first_load_that_gives_nothing_leaves_no_file(db: Path, tmp_path: Path) -> None:
    bad = write(tmp_path / "bad.csv", "x,y\n1,2\n")
    empty = write(tmp_path / "empty.csv", "")
    for files in ([bad], [bad, empty], [tmp_path / "none.csv"]):
        with pytest.raises(ListRefused):
            load(db, files)
        assert not [path for path in tmp_path.iterdir() if "timeline" in path.name]
    with pytest.raises(ListRefused):  # its refused rows are kept to be looked at
        load(db, write(tmp_path / "rows.csv", "title,date\na,never\n"))
    kept = db.read_bytes()
    for files in ([bad], [bad, empty]):
        with pytest.raises(ListRefused):
            load(db, files)
    assert db.read_bytes() == kept
