# SPDX-License-Identifier: Apache-2.0
"""Random texts: nothing but a refusal is ever raised, a text that is read prints back to the same bounds, and short cuts change nothing."""

from __future__ import annotations

import math
import random

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from chronos_acc.dating import NOTATIONS, UNITS, Dating, Settings, plain, read, write
from chronos_acc.dating import reader as reader_module
from chronos_acc.dating.dating import Reading
from chronos_acc.errors import DateRefused

from .test_trade import REFUSED, UNIFORM

QUIET = {"deadline": None, "suppress_health_check": list(HealthCheck), "database": None}
PIECES = [
    *"0123456789",
    "19",
    "1850",
    "44",
    "-0500",
    "12",
    "66.0",
    "1,500",
    "X",
    "XX",
    " ",
    " ",
    " ",
    "-",
    "–",
    "−",
    "/",
    "..",
    ".",
    ",",
    "(",
    ")",
    "[",
    "]",
    "{",
    "}",
    "?",
    "~",
    "%",
    "±",
    "+",
    "+/-",
    "S",
    "Y",
    "E",
    "T",
    "Z",
    "c. ",
    "ca ",
    "about ",
    "probably ",
    "BCE",
    " CE",
    "AD ",
    " BC",
    "Ma",
    " ka",
    " BP",
    " cal BP",
    " b2k",
    " years ago",
    " million",
    "14C ",
    "st",
    "th",
    " century",
    " millennium",
    "early ",
    "late ",
    "mid-",
    "first half of ",
    "s",
    "'s",
    " to ",
    "between ",
    " and ",
    "from ",
    "before ",
    "after ",
    "until ",
    "since ",
    "April",
    " May ",
    "Dec. ",
    "spring ",
    "Jurassic",
    "2σ",
    "(2σ)",
    "×10^",
    "e9",
    "95%",
    " or later",
    "present",
    "\u00a0",
    "\x00",
    "é",
    "٣",
]
TEXTS = [row[0] for row in UNIFORM] + [row[0] for row in REFUSED if row[0].strip()]
SETTINGS = [
    Settings(),
    Settings(compiled=2024, earliest_limit=-1.4e10),
    Settings(compiled=1999, counted="ago", unit="ka", decimal=","),
    Settings(
        compiled=2024,
        calendar="julian",
        day_order="mdy",
        hundreds="century",
        radiocarbon="cal",
        backwards="swap",
        parts="halves",
        seasons="south",
        circa=10.0,
        digits="all",
        reach=100.0,
    ),
]


def check(text: str, how: Settings) -> Reading | None:
    """Reads a text; what comes out must be whole, in order, and print back to the same bounds."""
    try:
        reading = read(text, how)
    except DateRefused as refusal:
        assert str(refusal) and "\n" not in str(refusal) and len(str(refusal)) < 900
        return None
    dating = reading.dating
    assert -math.inf < dating.earliest <= dating.best <= dating.latest < math.inf
    assert reading.words and reading.notation
    if how.compiled is not None:
        assert dating.latest <= how.compiled + 1
    back = read(write(dating)).dating
    assert (back.earliest, back.latest) == (dating.earliest, dating.latest)
    return reading


@settings(max_examples=1500, **QUIET)
@given(st.lists(st.sampled_from(PIECES), min_size=1, max_size=8), st.sampled_from(SETTINGS))
def test_pieces_of_dates(pieces: list[str], how: Settings) -> None:
    check("".join(pieces), how)


def damage_text(text: str, place: int, damage: str, piece: str) -> str:
    place %= max(len(text), 1)
    return {
        "cut": text[:place],
        "drop": text[:place] + text[place + 1 :],
        "double": text[:place] + text[place : place + 1] + text[place:],
        "swap": text[:place] + text[place : place + 2][::-1] + text[place + 2 :],
        "put": text[:place] + piece + text[place:],
        "join": f"{text}–{piece}",
    }[damage]


DAMAGES = ["cut", "drop", "double", "swap", "put", "join"]


@settings(max_examples=1200, **QUIET)
@given(st.sampled_from(TEXTS), st.integers(0, 60), st.sampled_from(DAMAGES), st.sampled_from([*PIECES, *TEXTS]), st.sampled_from(SETTINGS))
def test_damaged_dates(text: str, place: int, damage: str, piece: str, how: Settings) -> None:
    check(damage_text(text, place, damage, piece), how)


def random_text(chance: random.Random) -> str:
    """A text of pieces, or a damaged date of the tables."""
    if chance.random() < 0.5:
        return "".join(chance.choices(PIECES, k=chance.randint(1, 9)))
    text = chance.choice(TEXTS)
    for _ in range(chance.randint(1, 3)):
        text = damage_text(text, chance.randrange(60), chance.choice(DAMAGES), chance.choice(PIECES + TEXTS))
    return text


def test_ten_thousand_more() -> None:
    """As above, in number rather than cleverly chosen; a fair share must be readable, or the test would test nothing."""
    chance = random.Random(1850)
    seen = [check(random_text(chance), chance.choice(SETTINGS)) for _ in range(10_000)]
    assert 1000 < sum(reading is not None for reading in seen) < 9000


@settings(max_examples=700, **QUIET)
@given(st.text(max_size=30))
def test_any_text(text: str) -> None:
    check(text, SETTINGS[1])


@settings(max_examples=600, **QUIET)
@given(st.floats(-1.5e10, 3000), st.floats(0, 1e6), st.floats(0, 1e6), st.sampled_from(["uniform", "normal"]))
def test_any_dating_prints_and_reads_back(best: float, before: float, after: float, shape: str) -> None:
    dating = Dating(best - before, best, best + after, shape)  # type: ignore[arg-type]
    back = read(write(dating)).dating
    assert (back.earliest, back.latest) == (dating.earliest, dating.latest)
    if shape == "normal":
        assert (back.best, back.shape) == (dating.best, shape)


@settings(max_examples=600, **QUIET)
@given(
    st.tuples(
        st.sampled_from(["", "", "+", "-"]), st.integers(0, 10**8), st.sampled_from(["", "", ".0", ".5", ".25", ".500", ".000125"])
    ).map(lambda parts: "".join(map(str, parts))),
    st.sampled_from([None, "Ma", "ka", "Ga", "a", "years ago", "BP", "cal ka BP", "b2k", "BCE", "furlong"]),
    st.sampled_from(
        [
            Settings(),
            Settings(compiled=2024),
            Settings(compiled=1999, counted="ago"),
            Settings(compiled=1999, unit="Ma", digits="all"),
            Settings(digits=1, compiled=2024),
        ]
    ),
)
def test_the_plain_rule_is_what_read_does(number: str, unit: str | None, how: Settings) -> None:
    quick = plain(number, unit, how)
    if quick is None:
        return
    reading = read(number, how, unit=unit)
    assert quick == (reading.dating.earliest, reading.dating.best, reading.dating.latest, reading.notation)
    assert reading.dating.shape == "uniform"
    assert not reading.remarks


def test_the_plain_rule_covers_plain_numbers() -> None:
    how = Settings(compiled=2024)
    for number, unit in (
        ("1985", None),
        ("-500", None),
        ("0", None),
        ("1985.25", None),
        ("66.0", "Ma"),
        ("100", "Ma"),
        ("12000", "BP"),
        ("11.7", "ka b2k"),
    ):
        assert plain(number, unit, how) is not None
    for number, unit in (
        ("-0", None),
        ("19850412", None),
        ("2026", None),
        ("0", "Ma"),
        ("44", "BCE"),
        ("4500", "14C BP"),
        ("1,500", None),
        ("1e9", None),
        ("-66", "Ma"),
        ("66", "furlong"),
    ):
        assert plain(number, unit, how) is None
    assert plain("66", "Ma", Settings()) is None


def test_no_other_notation_reads_a_number_with_a_unit() -> None:
    """The reader asks one notation alone for these; all of them together must agree."""
    how = Settings(compiled=2024, radiocarbon="cal")

    def part(text: str, level: int) -> None:
        return None

    for spelling, unit in UNITS.items():
        if unit.zero not in reader_module._OF_ZERO:
            continue
        for number in ("12", "1850", "1.5", "100"):
            if number == "1.5" and not unit.back:
                continue
            text = f"{number} {spelling}"
            names = []
            for notation in NOTATIONS:
                try:
                    span = notation.read(text, how, part)
                except DateRefused:
                    names.append(notation.name)
                    continue
                if span is not None:
                    names.append(notation.name)
            assert names == [reader_module._OF_ZERO[unit.zero].name], text


def test_marks_never_hide_a_notation() -> None:
    """Asking only the notations whose signs a text has gives what asking all of them would."""
    how = SETTINGS[1]

    def part(text: str, level: int) -> None:
        return None

    for text in TEXTS:
        tidy = reader_module.clean(text)
        for notation in NOTATIONS:
            if notation.marks and notation.marks.isdisjoint(tidy):
                try:
                    span = notation.read(tidy, how, part)
                except DateRefused:
                    span = None
                    raise AssertionError((text, notation.name)) from None
                assert span is None or notation.name == "edtf" and tidy.isdigit(), (text, notation.name)
