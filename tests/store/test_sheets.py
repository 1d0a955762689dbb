# SPDX-License-Identifier: Apache-2.0
"""The sheet of a list: what it may say, and the one line that answers each mistake."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest

from chronos_acc.dating import SETTINGS
from chronos_acc.errors import ListRefused, SheetRefused, WrongUse
from chronos_acc.store.ledger import open_for_reading
from chronos_acc.store.load import load
from chronos_acc.store import propose
from chronos_acc.store.propose import propose_sheet
from chronos_acc.store.sheets import COLUMNS, COMPILATION, DATING, bare_sheet, columns_of, find_sheet, read_sheet


def sheet(folder: Path, text: str, name: str = "list.toml") -> Path:
    """A sheet in a file."""
    path = folder / name
    path.write_text(text, encoding="utf-8")
    return path


def test_the_keys_are_those_of_the_contract() -> None:
    assert tuple(COMPILATION) == ("name", "title", "citation", "compiled", "criterion", "file", "encoding", "derives_from", "precedes")
    assert COLUMNS[:6] == ("title", "date", "unit", "sigma", "plus_minus", "earliest") and len(COLUMNS) == 12
    wanted = "unit counted calendar decimal day_order sigma circa digits hundreds radiocarbon earliest_limit latest_limit"
    assert set(wanted.split()) <= set(DATING) <= {setting.name for setting in SETTINGS} | {"periods"}


def test_a_full_sheet(tmp_path: Path) -> None:
    (tmp_path / "ages.csv").write_text("name,earliest,latest,unit,source\nOld Time,10,5,ka,invented\n")
    text = """
[compilation]
name = "ex"
title = "All ex"
citation = "Somebody (2000)"
compiled = 2000
criterion = "all"
file = "list.csv"
encoding = "latin-1"
derives_from = ["a", "b", "a"]
precedes = [["x", "y"]]
[columns]
title = "Event "
date = "When"
[dating]
unit = "ka"
sigma = 2
periods = "ages.csv"
"""
    made = read_sheet(sheet(tmp_path, text), stem="list")
    assert (made.name, made.compiled, made.derives_from, made.precedes) == ("ex", 2000, ("a", "b"), (("x", "y"),))
    assert made.columns == {"title": "Event", "date": "When"} and made.encoding == "iso8859-1"
    assert made.settings.unit == "ka" and made.settings.compiled == 2000 and made.settings.periods is not None
    assert made.settings.given == {"compiled", "unit", "sigma"}
    assert made.text == text


@pytest.mark.parametrize(
    ("text", "said"),
    [
        (
            "[compilaton]\n",
            "unknown table or key [compilaton]; a sheet has the tables compilation, columns, dating; nearest is 'compilation'",
        ),
        ('compilation = "x"\n', "compilation must be a table; write [compilation] on a line of its own"),
        ('[compilation]\nnmae = "x"\n', "unknown key [compilation] nmae; allowed are name, title,"),
        ('[compilation]\nnmae = "x"\n', "nearest is 'name'"),
        (
            '[compilation]\ncompiled = "2000"\n',
            "[compilation] compiled is '2000'; it takes the year in which it was compiled, a whole number",
        ),
        ("[compilation]\ncompiled = true\n", "[compilation] compiled is True"),
        ("[compilation]\ntitle = 5\n", "[compilation] title is 5; it takes"),
        ('[compilation]\nname = "a,b"\n', "[compilation] name is 'a,b'; a name has no comma"),
        ('[compilation]\nname = " "\n', "[compilation] name is ' '; it takes a short name"),
        ('[compilation]\nencoding = "utf-9"\n', "encoding 'utf-9' is not known; name one such as utf-8"),
        ('[compilation]\nencoding = "hex"\n', "encoding 'hex' is not known"),
        ('[compilation]\nfile = "../x.csv"\n', "[compilation] file is '../x.csv'; it takes the name of a file in the folder"),
        ("[compilation]\nderives_from = [1]\n", "derives_from is [1]; it takes the name of the list it was drawn from, or an array"),
        ('[compilation]\nprecedes = ["a", "b"]\n', 'it takes known orders: an array of ["earlier title", "later title"]'),
        ('[columns]\ndat = "x"\n', "unknown key [columns] dat; allowed are title, date,"),
        ('[columns]\ndat = "x"\n', "nearest is 'date'"),
        ('[columns]\ntitle = ""\n', "[columns] title is ''; it takes the header of a column"),
        ('[columns]\ntitle = "A"\ndate = "a"\n', "[columns] date is 'a'; another key names that column already"),
        ('[dating]\ncounts = "ago"\n', "unknown key [dating] counts; allowed are unit,"),
        ('[dating]\ncounts = "ago"\n', "nearest is 'counted'"),
        (
            '[dating]\ncounted = "agoo"\n',
            "[dating] counted is 'agoo'; allowed: \"calendar\" or \"ago\"; correct the value; nearest is 'ago'",
        ),
        ("[dating]\ncompiled = 2000\n", "[dating] compiled; the compile year stands under [compilation]"),
        ("[dating]\nsigma = -1\n", "[dating] sigma is -1; allowed: a number above 0"),
        ('[dating]\nunit = "furlongs"\n', "[dating] unit is 'furlongs'; allowed: a unit or era"),
        ("[dating]\nearliest_limit = 5\nlatest_limit = 1\n", "earliest_limit 5 does not come before latest_limit 1"),
        ('[dating]\nperiods = "none.csv"\n', "[dating] periods:"),
        ("[dating]\nperiods = 5\n", "[dating] periods is 5; it takes the name of a CSV file"),
        ("[dating\n", "no sound TOML"),
        ("x = " + "[" * 5000, "no sound TOML"),
    ],
)
def test_a_mistake_is_one_line_with_file_key_allowed_and_nearest(tmp_path: Path, text: str, said: str) -> None:
    with pytest.raises(SheetRefused) as caught:
        read_sheet(sheet(tmp_path, text), stem="list")
    message = str(caught.value)
    assert said in message and message.startswith(str(tmp_path / "list.toml")) and "\n" not in message


def test_a_sheet_is_utf8(tmp_path: Path) -> None:
    (tmp_path / "list.toml").write_bytes(b'[compilation]\ntitle = "caf\xe9"\n')
    with pytest.raises(SheetRefused, match="a sheet is UTF-8 text"):
        read_sheet(tmp_path / "list.toml", stem="list")


def test_a_year_beside_the_sheet_fills_it_or_contradicts_it(tmp_path: Path) -> None:
    assert read_sheet(sheet(tmp_path, ""), stem="list", compiled=1990).settings.compiled == 1990
    with pytest.raises(SheetRefused, match="compiled is 2000, but --compiled 1990 was given"):
        read_sheet(sheet(tmp_path, "[compilation]\ncompiled = 2000\n"), stem="list", compiled=1990)
    with pytest.raises(WrongUse, match="--compiled"):
        bare_sheet("x", 10**6)


def test_which_sheet_belongs_to_a_list(tmp_path: Path) -> None:
    file = tmp_path / "list.csv.gz"
    assert find_sheet(file) is None
    named = sheet(tmp_path, '[compilation]\nfile = "list.csv.gz"\n', "other.toml")
    sheet(tmp_path, "[broken", "broken.toml")
    assert find_sheet(file) == named
    with pytest.raises(SheetRefused, match="both say file"):
        sheet(tmp_path, '[compilation]\nfile = "list.csv.gz"\n', "third.toml")
        find_sheet(file)
    beside = sheet(tmp_path, "", "list.toml")
    assert find_sheet(file) == beside
    full = sheet(tmp_path, "", "list.csv.gz.toml")
    assert find_sheet(file) == full


def test_a_sheet_beside_another_file_than_it_names_is_refused(tmp_path: Path) -> None:
    (tmp_path / "list.csv").write_text("title,date\na,1\n")
    sheet(tmp_path, '[compilation]\nfile = "other.csv"\n')
    with pytest.raises(SheetRefused, match="file is 'other.csv', but the sheet stands beside list.csv"):
        load(tmp_path / "t.duckdb", [tmp_path / "list.csv"])
    with pytest.raises(SheetRefused, match="there is no such file beside it"):
        load(tmp_path / "t.duckdb", [tmp_path / "list.toml"])


def test_columns_are_matched_without_letter_case(tmp_path: Path) -> None:
    plain = bare_sheet("x", None)
    assert columns_of(("TITLE", "x", " Date"), plain, "f") == {"title": 0, "date": 2}
    mapped = read_sheet(sheet(tmp_path, '[columns]\ntitle = "date"\ndate = "WHEN"\n'), stem="list")
    assert columns_of(("Date", "When", "title"), mapped, "f") == {"title": 0, "date": 1}
    with pytest.raises(SheetRefused, match="date is 'WHEN', but f has the columns 'Date', 'wen'; nearest is 'wen'"):
        columns_of(("Date", "wen"), mapped, "f")
    with pytest.raises(ListRefused, match="no column 'title'; its columns are 'titel', 'date'.*nearest is 'titel'"):
        columns_of(("titel", "date"), plain, "f")
    with pytest.raises(ListRefused, match="2 columns have the header 'note', so note is not clear"):
        columns_of(("title", "date", "note", "Note"), plain, "f")
    assert columns_of(("title", "date", "x", "x", ""), plain, "f") == {"title": 0, "date": 1}


def test_a_proposed_sheet_loads(tmp_path: Path) -> None:
    file = tmp_path / "old events.csv"
    file.write_text("Event name;Age (Ma);Field;x\nFirst shells;540,5;life;1\nSecond shells;320,1;life;2\n", encoding="utf-8")
    text = propose_sheet(file)
    assert 'title = "Event name"' in text and 'date = "Age (Ma)"' in text and 'category = "Field"' in text and 'unit = "Ma"' in text
    assert '# kept as they are, without a meaning: "x"' in text and '\ndecimal = ","' in text
    sheet(tmp_path, text.replace("# compiled =  ", "compiled = 2000  "), "old events.toml")
    (one,) = load(tmp_path / "t.duckdb", [file], link=False)
    assert (one.source, one.rows_loaded) == ("old events", 2)
    with open_for_reading(tmp_path / "t.duckdb") as ledger:
        assert ledger.value("SELECT best FROM entries ORDER BY row") == 2000 - 540.5e6


def test_a_proposal_counts_what_each_choice_reads(tmp_path: Path) -> None:
    file = tmp_path / "x.csv"
    file.write_text("Was,Wann\na,03/04/1848\nb,13/04/1848\nc,1850\n")
    text = propose_sheet(file)
    assert 'title = "Was"' in text and 'date = "Wann"' in text
    assert "#        2  (nothing set)" in text and '#        3  day_order = "dmy"' in text
    assert '\nday_order = "dmy"' in text


def test_a_proposal_names_an_encoding_and_refuses_what_is_no_list(tmp_path: Path) -> None:
    file = tmp_path / "x.csv"
    file.write_bytes("title,date\ncafé,1850\n".encode("cp1252"))
    assert 'encoding = "cp1252"' in propose_sheet(file)
    for bad in (tmp_path, tmp_path / "none.csv"):
        with pytest.raises(ListRefused):
            propose_sheet(bad)
    (tmp_path / 'odd "\n.csv').write_text("a\nb\n")
    assert "needed: no column" in propose_sheet(tmp_path / 'odd "\n.csv')


def test_a_date_to_come_does_not_turn_a_proposal_to_ages(tmp_path: Path) -> None:
    file = tmp_path / "x.csv"
    years = ["1500", "1600 BCE", "c. 1700", *(str(1800 + i) for i in range(8)), "9021"]
    file.write_text("title,date\n" + "".join(f"t{i},{year}\n" for i, year in enumerate(years)))
    text = propose_sheet(file, compiled=2020)
    counted = [line for line in text.splitlines() if line.startswith('#       12  counted = "ago"')]
    assert len(counted) == 1 and counted[0].endswith('; reads "9021" too')
    assert "(nothing set)" in text and "<- proposed" in next(line for line in text.splitlines() if "(nothing set)" in line)
    assert "# more rows read is no proof" in text
    assert not [line for line in text.splitlines() if line.startswith(("counted", "unit"))]


def _choice(words: str, keys: dict[str, str], read: int) -> propose._Choice:
    return propose._Choice(words, keys, read, {})


@pytest.mark.parametrize(
    ("read", "count", "keys", "taken"),
    [
        (90, 100, {"counted": "ago"}, False), (100, 100, {"counted": "ago"}, True), (99, 100, {"counted": "ago"}, True),
        (98, 100, {"decimal": ","}, False), (99, 100, {"decimal": ","}, True),
        (2, 2, {"counted": "ago"}, False), (2, 2, {"day_order": "dmy"}, True), (3, 3, {"counted": "ago"}, True),
    ],
)  # fmt: skip
def test_a_proposal_leaves_the_plain_reading_only_for_clearly_more(read: int, count: int, keys: dict[str, str], taken: bool) -> None:
    plain = _choice("plain", {}, 89 if count == 100 else 1)
    other = _choice("other", keys, read)
    assert propose._chosen([plain, other, _choice("less", {"hundreds": "decade"}, 0)], count) is (other if taken else plain)


def test_the_open_year_of_a_proposal_cannot_be_taken_by_mistake(tmp_path: Path) -> None:
    file = tmp_path / "x.csv"
    file.write_text("title,date\na,12 ka\n")
    text = propose_sheet(file)
    assert "compiled" not in tomllib.loads(text)["compilation"]
    with pytest.raises(tomllib.TOMLDecodeError):
        tomllib.loads(text.replace("# compiled", "compiled"))
