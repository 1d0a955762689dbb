# SPDX-License-Identifier: Apache-2.0
"""The family of notations, the period table, and the words of a reading."""

from __future__ import annotations

import sys
from pathlib import Path

import pytest

import chronos_acc.dating as dating_room
from chronos_acc.dating import NOTATIONS, Dating, Periods, Settings, explain, notations, read, read_periods, shipped_periods, write
from chronos_acc.dating.periods import parse_periods
from chronos_acc.errors import DateRefused, ListRefused


def test_the_tuple_is_the_folder() -> None:
    folder = Path(dating_room.__file__).parent / "notations"
    files = {path.stem for path in folder.glob("*.py")} - {"__init__", "notation"}
    modules = {notation.read.__module__.rpartition(".")[2] for notation in NOTATIONS}
    assert modules == files
    assert len(NOTATIONS) == len(files)
    assert len({notation.name for notation in NOTATIONS}) == len(NOTATIONS)


@pytest.mark.parametrize("notation", NOTATIONS, ids=lambda notation: notation.name)
def test_every_example_is_read_by_its_notation(notation: dating_room.Notation) -> None:
    settings = Settings(compiled=2024, earliest_limit=-1e10, radiocarbon="cal", hundreds="century")
    reading = read(notation.example, settings)
    assert reading.notation == notation.name
    assert notation.name in notations()
    assert notation.question


def test_only_the_standard_library_is_loaded() -> None:
    folder = Path(dating_room.__file__).parent
    for path in folder.rglob("*.py"):
        for line in path.read_text(encoding="utf-8").splitlines():
            if line.startswith(("import ", "from ")):
                name = line.split()[1]
                assert name.startswith(".") or name.partition(".")[0] in sys.stdlib_module_names, (path.name, line)


def test_the_shipped_periods() -> None:
    """Values of the chart of 2024/12 as carried by a published copy of it; every row names version and source."""
    table = shipped_periods()
    assert len(table.rows) > 60
    assert all("v2024/12" in row.source and row.unit == "Ma" for row in table.rows)
    for name, base in (
        ("Quaternary", "2.58"),
        ("Neogene", "23.04"),
        ("Paleogene", "66"),
        ("Cretaceous", "143.1"),
        ("Jurassic", "201.4"),
        ("Triassic", "251.902"),
        ("Permian", "298.9"),
        ("Carboniferous", "358.86"),
        ("Devonian", "419.62"),
        ("Silurian", "443.1"),
        ("Cambrian", "538.8"),
        ("Holocene", "0.0117"),
    ):
        row = table.find(name)
        assert row is not None
        assert row.earliest == base
    chain = [
        "Cambrian",
        "Ordovician",
        "Silurian",
        "Devonian",
        "Carboniferous",
        "Permian",
        "Triassic",
        "Jurassic",
        "Cretaceous",
        "Paleogene",
        "Neogene",
        "Quaternary",
    ]
    rows = [table.find(name) for name in chain]
    assert all(
        first is not None and second is not None and first.latest == second.earliest for first, second in zip(rows, rows[1:], strict=False)
    )
    for row in table.rows:
        reading = read(row.name, Settings(compiled=2024))
        assert reading.notation == "period"
        assert reading.dating.earliest == pytest.approx(2024 - float(row.earliest) * 1e6, rel=1e-12)


def test_a_part_of_a_period_by_the_table_or_by_thirds() -> None:
    compiled = Settings(compiled=2024)
    assert read("Late Cretaceous", compiled).notation == "period"
    late = read("late Ediacaran", compiled)
    assert late.notation == "part"
    assert late.dating.earliest == pytest.approx(2024 - (635e6 - (635e6 - 538.8e6) * 2 / 3), rel=1e-9)
    assert late.defaults == ("parts",)


def test_a_table_of_ones_own(tmp_path: Path) -> None:
    file = tmp_path / "periods.csv"
    file.write_text(
        "name,earliest,latest,unit,source\nIron Age,800,43,BCE,invented for the test\nMIS 5,130,71,ka,invented\nLong Peace,1815,1914,,invented\n3rd dynasty,2686,2613,BCE,invented\n",
        encoding="utf-8",
    )
    settings = Settings(compiled=2024, periods=read_periods(file))
    assert (read("Iron Age", settings).dating.earliest, read("the iron age", settings).dating.latest) == (-799, -41)
    assert read("MIS 5", settings).dating.earliest == 2024 - 130e3
    assert read("Long Peace", settings).dating == read("1815–1914").dating
    assert read("3rd dynasty", settings).dating.earliest == -2685
    assert read("early Iron Age", settings).dating.latest == -799 + round(758 / 3)
    with pytest.raises(DateRefused):
        read("Cretaceous", settings)


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("name,earliest\nx,1\n", "latest, unit, source is missing"),
        ("name,earliest,latest,unit,source\n,1,2,,s\n", "needs a name"),
        ("name,earliest,latest,unit,source\nx,1,2,furlong,s\n", "is not known"),
        ("name,earliest,latest,unit,source\nx,1,2,,s\nX,1,2,,s\n", "stands twice"),
        ("", "is missing"),
    ],
)
def test_tables_that_are_refused(text: str, says: str) -> None:
    with pytest.raises(ListRefused, match=says):
        parse_periods(text, "table.csv")


def test_a_row_that_cannot_be_read() -> None:
    table = Periods(parse_periods("name,earliest,latest,unit,source\nx,5,9,ka,s\ny,soon,later,,s\n", "table.csv").rows, "table.csv")
    for name in ("x", "y"):
        with pytest.raises(DateRefused, match="mend the table"):
            read(name, Settings(compiled=2024, periods=table))
    with pytest.raises(ListRefused, match="no period table could be read"):
        read_periods("no such file.csv")


@pytest.mark.parametrize(
    ("text", "written"),
    [
        ("1985", "1985"),
        ("-500", "-500"),
        ("1961-04-12", "1961-04-12"),
        ("12 April 1961", "1961-04-12"),
        ("-0043-03-15", "-0043-03-15"),
        ("c. 1850", "1840.5 to 1860.5"),
        ("450–400 BCE", "-449.0 to -398.0"),
        ("44 BCE", "-43"),
    ],
)
def test_writing(text: str, written: str) -> None:
    assert write(read(text).dating) == written
    assert read(written).dating == read(text).dating


def test_writing_errors_and_points() -> None:
    normal = read("66.0 +0.3/-0.1 Ma", Settings(compiled=2024)).dating
    assert read(write(normal)).dating == normal
    assert write(Dating(1850.25, 1850.25, 1850.25)) == "1850.25 (95 %: 1850.25 to 1850.25)"
    for year in (1999, 2000, -4, 0):
        for number in (1, 59, 60, 61, 365):
            low, high = year + (number - 1) / (366 if year % 4 == 0 else 365), year + number / (366 if year % 4 == 0 else 365)
            back = read(write(Dating(low, (low + high) / 2, high))).dating
            assert (back.earliest, back.latest) == (low, high)


def test_a_reading_in_words() -> None:
    assert explain(read("c. 1850")) == 'circa: circa (± 10 years): calendar year 1850; rests on the default circa = "digit", digits = 2'
    assert explain(read("1985")) == "year: calendar year 1985"
    assert "closed at 2025 by the compile year" in explain(read("after 1850", Settings(compiled=2024)))


def test_two_readings_are_both_named() -> None:
    with pytest.raises(DateRefused, match="is ambiguous: .*1500–1599.*1500–1509"):
        read("1500s")
    with pytest.raises(DateRefused, match="is ambiguous: .* or "):
        read("1850 ± 10 a", Settings(compiled=2024))
