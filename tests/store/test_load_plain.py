# SPDX-License-Identifier: Apache-2.0
"""Plain numbers are read by the database exactly as the reader of texts reads them, and rows keep their places."""

from __future__ import annotations

import random
from collections.abc import Iterator
from typing import Any

import duckdb
import pytest

from chronos_acc.dating import read_row, settings_from
from chronos_acc.dating.plain import plain
from chronos_acc.errors import DateRefused
from chronos_acc.store.ledger import Ledger
from chronos_acc.store.plain import NAMES, plain_sql

UNITS = ["", "Ma", "ka", "a", "Ga", "BP", "ka BP", "cal yr BP", "b2k", "BCE", "CE", "M.a.", "years ago", "14C BP", "furlongs", "MA"]


@pytest.fixture(scope="module")
def ledger() -> Iterator[Ledger]:
    """A database in memory."""
    from pathlib import Path

    with duckdb.connect(config={"python_enable_replacements": "false"}) as connection:
        yield Ledger(connection, Path("memory"), writable=True)


def numbers(seed: int, count: int) -> list[str]:
    """Numbers of all kinds, and some texts that only look like numbers."""
    rng = random.Random(seed)
    made = [
        "0",
        "-0",
        "+0",
        "00",
        "-0.0",
        "0.0",
        "007",
        "1850",
        "+1850",
        "-500",
        "1e3",
        "1_000",
        "1,000",
        ".5",
        "5.",
        "nan",
        "inf",
        "",
        " 5",
        "1850.",
        "-.5",
    ]
    made += [
        "20240506",
        "12345678",
        "9999999",
        "1.",
        "--5",
        "5-",
        "1850.50",
        "66.040",
        "1200",
        "12000",
        "10",
        "100",
        "1000000",
        "4600",
        "0.10",
        "0100",
        "1.0000000001",
    ]
    made += ["999999999999", "9999999999999", "999999999999.123456789", "2019", "2020", "2020.5", "2021", "2020.95", "2020.99", "٣", "²"]
    while len(made) < count:
        digits = rng.randint(1, 9)
        whole = rng.randint(0, 10**digits - 1)
        text = str(whole - whole % 10 ** rng.randint(0, digits)) if rng.random() < 0.3 else str(whole)
        if rng.random() < 0.4:
            text += "." + "".join(rng.choice("0123456789") for _ in range(rng.randint(1, 10)))
        made.append(rng.choice(["", "", "", "-", "+"]) + text)
    return made


@pytest.mark.parametrize(
    "given",
    [
        {},
        {"compiled": 2020},
        {"compiled": 2020, "counted": "ago"},
        {"compiled": 2020, "unit": "Ma"},
        {"unit": "ka"},
        {"unit": "BP"},
        {"unit": "b2k", "digits": 3},
        {"compiled": 1999, "unit": "ka", "digits": "all"},
        {"unit": "BCE"},
        {"compiled": 2020, "decimal": ","},
    ],
    ids=str,
)
@pytest.mark.parametrize("with_units", [False, True], ids=["list", "column"])
def test_the_database_reads_plain_numbers_as_the_reader_does(ledger: Ledger, given: dict[str, Any], with_units: bool) -> None:
    settings = settings_from(given)
    rng = random.Random(5)
    dates = numbers(11, 700)
    units = [rng.choice(UNITS) or None for _ in dates] if with_units else [None] * len(dates)
    ledger.run("CREATE OR REPLACE TEMP TABLE cells (place INTEGER, date VARCHAR, unit VARCHAR)")
    ledger.insert("cells", {"place": list(range(len(dates))), "date": dates, "unit": units})
    keys = ("date", "unit") if with_units else ("date",)
    ledger.run(f"CREATE OR REPLACE TEMP TABLE made AS {plain_sql(ledger, settings, keys, 'cells')}")
    found = ledger.rows("SELECT place, date, unit, p_best, p_half, p_kind FROM made ORDER BY rowid")
    assert [row[0] for row in found] == list(range(len(dates)))
    covered = 0
    for _, date, unit, best, half, kind in found:
        expected = plain(date, unit if with_units else None, settings)
        if kind is None:
            assert expected is None, (date, unit, expected)
            continue
        covered += 1
        assert expected == (best - half, best, best + half, NAMES[kind]), (date, unit)
        reading = read_row(date, unit=unit if with_units else None, settings=settings)
        dating = reading.dating
        assert (dating.earliest, dating.best, dating.latest, dating.shape, reading.notation) == (
            best - half,
            best,
            best + half,
            "uniform",
            NAMES[kind],
        )
        assert reading.remarks == () and set(reading.defaults) <= {"digits"}
        rounded = kind > 1 and date.endswith("0") and "." not in date and "digits" not in given
        assert ("digits" in reading.defaults) == rounded
    nothing = given.get("decimal") == "," or (given.get("unit") in ("BCE", "ka") and "compiled" not in given and not with_units)
    assert covered == 0 if nothing else covered > 30


def test_a_row_with_more_than_its_number_is_left_to_the_reader(ledger: Ledger) -> None:
    ledger.run("CREATE OR REPLACE TEMP TABLE cells AS SELECT '1850' AS date, unnest(['5', NULL]) AS plus_minus")
    rows = ledger.rows(
        f"SELECT plus_minus, p_kind FROM ({plain_sql(ledger, settings_from({}), ('date', 'plus_minus'), 'cells')}) ORDER BY plus_minus"
    )
    assert rows == [("5", None), (None, 1)]


def test_what_the_reader_refuses_the_database_does_not_take(ledger: Ledger) -> None:
    settings = settings_from({"compiled": 2020, "unit": "Ma"})
    ledger.run("CREATE OR REPLACE TEMP TABLE cells (date VARCHAR)")
    ledger.insert("cells", {"date": numbers(3, 2000)})
    for date, _, _, kind in ledger.rows(plain_sql(ledger, settings, ("date",), "cells")):
        try:
            read_row(date, settings=settings)
        except DateRefused:
            assert kind is None, date


@pytest.mark.parametrize("end", ["\n", "\r\n"])
def test_plain_files_are_read_by_the_database_whatever_their_line_ends(tmp_path, monkeypatch, end):
    from chronos_acc.store import rows
    from chronos_acc.store.load import load

    def never(*args, **kwargs):
        raise AssertionError("read line by line")

    monkeypatch.setattr(rows, "_line_by_line", never)
    path = tmp_path / "a.csv"
    path.write_bytes(("title,date" + end + end.join(f"thing {i},{1000 + i}" for i in range(50)) + end).encode())
    (done,) = load(tmp_path / "t.duckdb", [path], compiled=2020, link=False)
    assert (done.rows_loaded, done.rows_rejected) == (50, 0)
