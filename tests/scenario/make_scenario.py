# SPDX-License-Identifier: Apache-2.0
"""Makes the lists of datasets/ondrel from a seed: an invented region, its true record, and what four compilers made of it.

    python tests/scenario/make_scenario.py            rewrite the CSV files of datasets/ondrel
    python tests/scenario/make_scenario.py --record   print the true record, with what was listed and by whom

Titles are written by hand (titles.txt); everything that is a number comes from here. Only the standard library's
``random.Random`` is used, one stream a population and one a compiler, seeded by text, so that the files are the same everywhere.
``datasets/ondrel/story.md`` tells the same in words.
"""

from __future__ import annotations

import csv
import io
import math
import random
import sys
from collections.abc import Iterator
from dataclasses import dataclass
from datetime import date, timedelta
from pathlib import Path
from statistics import NormalDist

SEED = 427  # the first whole number for which ``suits`` holds
NOW = 2025.0  # the end of the true record: the last instant of 2024
FOLDER = Path(__file__).resolve().parents[2] / "datasets" / "ondrel"
TITLES = Path(__file__).with_name("titles.txt")
COMPILED = {"survey": 2021, "museum": 2023, "yearbook": 2024, "school": 2022}
LETTER = {"S": "survey", "M": "museum", "Y": "yearbook", "T": "school"}

MUSEUM_HALF_LIFE = 1200.0  # years in which the museum loses half of what it knew
PAGES = 42  # of the school's timeline: equal steps of log age from 8 years to 2 billion


@dataclass(frozen=True)
class Event:
    """One event of the true record: its population, its rank from the present, its age in years before the end of 2024."""

    kind: str
    rank: int
    age: float

    @property
    def name(self) -> str:
        return f"{self.kind}{self.rank}"

    @property
    def year(self) -> float:
        return NOW - self.age


@dataclass(frozen=True)
class Entry:
    """A hand-written line of titles.txt: importance (museum) or level (survey) in ``grade``."""

    event: str
    source: str
    title: str
    form: str
    category: str
    grade: str
    parent: str
    remark: str


# --- the true record -------------------------------------------------------------------------------------------------------------


def stream(seed: int, name: str) -> random.Random:
    return random.Random(f"{seed}/{name}")


def steady(rng: random.Random, span: float, every: float) -> list[float]:
    """Ages of a steady Poisson process over the last ``span`` years, one event every ``every`` years in the mean."""
    ages, age = [], 0.0
    while (age := age - math.log(1 - rng.random()) * every) < span:
        ages.append(age)
    return ages


def growing(rng: random.Random, span: float, doubling: float, rate_now: float) -> list[float]:
    """Ages of a Poisson process whose rate doubles every ``doubling`` years and stands at ``rate_now`` per year today."""
    k = math.log(2) / doubling
    total, ages, count = rate_now * (1 - math.exp(-k * span)) / k, [], 0.0
    while (count := count - math.log(1 - rng.random())) < total:
        ages.append(-math.log(1 - count * k / rate_now) / k)
    return ages


def true_record(seed: int) -> list[Event]:
    """All that happened, listed or not: five steady clocks and one that speeds up."""
    clocks = {
        "rock": steady(stream(seed, "rock"), 2.0e9, 25e6),
        "river": steady(stream(seed, "river"), 30e6, 500e3),
        "ice": steady(stream(seed, "ice"), 800e3, 20e3),
        "people": steady(stream(seed, "people"), 12_000, 50),
        "old": [300 + age for age in steady(stream(seed, "om"), 725, 90)],
        "mach": growing(stream(seed, "m"), 300, 40, 0.42),
    }
    return [Event(kind, i + 1, age) for kind, ages in clocks.items() for i, age in enumerate(sorted(ages))]


# --- what the compilers kept -----------------------------------------------------------------------------------------------------


def kept(seed: int) -> dict[str, set[Event]]:
    """Which events each compiler lists."""
    events = true_record(seed)
    rng = stream(seed, "museum")
    museum = {e for e in events if e.kind == "people" and rng.random() < 2 ** (-e.age / MUSEUM_HALF_LIFE)}
    rng = stream(seed, "survey")
    survey = {e for e in events if rng.random() < _preserved(e, e in museum)}
    rng = stream(seed, "yearbook")
    yearbook = set()
    for e in events:
        u = rng.random()
        if e.kind in ("old", "mach") or (e.kind == "people" and e.age < 1025 and u < (0.8 if e in museum else 0.25)):
            yearbook.add(e)
    school: list[Event] = []
    low, high = math.log10(8), math.log10(2.0e9)
    for page in range(PAGES):
        step = (high - low) / PAGES
        middle = low + step * (page + 0.5)
        near = [e for e in events if e not in school and abs(math.log10(e.age) - middle) < step / 2]
        known = [e for e in near if e in museum | survey | yearbook]
        if near:
            school.append(min(known or near, key=lambda e: abs(math.log10(e.age) - middle)))
    return {"survey": survey, "museum": museum, "yearbook": yearbook, "school": set(school)}


def _preserved(e: Event, dug: bool) -> float:
    """Chance that an event left a bed that the survey found: rock, gravel and till are lost with age; mud is cored where the museum dug."""
    if e.kind == "people":
        return 0.0 if e.age <= 400 else 0.3 if dug else 0.01
    lasting = {"rock": 50e6, "river": 0.5e6, "ice": 30e3}
    return 1 / (1 + e.age / lasting[e.kind]) if e.kind in lasting else 0.0


def suits(seed: int) -> bool:
    """The seed gives lists of the size wanted, reaching from about two billion years ago to 2024. Nothing else was asked of it."""
    lists = kept(seed)
    rows, distinct = sum(map(len, lists.values())), len(set().union(*lists.values()))
    return (
        128 <= rows <= 150
        and 76 <= distinct <= 90
        and 28 <= len(lists["museum"]) <= 36
        and max(e.age for e in lists["survey"]) > 1.7e9
        and min(e.age for e in lists["yearbook"]) < 1.5
        and sum(e.age < 300 for e in lists["yearbook"]) >= 24
    )


# --- how they wrote it down ------------------------------------------------------------------------------------------------------

ERROR = {"rock": 0.005, "river": 0.02, "ice": 0.03, "people": 0.025}  # the survey's standard error as a share of age
WORDS = ("about", "around", "roughly", "approximately")


def write_survey(e: Event, entry: Entry, rng: random.Random) -> list[str]:
    """Age, unit and two-sigma error; one determination in eight is an old one, three times as far off as it says."""
    age = e.age - (NOW - COMPILED["survey"])
    sd = ERROR[e.kind] * age
    age += _normal(rng) * sd * (3 if rng.random() < 1 / 8 else 1)
    scale, digits = {"Ma": (1e6, 1 if e.kind == "rock" else 2), "ka": (1e3, 1), "a": (1.0, -1)}[entry.form]
    error = max(round(2 * sd / scale, digits), 10.0**-digits)
    show = (lambda x: f"{round(x / 10) * 10:d}") if digits < 0 else (lambda x: f"{x:.{digits}f}")
    return [entry.title, show(age / scale), entry.form, show(error), entry.category, entry.grade, entry.parent]


def write_museum(e: Event, entry: Entry, rng: random.Random) -> list[str]:
    """Eras, circa, centuries, ranges and calibrated ages, about one per cent off; a year is right or a year or two off."""
    z, u = _normal(rng), rng.random()
    if entry.form == "year":
        return _museum_row(entry, _era(math.floor(e.year) + (round(1.5 * z) if u < 0.4 else 0)))
    year = e.year + z * 0.012 * e.age
    if entry.form == "c":
        step = 100 if e.age > 2500 else 10
        return _museum_row(entry, "c. " + _era(round(year / step) * step + (1 if year < 0 else 0)))
    if entry.form == "range":
        early, late = (round(y / 50) * 50 for y in (year - 0.02 * e.age, year + 0.02 * e.age))
        return _museum_row(entry, f"{-early}–{-late} BCE" if late < 0 else f"{early}–{late} CE")
    if entry.form == "cal BP":
        return _museum_row(entry, f"{round((1950 - year) / 10) * 10} ± 60 cal BP")
    if entry.form == "century":
        number = math.floor((year - 1) / 100) + 1 if year >= 1 else math.floor(-year / 100) + 1
        return _museum_row(entry, f"{_ordinal(number)} century {'CE' if year >= 1 else 'BCE'}")
    raise ValueError(entry.form)


def write_yearbook(e: Event, entry: Entry, rng: random.Random) -> list[str]:
    """ISO 8601-2 dates, right as far as they go: day and month from the archive, older ones to the year, the span or the decade."""
    year = math.floor(e.year)
    day = date(year, 1, 1) + timedelta(days=int((e.year - year) * (366 if year % 4 == 0 else 365)))
    text = {
        "day": day.isoformat(),
        "month": day.isoformat()[:7],
        "year": f"{year}",
        "around": f"{round(year / 5) * 5}~",
        "perhaps": f"{year}?",
        "interval": f"{year - rng.randrange(1, 4)}/{year + rng.randrange(1, 4)}",
        "digit": f"{year // 10}X",
    }[entry.form]
    return [entry.title, text, entry.category, str(rng.randrange(3, 212))]


def write_school(e: Event, entry: Entry, rng: random.Random) -> list[str]:
    """Years ago to two digits, about three per cent off, or a year or decade as people say it."""
    z, word = _normal(rng), WORDS[rng.randrange(len(WORDS))]
    if entry.form == "plain":
        return [entry.title, f"{math.floor(e.year)}", entry.category]
    if entry.form == "decade":
        return [entry.title, f"{math.floor(e.year) // 10 * 10}s", entry.category]
    if entry.form == "around":
        return [entry.title, f"around {round(e.year / 10) * 10}", entry.category]
    age = (e.age - (NOW - COMPILED["school"])) * (1 + 0.03 * z)
    places = 1 - math.floor(math.log10(age))
    age = round(age, places)
    for name, size in (("billion", 1e9), ("million", 1e6)):
        if age >= size:
            return [entry.title, f"{word} {age / size:g} {name} years ago", entry.category]
    return [entry.title, f"{word} {age:,.0f} years ago", entry.category]


def _museum_row(entry: Entry, when: str) -> list[str]:
    return [entry.title, when, entry.category, entry.grade, entry.remark]


def _era(year: int) -> str:
    """An astronomical year as a museum writes it."""
    return f"{year} CE" if year >= 1 else f"{1 - year} BCE"


def _ordinal(n: int) -> str:
    return f"{n}{'th' if 10 <= n % 100 <= 20 else {1: 'st', 2: 'nd', 3: 'rd'}.get(n % 10, 'th')}"


def _normal(rng: random.Random) -> float:
    return NormalDist().inv_cdf(min(max(rng.random(), 1e-12), 1 - 1e-12))


# --- the files -------------------------------------------------------------------------------------------------------------------

HEADERS = {
    "survey": ["Event", "Age", "Unit", "Error", "Archive", "Rank", "Part of"],
    "museum": ["Object or event", "When", "Hall", "Stars", "Remark"],
    "yearbook": ["Work", "Date", "Branch", "Page"],
    "school": ["What happened", "When", "Theme"],
}
# rows that no honest reader can date, each for another reason: (list, row it stands at, its cells, a word of the reason)
REFUSED = [
    ("survey", 17, ["Drowned forest of Harnoy", "", "ka", "", "soil", "episode", ""], "no date"),
    ("museum", 6, ["Bronze mirrors of the hill tombs", "300–450 BCE", "craft", "2", ""], "out of order"),
    ("museum", 20, ["Oath stone of Brayle broken", "03/04/1712", "word", "1", "donor's label"], "two readings"),
    ("yearbook", 3, ["Slate road of the Uldren", "../1205", "travel", "11"], "open start"),
    ("yearbook", 21, ["Second bridge at Tolm", "1911-02-30", "building", "88"], "no such day"),
    ("yearbook", 45, ["Rail tunnel under the Grey Sound", "2031", "travel", "212"], "after the list was compiled"),
    ("school", 26, ["Grandmothers begin to tell of the flood", "once upon a time", "word"], "not a date"),
    ("school", 34, ["", "around 1790", "craft"], "no title"),
]
WRITERS = {"survey": write_survey, "museum": write_museum, "yearbook": write_yearbook, "school": write_school}


def entries() -> list[Entry]:
    """The hand-written titles."""
    lines = [line for line in TITLES.read_text(encoding="utf-8").splitlines() if line and not line.startswith("#")]
    cells = [[cell.strip() for cell in line.split("|")] for line in lines]
    return [Entry(c[0], LETTER[c[1]], *c[2:]) for c in cells]


def files(seed: int = SEED) -> Iterator[tuple[str, str]]:
    """Name and text of every generated file: the four lists, and the gold answer to which entries are the same milestone."""
    lists, written = kept(seed), entries()
    missing = {(s, e.name) for s, events in lists.items() for e in events} ^ {(w.source, w.event) for w in written}
    if missing:
        raise ValueError(f"titles.txt and the record differ at {sorted(missing)}")
    gold = []
    for source, header in HEADERS.items():
        by_name = {e.name: e for e in lists[source]}
        mine = [w for w in written if w.source == source]
        rows = [WRITERS[source](by_name[w.event], w, stream(seed, f"{source}/{w.event}")) for w in mine]
        gold += [[source, w.title, w.event] for w in mine]
        for _, place, cells, _ in (r for r in REFUSED if r[0] == source):
            rows.insert(place - 1, cells)
        yield f"{source}.csv", _csv([header, *rows])
    yield "gold.csv", _csv([["source", "title", "milestone"], *gold])


def _csv(rows: list[list[str]]) -> str:
    out = io.StringIO()
    csv.writer(out, lineterminator="\n").writerows(rows)
    return out.getvalue()


def main() -> None:
    if "--record" in sys.argv:
        lists = kept(SEED)
        for e in sorted(true_record(SEED), key=lambda e: -e.age):
            print(f"{e.name},{e.age:.6g},{e.year:.2f}," + " ".join(name for name, events in lists.items() if e in events))
        return
    FOLDER.mkdir(parents=True, exist_ok=True)
    for name, text in files():
        (FOLDER / name).write_text(text, encoding="utf-8", newline="")


if __name__ == "__main__":
    main()
