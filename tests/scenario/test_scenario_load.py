# SPDX-License-Identifier: Apache-2.0
"""The scenario through the tool: every row read or refused for the reason intended, linked well against gold, judged as its story says."""

from __future__ import annotations

import csv
from pathlib import Path

import make_scenario as made
import numpy as np
import pytest

from chronos_acc.dating import Settings, read_row
from chronos_acc.store import timeline
from chronos_acc.store.gold import check_gold
from chronos_acc.store.load import Loaded, load
from chronos_acc.trend.forgetting import tipping
from chronos_acc.trend.rate_laws import growth_interval

LISTS = tuple(made.HEADERS)
# words of the refusal, by the word of the reason that the generator gives
SAID = {
    "no date": "no date",
    "out of order": "backwards",
    "two readings": "ambiguous",
    "open start": "earliest_limit",
    "no such day": "1911-02-30",
    "after the list was compiled": "after the end of 2024",
    "not a date": "read by no notation",
    "no title": "no title",
}


@pytest.fixture(scope="module")
def db(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("ondrel") / "ondrel.duckdb"


@pytest.fixture(scope="module")
def loaded(db: Path) -> list[Loaded]:
    return load(db, [made.FOLDER / f"{name}.csv" for name in LISTS])


def _rows(source: str) -> list[list[str]]:
    with (made.FOLDER / f"{source}.csv").open(encoding="utf-8", newline="") as file:
        return list(csv.reader(file))


def test_counts_are_those_of_the_story(loaded: list[Loaded]) -> None:
    refused = {name: sum(r[0] == name for r in made.REFUSED) for name in LISTS}
    assert [(r.source, r.rows_read, r.rows_rejected) for r in loaded] == [(n, len(_rows(n)) - 1, refused[n]) for n in LISTS]
    assert all(r.rows_loaded + r.rows_rejected == r.rows_read for r in loaded)


def test_each_refused_row_is_refused_for_its_own_reason(db: Path, loaded: list[Loaded]) -> None:
    rejects = timeline.table(db, "rejects")
    assert len(rejects) == len(made.REFUSED)
    for source, place, cells, why in made.REFUSED:
        row = rejects[(rejects["source"] == source) & (rejects["row"] == place + 1)]  # the header is row 1
        assert len(row) == 1, (source, place, cells)
        assert SAID[why] in row["reason"].iloc[0], (why, row["reason"].iloc[0])
        assert (cells[0] or cells[1]) in row["raw"].iloc[0]


def test_entries_hold_the_truth_within_what_the_compiler_could_be_off(db: Path, loaded: list[Loaded]) -> None:
    """Bounds contain the true date in most cases, and no best date is off by more than a fifth of its age or ten years."""
    entries = timeline.table(db, "entries")
    year_of = {e.name: e.year for e in made.true_record(made.SEED)}
    truth = {(w.source, w.title): year_of[w.event] for w in made.entries()}
    assert len(entries) == len(truth)
    inside = 0
    for row in entries.itertuples():
        year = truth[(row.source, row.title)]
        assert abs(row.best - year) < max(10.0, 0.2 * (2025 - year)), (row.title, row.best, year)
        inside += row.earliest <= year <= row.latest
    assert inside / len(truth) > 0.6


def test_survey_errors_are_two_sigma(db: Path, loaded: list[Loaded]) -> None:
    entries = timeline.table(db, "entries")
    row = entries[entries["title"] == "Ommer dyke swarm"].iloc[0]
    cells = next(r for r in _rows("survey") if r[0] == "Ommer dyke swarm")
    assert row["shape"] == "normal"
    assert row["latest"] - row["earliest"] == pytest.approx(2 * 1.959963985 * float(cells[3]) * 1e6 / 2, rel=1e-6)
    assert row["best"] == pytest.approx(2021 - float(cells[1]) * 1e6, abs=1)


def test_one_row_read_alone_reads_the_same(db: Path, loaded: list[Loaded]) -> None:
    settings = Settings(compiled=2021, counted="ago", sigma=2.0)
    row = timeline.table(db, "entries").set_index("title").loc["Rifting of the Grey Sound"]
    cells = next(r for r in _rows("survey") if r[0] == "Rifting of the Grey Sound")
    dating = read_row(cells[1], unit=cells[2], plus_minus=cells[3], settings=settings).dating
    assert (row["earliest"], row["best"], row["latest"]) == (dating.earliest, dating.best, dating.latest)


def test_linking_meets_the_targets_against_gold(db: Path, loaded: list[Loaded]) -> None:
    check = check_gold(db, made.FOLDER / "gold.csv")
    assert check.precision >= 0.97, check
    assert check.recall >= 0.90, check


def test_museum_alone_looks_like_acceleration_and_its_tipping_point_is_the_true_half_life(db: Path, loaded: list[Loaded]) -> None:
    window = timeline.record(db, sources=["museum"]).window
    growth, low, *_ = growth_interval(window)
    assert growth is not None and low is not None and low > 0
    form = tipping(window, seed=1, replicates=199).form("exponential")
    assert form.suffices
    assert form.low is not None and form.low < made.MUSEUM_HALF_LIFE < (form.high or np.inf)


def test_yearbook_speeds_up_in_the_last_three_centuries(db: Path, loaded: list[Loaded]) -> None:
    window = timeline.record(db, sources=["yearbook"], start=1725.0).window
    growth, low, high, *_ = growth_interval(window)
    assert growth is not None and low is not None and high is not None
    assert low < np.log(2) / 40 < high and low > 0


def test_shared_vocabulary_and_ranks_arrive(db: Path, loaded: list[Loaded]) -> None:
    entries = timeline.table(db, "entries")
    categories = {name: set(entries.loc[entries["source"] == name, "category"].dropna()) for name in LISTS}
    assert categories["museum"] <= categories["yearbook"] | {"land"} and len(categories["museum"] & categories["school"]) >= 5
    record = timeline.record(db)
    assert np.isfinite(record.importance).sum() == len(made.kept(made.SEED)["museum"])
    assert {"era", "episode", "pulse"} <= {level for level in record.level if level}
