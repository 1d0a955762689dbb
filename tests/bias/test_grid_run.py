# SPDX-License-Identifier: Apache-2.0
import json

import numpy as np
import pytest
from bias_records import listed, plain

from chronos_acc.bias import Context
from chronos_acc.bias.grid import TABLES, choices_of, default_choices, run_grid
from chronos_acc.bias.growth import growth
from chronos_acc.errors import RecordRefused
from chronos_acc.record import Record
from chronos_acc.trend.nulls import LOG_UNIFORM

SMALL = choices_of(
    {
        "arbitrary": {"predictor": ["log10_age", "order"], "estimator": ["ols", "theil_pairs"], "young_end": ["open", "last"]},
        "question": {"response": ["log10_interval", "rate"], "lists": ["all", "each left out"], "min_support": [1, 2]},
    },
    "small.toml",
    "0" * 16,
)


@pytest.fixture(scope="module")
def record():
    return listed(np.random.default_rng(21), truth=80, growth=2.0, lists=3)


@pytest.fixture(scope="module")
def grid(record):
    return run_grid(Context(record, draws=60), SMALL, joint=99)


def test_every_combination_is_a_row(record, grid):
    frame = grid.to_frame()
    assert len(frame) == grid.declared == 8 * (8 + 2)
    assert frame["combination"].tolist() == list(range(1, 81)) and frame["valid"].all() and frame["own"].sum() == 1
    page = grid.to_dict()
    json.dumps(page, allow_nan=False)
    assert list(page)[: len(TABLES)] == list(TABLES) and page["made"]["choices_hash"] == "0" * 16 and page["notes"][0] == grid.sentence


def test_the_rate_of_the_own_question_is_the_growth_as_published(record, grid):
    row = next(
        r
        for r in grid.rows("combinations")
        if r["response"] == "rate" and r["lists"] == "all" and r["min_support"] == 1 and r["young_end"] == "open"
    )
    assert row["estimate"] == pytest.approx(growth(record.window).estimate, rel=1e-9)
    assert row["estimand"] == "growth per year" and row["predictor"] is None


def test_shares_are_given_question_by_question(grid):
    rows = grid.rows("summary")
    assert len(rows) == 16 and sum(r["combinations"] for r in rows) == 80
    z = np.array(
        [r["z"] for r in grid.rows("combinations") if r["response"] == "log10_interval" and r["lists"] == "all" and r["min_support"] == 1]
    )
    first = rows[0]
    assert first["own"] and first["valid"] == 8
    assert first["share_speeding"] == pytest.approx((z >= 1.959964).mean()) and first["median_z"] == pytest.approx(np.median(z))
    assert 0 < first["p_share"] <= 1 and 0 < first["p_median_z"] <= 1
    assert "same question" in grid.sentence


def test_same_bytes_whatever_the_workers(record, grid):
    again = run_grid(Context(record, draws=60), SMALL, joint=99, workers=1)
    assert json.dumps(again.to_dict()) == json.dumps(grid.to_dict())


def test_variance_and_extremes(grid):
    variance = grid.rows("variance")
    assert {r["response"] for r in variance} == {"log10_interval", "rate"}
    assert {r["group"] for r in variance} == {"arbitrary", "question"}
    assert all(0 <= r["first_order"] <= r["total"] + 1e-9 for r in variance)
    extremes = grid.rows("extremes")
    assert extremes[0]["extreme"] == "greatest" and "predictor" in extremes[0]["in_words"]
    assert [r["extreme"] for r in extremes].count("own") == 1


def test_combinations_that_cannot_run_are_named_and_counted():
    record = plain(np.random.default_rng(1), 12)
    grid = run_grid(Context(record, draws=20), default_choices(), joint=19)
    invalid = grid.rows("invalid")
    assert sum(r["combinations"] for r in invalid) == sum(not r["valid"] for r in grid.rows("combinations")) > 0
    assert all("counted milestones" in r["reason"] for r in invalid) and "min support 2" in invalid[0]["question"]
    assert any("one list only" in n for n in grid.notes)


def test_another_null_and_no_joint_test(record):
    context = Context(record, draws=10)
    other = run_grid(context, SMALL, joint=49, null=LOG_UNIFORM)
    assert other.null == "log_uniform" and other.rows("summary")[0]["p_share"] is not None
    without = run_grid(context, SMALL, joint=0)
    assert without.z_joint is None and without.rows("summary")[0]["p_share"] is None
    assert [r["z"] for r in without.rows("combinations")] == [r["z"] for r in other.rows("combinations")]


def test_no_draws(record):
    rows = run_grid(Context(record, draws=0), SMALL, joint=0).rows("combinations")
    assert all(r["draws_z"] is None for r in rows)


def test_interrupted_keeps_what_is_done(record):
    calls = []

    def tell(what, share):
        calls.append(share)
        if len(calls) == 2:
            raise KeyboardInterrupt

    grid = run_grid(Context(record, draws=30), SMALL, joint=19, tell=tell, workers=1)
    assert 0 < len(grid.lines) < grid.declared
    assert any(n.startswith(f"interrupted: {len(grid.lines)} of {grid.declared}") for n in grid.notes)
    json.dumps(grid.to_dict(), allow_nan=False)


@pytest.mark.parametrize("dates", [[1.0, 2.0, 3.0], [5.0] * 8, [1.0] * 3 + [4.0] * 9])
def test_degenerate_records(dates):
    grid = run_grid(Context(Record.from_dates(dates, present=9.0, unit=1.0), draws=10), joint=19)
    json.dumps(grid.to_dict(), allow_nan=False)
    with pytest.raises(RecordRefused, match="needs three"):
        run_grid(Context(Record.from_dates(dates[:2], present=9.0)))


def test_a_steady_record_is_seldom_called_speeding_by_the_joint_test():
    p = []
    for seed in range(12):
        grid = run_grid(Context(plain(np.random.default_rng(seed), 40), draws=0, seed=seed), SMALL, joint=99)
        p.append(grid.rows("summary")[0]["p_share"])
    assert np.mean(np.array(p) <= 0.05) <= 0.25 and np.median(p) > 0.1
