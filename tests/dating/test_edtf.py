# SPDX-License-Identifier: Apache-2.0
"""EDTF / ISO 8601-2:2019, levels 0 to 2. Source of rows and rules: Library of Congress specification of 4 February 2019 (loc.gov/standards/datetime).

Bounds are the widest readings without padding for ? ~ %; seasons are Northern by convention; 2001-24 runs over the new year.
"""

from __future__ import annotations

import re
from math import inf

import pytest

from chronos_acc.dating import Settings, read
from chronos_acc.dating.calendar import day_bounds
from chronos_acc.dating.edtf import edtf
from chronos_acc.errors import DateRefused

TABLE = [  # text, level, first day, last day
    ("1985-04-12", 0, "1985-04-12", "1985-04-12"),
    ("1985-04", 0, "1985-04-01", "1985-04-30"),
    ("1985", 0, "1985-01-01", "1985-12-31"),
    ("0000", 0, "0000-01-01", "0000-12-31"),
    ("0000-02-29", 0, "0000-02-29", "0000-02-29"),
    ("1985-04-12T23:20:30Z", 0, "1985-04-12", "1985-04-12"),
    ("1964/2008", 0, "1964-01-01", "2008-12-31"),
    ("2004-06/2006-08", 0, "2004-06-01", "2006-08-31"),
    ("2004-02-01/2005-02-08", 0, "2004-02-01", "2005-02-08"),
    ("2004-02-01/2005-02", 0, "2004-02-01", "2005-02-28"),
    ("2004-02-01/2005", 0, "2004-02-01", "2005-12-31"),
    ("2005/2006-02", 0, "2005-01-01", "2006-02-28"),
    ("Y170000002", 1, "170000002-01-01", "170000002-12-31"),
    ("Y-170000002", 1, "-170000002-01-01", "-170000002-12-31"),
    ("Y-13800000000", 1, "-13800000000-01-01", "-13800000000-12-31"),
    ("2001-21", 1, "2001-03-01", "2001-05-31"),
    ("2001-22", 1, "2001-06-01", "2001-08-31"),
    ("2001-23", 1, "2001-09-01", "2001-11-30"),
    ("2001-24", 1, "2001-12-01", "2002-02-28"),
    ("1984?", 1, "1984-01-01", "1984-12-31"),
    ("1984~", 1, "1984-01-01", "1984-12-31"),
    ("1984%", 1, "1984-01-01", "1984-12-31"),
    ("2004-06~", 1, "2004-06-01", "2004-06-30"),
    ("2004-06-11%", 1, "2004-06-11", "2004-06-11"),
    ("201X", 1, "2010-01-01", "2019-12-31"),
    ("20XX", 1, "2000-01-01", "2099-12-31"),
    ("19XX", 1, "1900-01-01", "1999-12-31"),
    ("2004-XX", 1, "2004-01-01", "2004-12-31"),
    ("1985-04-XX", 1, "1985-04-01", "1985-04-30"),
    ("1985-XX-XX", 1, "1985-01-01", "1985-12-31"),
    ("1985-04-12/..", 1, "1985-04-12", "+inf"),
    ("1985/..", 1, "1985-01-01", "+inf"),
    ("../1985", 1, "-inf", "1985-12-31"),
    ("../1985-04", 1, "-inf", "1985-04-30"),
    ("1985/", 1, "1985-01-01", "unknown"),
    ("/1985", 1, "unknown", "1985-12-31"),
    ("-1985", 1, "-1985-01-01", "-1985-12-31"),
    ("-0044", 1, "-0044-01-01", "-0044-12-31"),
    ("-0001", 1, "-0001-01-01", "-0001-12-31"),
    ("1984~/2004-06", 1, "1984-01-01", "2004-06-30"),
    ("Y-17E7", 2, "-170000000-01-01", "-170000000-12-31"),
    ("Y17E7", 2, "170000000-01-01", "170000000-12-31"),
    ("Y-138E8", 2, "-13800000000-01-01", "-13800000000-12-31"),
    ("1950S2", 2, "1900-01-01", "1999-12-31"),
    ("Y171010000S3", 2, "171000000-01-01", "171999999-12-31"),
    ("Y3388E2S3", 2, "338000-01-01", "338999-12-31"),
    ("2001-34", 2, "2001-04-01", "2001-06-30"),
    ("2001-29", 2, "2001-09-01", "2001-11-30"),
    ("2001-33", 2, "2001-01-01", "2001-03-31"),
    ("2001-40", 2, "2001-01-01", "2001-06-30"),
    ("[1667,1668]", 2, "1667-01-01", "1668-12-31"),
    ("[1667,1668,1670..1672]", 2, "1667-01-01", "1672-12-31"),
    ("[..1760-12-03]", 2, "-inf", "1760-12-03"),
    ("[1760-12..]", 2, "1760-12-01", "+inf"),
    ("[1667,1760-12]", 2, "1667-01-01", "1760-12-31"),
    ("[..1984]", 2, "-inf", "1984-12-31"),
    ("{1667..1672}", 2, "1667-01-01", "1672-12-31"),
    ("{1960,1961-12}", 2, "1960-01-01", "1961-12-31"),
    ("{..1984}", 2, "-inf", "1984-12-31"),
    ("2004-06~-11", 2, "2004-06-11", "2004-06-11"),
    ("2004?-06-11", 2, "2004-06-11", "2004-06-11"),
    ("?2004-06-~11", 2, "2004-06-11", "2004-06-11"),
    ("156X-12-25", 2, "1560-12-25", "1569-12-25"),
    ("15XX-12-25", 2, "1500-12-25", "1599-12-25"),
    ("XXXX-12-XX", 2, "0000-12-01", "9999-12-31"),
    ("1XXX-XX", 2, "1000-01-01", "1999-12-31"),
    ("1XXX-12", 2, "1000-12-01", "1999-12-31"),
    ("1XXX", 2, "1000-01-01", "1999-12-31"),
    ("1984-1X", 2, "1984-10-01", "1984-12-31"),
    ("196X-02-29", 2, "1960-02-29", "1968-02-29"),
    ("2004-06-~01/2004-06-~20", 2, "2004-06-01", "2004-06-20"),
    ("2004-06-XX/2004-07-03", 2, "2004-06-01", "2004-07-03"),
]
# Rejected by the rules of the specification, and by the list of bad examples in the tests of python-edtf 5.0.2
REJECTED = [
    "", "not a date", "85", "1985-13", "1985-00", "1985-02-30", "1985-04-31", "1900-02-29", "-0003-02-29", "1985-4-12", "19850412", "12345", "Y1985", "y17e7",
    "Y17E7-12-26", "198u", "1984?~", "2004-06-(11)~", "1985-04-12/open", "unknown/2006", "1667..1672", "{1667, 1668}", "[1667,1668}", "2001-42", "2001-20",
    "-0000", "-0000-01-01", "2016-02-39", "1985//1986", "1985/1986/1987", "2004-06-11T25:00:00", "1950S", "1950S0", "c.1985", "1985-1985", "2008/1964",
    "../..", "/", "../", "[]", "{}", "[1667,,1668]", "[1667..,1668]", "Y17E", "Y012345", "1950S5", "1985-04-12T23:20", "~1985", "1985~~", "XXXX-02-30", "2001-2X-01",
]
READ_ELSEWHERE = {"85", "12345", "c.1985", "~1985", "1985-04-12T23:20"}


def bound(day: str, end: bool) -> float:
    """A day of the table as a decimal year: its start, or its end."""
    if day in ("+inf", "-inf", "unknown"):
        return inf if end else -inf
    found = re.fullmatch(r"(-?\d+)-(\d\d)-(\d\d)", day)
    assert found is not None
    return day_bounds(int(found[1]), int(found[2]), int(found[3]))[1 if end else 0]


@pytest.mark.parametrize(("text", "level", "first", "last"), TABLE)
def test_specification_examples(text: str, level: int, first: str, last: str) -> None:
    found = edtf(text)
    assert found is not None
    assert (found.earliest, found.latest) == (bound(first, False), bound(last, True))


@pytest.mark.parametrize(("text", "level", "first", "last"), TABLE)
def test_examples_through_read(text: str, level: int, first: str, last: str) -> None:
    settings = Settings(earliest_limit=-2e10, latest_limit=3e8)
    dating = read(text, settings).dating
    assert dating.earliest == (-2e10 if first in ("-inf", "unknown") else bound(first, False))
    assert dating.latest == (3e8 if last in ("+inf", "unknown") else bound(last, True))
    assert dating.shape == "uniform"
    assert dating.best == pytest.approx((dating.earliest + dating.latest) / 2, rel=1e-15)


@pytest.mark.parametrize("text", REJECTED)
def test_rejected(text: str) -> None:
    assert edtf(text) is None if text else True
    if text in READ_ELSEWHERE:
        read(text)
    else:
        with pytest.raises(DateRefused):
            read(text)


def test_open_and_unknown_ends_are_told_apart() -> None:
    settings = Settings(compiled=2000)
    assert "an open end" in read("1985/..", settings).words
    assert "an unknown end" in read("1985/", settings).words
    with pytest.raises(DateRefused, match="no early end; set earliest_limit"):
        read("../1985", settings)
    with pytest.raises(DateRefused, match="no late end; give the compile year"):
        read("1985/..")


@pytest.mark.parametrize(
    ("text", "first", "last"),
    [
        ("2004-02-29", "2004-02-29", "2004-02-29"), ("-0004-02-29", "-4-02-29", "-4-02-29"), ("1985-04-12T23:20:30-04", "1985-04-12", "1985-04-12"),
        ("1985-04-12T23:20:30+04:30", "1985-04-12", "1985-04-12"), ("-1XXX", "-1999-01-01", "-1000-12-31"), ("-0XXX", "-999-01-01", "-1-12-31"), ("-1XXX-02-29", "-1996-02-29", "-1004-02-29"),
        ("1X01-02", "1001-02-01", "1901-02-28"), ("1985-XX-31", "1985-01-31", "1985-12-31"), ("1985-X2-29", "1985-12-29", "1985-12-29"),
        ("Y-171010000S3", "-171999999-01-01", "-171000000-12-31"), ("2001-21/2002-23", "2001-03-01", "2002-11-30"), ("[1760-12-01..1760-12-24,1761]", "1760-12-01", "1761-12-31"),
        ("2001-25", "2001-03-01", "2001-05-31"), ("2001-30", "2001-12-01", "2002-02-28"), ("2001-37", "2001-01-01", "2001-04-30"), ("2001-41", "2001-07-01", "2001-12-31"),
        ("2004-06/2004", "2004-06-01", "2004-12-31"), ("%2004-06-11", "2004-06-11", "2004-06-11"), ("2011-23~", "2011-09-01", "2011-11-30"), ("Y170000002?", "170000002-01-01", "170000002-12-31"),
    ],
)
def test_more_by_the_same_rules(text: str, first: str, last: str) -> None:
    found = edtf(text)
    assert found is not None
    assert (found.earliest, found.latest) == (bound(first, False), bound(last, True))


def test_seasons_follow_the_hemisphere_of_the_list() -> None:
    assert read("2001-21", Settings(seasons="south")).dating.earliest == day_bounds(2001, 9, 1)[0]
    assert read("2001-21").defaults == ("seasons",)
    assert read("2001-25", Settings(seasons="south")) == read("2001-25")


KNOWN_DIFFERENCES = {  # what python-edtf 5.0.2 makes of rows of the table, where it and the table part
    "2001-24": "winter is cut at 31 December",
    "1985/": "ten years are made up for an unknown end",
    "/1985": "ten years are made up for an unknown end",
    "1950S2": "only its fuzzy bounds agree",
    "Y171010000S3": "only its fuzzy bounds agree",
    "Y3388E2S3": "only its fuzzy bounds agree",
    "1984-1X": "raises ValueError",
    "196X-02-29": "the last day is 1969-02-29, which does not exist",
}


def test_the_edtf_package_as_a_second_opinion() -> None:
    """Strict bounds of the same rows by another implementation; where they differ is listed and asserted to differ."""
    import edtf as package

    differing = set()
    for text, _, first, last in TABLE:
        try:
            parsed = package.parse_edtf(text)
            days = [edge if isinstance(edge, float) else (edge.tm_year, edge.tm_mon, edge.tm_mday) for edge in (parsed.lower_strict(), parsed.upper_strict())]
        except Exception:  # the package raises errors of many kinds
            differing.add(text)
            continue
        ours = edtf(text)
        assert ours is not None
        theirs = [day if isinstance(day, float) else _edge(day, place) for place, day in enumerate(days)]
        if theirs != [ours.earliest, ours.latest]:
            differing.add(text)
    assert differing == set(KNOWN_DIFFERENCES)


def _edge(day: tuple[int, int, int], place: int) -> float:
    try:
        return day_bounds(*day)[place]
    except (IndexError, ValueError):
        return float("nan")
