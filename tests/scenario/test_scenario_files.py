# SPDX-License-Identifier: Apache-2.0
"""The shipped scenario is what its generator makes, and is as its story says."""

from __future__ import annotations

import csv
import re
import tomllib
from collections import Counter

import make_scenario as made
import pytest


@pytest.fixture(scope="module")
def record() -> list[made.Event]:
    return made.true_record(made.SEED)


@pytest.fixture(scope="module")
def lists() -> dict[str, set[made.Event]]:
    return made.kept(made.SEED)


def test_shipped_files_are_what_the_generator_makes() -> None:
    for name, text in made.files():
        assert (made.FOLDER / name).read_bytes() == text.encode("utf-8"), name


def test_seed_suits_and_the_first_ones_do_not() -> None:
    assert made.suits(made.SEED)
    assert not any(made.suits(seed) for seed in range(1, 4))


def test_story_gives_the_true_counts(record: list[made.Event], lists: dict[str, set[made.Event]]) -> None:
    story = (made.FOLDER / "story.md").read_text(encoding="utf-8")
    counts = Counter(e.kind for e in record)
    names = {"rock": "rock", "river": "river", "ice": "ice", "people": "people", "old works": "old", "machines": "mach"}
    for process, kind in names.items():
        assert re.search(rf"^\| {process} \|.*\| {counts[kind]} \|$", story, re.M), process
    assert f"holds {len(record)} events" in story
    refused = Counter(r[0] for r in made.REFUSED)
    for name, events in lists.items():
        assert f"| `{name}` | {made.COMPILED[name]} | {len(events) + refused[name]} | {refused[name]} |" in story
    named = Counter(e for events in lists.values() for e in events)
    rows = sum(named.values())
    assert f"{rows + len(made.REFUSED)} rows, {rows} of them datable, stand for {len(named)} milestones" in story
    assert f"{sum(v > 1 for v in named.values())} milestones are named by more than one list" in story
    assert 120 <= rows + len(made.REFUSED) <= 160 and 70 <= len(named) <= 90 and 5 <= len(made.REFUSED) <= 8


def test_steady_populations_are_steady_and_the_machines_are_not(record: list[made.Event]) -> None:
    """Laplace's U of the whole truth: what the lists hide. A steady process of this size is inside 2.6 in 99 of 100 seeds."""
    for kind, span in {"rock": 2.0e9, "river": 30e6, "ice": 800e3, "people": 12_000}.items():
        share = [1 - e.age / span for e in record if e.kind == kind]
        assert abs((12 * len(share)) ** 0.5 * (sum(share) / len(share) - 0.5)) < 2.6, kind
    share = [1 - e.age / 300 for e in record if e.kind == "mach"]
    assert (12 * len(share)) ** 0.5 * (sum(share) / len(share) - 0.5) > 4


def test_sheets_name_columns_that_exist() -> None:
    for name in made.HEADERS:
        sheet = tomllib.loads((made.FOLDER / f"{name}.toml").read_text(encoding="utf-8"))
        with (made.FOLDER / f"{name}.csv").open(encoding="utf-8", newline="") as file:
            header = next(csv.reader(file))
        assert sheet["compilation"]["name"] == name and sheet["compilation"]["compiled"] == made.COMPILED[name]
        assert set(sheet["columns"].values()) <= set(header), name


def test_gold_names_every_datable_row_once() -> None:
    with (made.FOLDER / "gold.csv").open(encoding="utf-8", newline="") as file:
        gold = [(row["source"], row["title"]) for row in csv.DictReader(file)]
    assert len(gold) == len(set(gold)) == sum(len(events) for events in made.kept(made.SEED).values())
