# SPDX-License-Identifier: Apache-2.0
"""Each check on records whose truth is known: small sizes, fixed seeds; the studies at full size are in tests/simulate/bias.py."""

from dataclasses import replace

import numpy as np
import pytest
from bias_records import listed, log_linear_ages, plain

from chronos_acc.bias import Context, run_checks
from chronos_acc.bias import equal_effort as effort
from chronos_acc.bias import leave_out as leaving
from chronos_acc.bias.capture_curve import at_least
from chronos_acc.bias.granularity import collapsed
from chronos_acc.bias.growth import growth, two_sided
from chronos_acc.errors import WrongUse
from chronos_acc.merge.entries import Entries
from chronos_acc.record import Record
from chronos_acc.trend import words
from chronos_acc.trend.analysis import analyse


def rows(record, name, **context):
    return run_checks(Context(record, **{"replicates": 299, "draws": 100, **context}), [name])


def test_steady_lists_that_forget_are_not_called_speeding_at_support_two():
    called = 0
    for seed in range(8):
        record = listed(np.random.default_rng(seed), truth=200, half_life=300.0, chance=0.6)
        found = rows(record, "support").rows("support")
        assert found[1]["setting"] == 2.0 and found[1]["null_median"] > found[0]["null_median"] > 0
        called += found[1]["stands"] == "yes"
        assert found[1]["p_steady"] < 1e-3  # beside a steady rate alone it would be called speeding every time
    assert called <= 1


def test_growth_stands_at_support_two():
    found = [
        rows(listed(np.random.default_rng(s), truth=140, growth=2.8, chance=0.5), "support").rows("support")[1]["stands"] for s in range(4)
    ]
    assert found.count("yes") >= 3


def test_support_never_upgrades_a_verdict():
    rng = np.random.default_rng(3)
    for seed in range(6):
        record = listed(np.random.default_rng(seed), truth=60, chance=0.5)
        if growth(record.window).p_value >= 0.05:
            assert all(r["stands"] != "yes" for r in rows(record, "support", seed=int(rng.integers(9))).rows("support"))


def test_poisson_binomial_against_counting():
    rng = np.random.default_rng(0)
    p = rng.random((4, 3))
    named = rng.random((200_000, 4, 3)) < p
    for threshold in range(1, 6):
        assert at_least(np.log(p / (1 - p)), threshold) == pytest.approx((named.sum(axis=1) >= threshold).mean(axis=0), abs=0.005)


def notable(rng, truth=500, span=1000.0, steepness=3.0):
    """A steady rate of milestones of exponential importance; listed where importance exceeds a threshold that falls towards the present."""
    ages = span * rng.random(truth)
    importance = rng.exponential(1.0, truth)
    seen = importance > steepness * ages / span
    return Record.from_dates(2000.0 - ages[seen], present=2000.0, start=1000.0, unit=1.0, importance=importance[seen])


def test_importance_finds_a_threshold_of_notability():
    for seed in range(4):
        found = rows(notable(np.random.default_rng(seed)), "importance")
        page = found.rows("summary")[0]
        assert found.published.p_value < 1e-6 and found.published.estimate > 0
        assert page["stands"] in ("weaker", "no", "too few")
        assert page["finding"].startswith("a threshold of notability that falls towards the present decides the trend")
        table = found.rows("importance")
        assert min(r["complete_to_age"] for r in table) < 700
        assert [r["setting"] for r in table] == sorted({r["setting"] for r in table})
        assert table[0]["estimate"] == found.published.estimate and abs(page["estimate"]) < 0.5 * page["published"]


def test_importance_leaves_growth_alone():
    for seed in range(4):
        rng = np.random.default_rng(seed)
        record = plain(rng, 120, growth=2.5)
        found = rows(replace(record, importance=rng.integers(1, 6, 120).astype(float)), "importance")
        assert found.rows("summary")[0]["stands"] == "yes"
        assert found.rows("summary")[0]["setting"] == 1.0


def test_pooling_one_complete_class_is_the_plain_growth():
    record = plain(np.random.default_rng(9), 80, growth=1.5)
    found = rows(replace(record, importance=np.r_[np.ones(79), 2.0]), "importance").rows("importance")
    assert found[0]["pooled_n"] == 80 and found[0]["mix_p_value"] is None
    assert found[0]["pooled_estimate"] == pytest.approx(growth(record.window).estimate, rel=1e-6)


def test_recall_decay_names_the_half_life_and_says_a_list_cannot_tell():
    record = plain(np.random.default_rng(4), 100, growth=4.0 * np.log(2.0))
    found = rows(record, "recall_decay")
    page, table = found.rows("summary")[0], found.rows("recall_decay")
    assert "a list alone cannot say which" in page["finding"]
    fitted = table[0]
    assert fitted["p_value"] is None and fitted["estimate"] == pytest.approx(0.0, abs=1e-5)
    assert fitted["parameter"] == pytest.approx(np.log(2.0) / growth(record.window).estimate, rel=1e-6)
    assert fitted["total"] == pytest.approx(fitted["listed"] + fitted["unlisted"])
    ranges = [r for r in table if r["kind"] == "age range"]
    assert sum(r["listed"] for r in ranges) == fitted["listed"]
    assert sum(r["unlisted"] for r in ranges) == pytest.approx(fitted["unlisted"], rel=1e-6)


def test_no_form_of_forgetting_suffices_for_a_burst():
    rng = np.random.default_rng(2)
    ages = np.concatenate([1000.0 * rng.random(40), 200.0 + 40.0 * rng.random(60)])
    found = rows(Record.from_dates(2000.0 - ages, present=2000.0, start=1000.0, unit=0.1), "recall_decay")
    assert found.published.p_value < 0.05
    page = found.rows("summary")[0]
    assert page["stands"] == "yes" and page["finding"].startswith("no form tried suffices")


def test_completeness_takes_forgetting_away_and_leaves_growth():
    forgotten = listed(np.random.default_rng(1), truth=300, half_life=250.0, chance=0.7)
    page = rows(forgotten, "completeness").rows("summary")[0]
    assert page["stands"] != "yes" and "overlap says" in page["finding"]
    # the tipping point stands against the overlap in both findings, with the numbers of trend
    trend = analyse(forgotten, draws=0, replicates=99, bootstrap=299)
    told = next(n for n in trend.notes if "overlap says" in n)
    document = trend.to_dict()
    needed = next(s for s in document["forgetting"][0]["shares"] if s["at"] == "oldest")
    overlap = next(s for s in document["completeness"]["shares"] if s["at"] == "oldest")
    assert needed["age"] == overlap["age"]
    for value in (needed["share"], overlap["low"], overlap["high"]):
        assert words.percent(value) in told
    decay = rows(forgotten, "recall_decay").rows("summary")[0]["finding"]
    assert told in page["finding"] and told in decay
    alone = rows(plain(np.random.default_rng(1), 60, 3.0), "recall_decay").rows("summary")[0]["finding"]
    assert "overlap says" not in alone
    grown = listed(np.random.default_rng(1), truth=150, growth=3.0, chance=0.5)
    assert rows(grown, "completeness").rows("summary")[0]["stands"] == "yes"


def test_derived_lists_count_as_one():
    record = listed(np.random.default_rng(1), truth=100, chance=0.6, lists=2)
    found = rows(replace(record, group=np.zeros(2, np.int64)), "completeness")
    assert not found.rows("completeness") and any("count as one" in n for n in found.notes)


def test_equal_effort_takes_forgetting_away_and_leaves_growth():
    forgotten = listed(np.random.default_rng(3), truth=300, half_life=300.0, chance=0.6)
    found = rows(forgotten, "equal_effort").rows("equal_effort")
    assert all(r["estimate"] < 0.5 * growth(forgotten.window).estimate for r in found)
    grown = listed(np.random.default_rng(3), truth=200, growth=2.8, chance=0.5)
    assert rows(grown, "equal_effort").rows("summary")[0]["stands"] == "yes"


def test_thinning_against_counting():
    """Distinct milestones in as many random mentions as make the next one known with the chance aimed at."""
    rng = np.random.default_rng(5)
    spectrum = np.array([[[6.0, 5.0, 4.0], [20.0, 2.0, 1.0]]])
    distinct, target = effort.thinned(spectrum)
    assert target[0] == pytest.approx(1 - 20 / 27)
    mentions = np.repeat(np.arange(15), [1] * 6 + [2] * 5 + [3] * 4)
    best = []
    for size in range(1, len(mentions)):
        orders = [rng.permutation(mentions) for _ in range(300)]
        coverage = np.mean([np.isin(x[size:], x[:size]).mean() for x in orders])
        best.append((abs(coverage - target[0]), np.mean([len(set(x[:size])) for x in orders])))
    assert distinct[0, 0] == pytest.approx(min(best)[1], abs=0.8)


def test_leave_out_greedy_is_enough_and_no_less():
    record = plain(np.random.default_rng(6), 40, growth=2.2)
    found = rows(record, "leave_out").rows("leave_out")
    last = found[-1]
    assert last["left_out"] == "milestones" and last["p_value"] >= 0.05
    gone = leaving._greedy(record, 1.0)
    assert len(gone) == last["milestones_lost"]
    keep = np.ones(len(record), bool)
    keep[record.window.index[gone[:-1]]] = False
    assert growth(record.only(keep=keep).window).p_value < 0.05


def test_each_milestone_left_out_against_refitting():
    for start in (True, False):
        record = plain(np.random.default_rng(7), 15, growth=1.0, start=start)
        without = leaving._without_each(record)
        for i, j in enumerate(record.window.index):
            keep = np.ones(len(record), bool)
            keep[j] = False
            assert without[i] == pytest.approx(growth(record.only(keep=keep).window).estimate, rel=1e-9)


def test_depth_and_recent_end_move_the_window():
    record = plain(np.random.default_rng(8), 60, growth=1.5)
    found = rows(record, "depth").rows("depth")
    half = next(r for r in found if r["setting"] == "youngest 50 %")
    assert half["n"] == 29  # thirty kept, the first of them opens the window
    later = next(r for r in found if r["setting"] == "present 100 years later")
    assert later["n"] == 60 and later["estimate"] < growth(record.window).estimate
    recent = rows(record, "recent_end").rows("recent_end")
    assert [r["setting"] for r in recent][:3] == [0.0, 1.0, 2.0]
    assert recent[0]["estimate"] == growth(record.window).estimate


def test_coarsened_rows_stand_beside_a_null_dated_alike():
    p = []
    for seed in range(25):
        found = rows(plain(np.random.default_rng(seed), 30), "dating", replicates=99, draws=10).rows("dating")
        p.append(next(r["p_value"] for r in found if r["setting"] == "all dates to 50% of age"))
    assert np.mean(np.array(p) < 0.1) < 0.25 and 0.3 < np.mean(p) < 0.7


def test_granularity_collapses_children():
    record = Record.from_dates(
        [10.0, 20.0, 30.0, 40.0, 50.0], present=60.0, titles=["Sowing", "Early Sowing", "Late Sowing", "Oven A", "Oven B"]
    )
    record = replace(record, parent=(None, "sowing", "sowing", "Ovens", "Ovens"), level=("1", "2", "2", "2", "2"))
    assert collapsed(record).tolist() == [True, False, False, True, False]
    found = rows(record, "granularity").rows("granularity")
    assert [r["setting"] for r in found] == ["children collapsed", "level 1", "level 2"]


def test_false_splits_make_acceleration_and_are_taken_back():
    """Three lists that speak of the recent half only: splitting their milestones adds recent ones."""
    rng = np.random.default_rng(10)
    ages = 1000.0 * rng.random(80)
    named = np.column_stack([np.ones(80, bool), ages < 500, ages < 500, ages < 500])
    record = Record.from_dates(2000.0 - ages, present=2000.0, start=1000.0, unit=1.0, mentions=named)
    found = rows(record, "false_splits").rows("false_splits")
    base = growth(record.window).estimate
    split = [r["estimate"] for r in found if r["kind"] == "assumed"]
    assert base < split[0] < split[1] < split[2]
    assert all(r["estimate"] < base for r in found if r["kind"] == "assumed, extrapolated")


def entries_of(record, rng, spelling=0.3):
    """Entries of three lists under titles of invented words, some spelled another way."""
    words = [
        "kiln",
        "loom",
        "plough",
        "sail",
        "lens",
        "canal",
        "clock",
        "bridge",
        "mill",
        "press",
        "lamp",
        "dyke",
        "forge",
        "seed",
        "rope",
        "glass",
    ]
    titles = [f"{words[i % 16].title()} of {words[(i * 7 + i // 16) % 16]} number {i}" for i in range(len(record))]
    source, title, best, label = [], [], [], []
    for j in range(len(record.lists)):
        for i in np.nonzero(record.mentions[:, j])[0]:
            source.append(j)
            title.append(titles[i].replace("of", "for the") if rng.random() < spelling else titles[i])
            best.append(record.best[i])
            label.append(i)
    ids = np.arange(1, len(source) + 1)
    first = {}
    milestone = np.array([first.setdefault(x, k) for x, k in zip(label, ids, strict=True)])
    best = np.array(best)
    entries = Entries(
        id=ids,
        source=np.array(source),
        sources=record.lists,
        title=tuple(title),
        earliest=best - 0.5,
        best=best,
        latest=best + 0.5,
        normal=np.zeros(len(best), bool),
        category=(None,) * len(best),
        present=record.present,
    )
    return entries, milestone, replace(record, id=np.array([first[i] for i in range(len(record))]))


def test_merging_and_the_miss_rate_from_entries():
    rng = np.random.default_rng(12)
    record = listed(rng, truth=70, growth=2.0, lists=3, chance=0.6)
    entries, milestone, record = entries_of(record, rng)
    order = np.argsort(record.id)
    record = record.only(keep=np.ones(len(record), bool)) if (np.diff(record.id) > 0).all() else replace_order(record, order)
    found = run_checks(Context(record, replicates=99, draws=50, entries=entries, milestone=milestone), ["merging", "false_splits"])
    table = found.rows("merging")
    assert {r["kind"] for r in table} == {"threshold", "pooling"}
    loose, strict = table[0], [r for r in table if r["kind"] == "threshold"][-1]
    assert loose["milestones"] <= strict["milestones"]
    pooled = next(r for r in table if r["setting"] == "pooling mixture")
    assert pooled["milestones"] == len(record)
    assert pooled["estimate"] == pytest.approx(growth(record.window).estimate, rel=1e-6)
    splits = found.rows("false_splits")
    assert any(r["kind"] == "estimated" and 0 <= r["rate"] < 0.5 for r in splits)


def replace_order(record, order):
    """The record with its milestones in another order."""
    place = np.argsort(order)
    parts = np.argsort(place[record.owner], kind="stable")
    return replace(
        record,
        id=record.id[order],
        title=tuple(record.title[i] for i in order),
        best=record.best[order],
        earliest=record.earliest[order],
        latest=record.latest[order],
        unit=record.unit[order],
        sd=record.sd[order],
        owner=place[record.owner][parts],
        source=record.source[parts],
        weight=record.weight[parts],
        kind=record.kind[parts],
        low=record.low[parts],
        mode=record.mode[parts],
        high=record.high[parts],
        mentions=record.mentions[order],
        category=tuple(record.category[i] for i in order),
        importance=record.importance[order],
    )


def test_exposure_takes_away_what_people_explain():
    rng = np.random.default_rng(4)
    record = plain(rng, 120, growth=2.0)
    years = np.arange(1000.0, 2001.0)
    found = rows(record, "exposure", exposure=(years, np.exp((years - 1000) * 0.002)))
    row = found.rows("exposure")[0]
    assert row["estimate"] == pytest.approx(growth(record.window).estimate - 0.002, abs=2e-5) and row["stands"] != "yes"
    flat = rows(record, "exposure", exposure=np.column_stack([years, np.full(len(years), 7.0)])).rows("exposure")[0]
    assert flat["estimate"] == pytest.approx(growth(record.window).estimate, rel=1e-3)
    with pytest.raises(WrongUse, match="above zero"):
        rows(record, "exposure", exposure=(years, years * 0))


def test_lists_as_studies_on_one_window():
    record = listed(np.random.default_rng(2), truth=150, growth=2.5, chance=0.5, lists=3)
    table = rows(record, "lists").rows("lists")
    assert [r["setting"] for r in table] == ["list 1", "list 2", "list 3", "pooled"]
    assert len({(r["start"], r["present"]) for r in table}) == 1 and table[-1]["p_equal"] > 0.01


def test_covariates_say_what_moves_and_adjust_nothing():
    rng = np.random.default_rng(2)
    record = plain(rng, 60, growth=1.0)
    record = replace(record, importance=record.best / 100 + rng.normal(size=60), category=tuple("ab"[i % 2] for i in range(60)))
    found = rows(record, "covariates")
    page = found.rows("summary")[0]
    assert "importance (tau" in page["finding"] and "never adjusted for" in page["finding"]
    assert page["estimate"] == page["published"]


def test_exact_p_of_a_row_is_that_of_laplace():
    """The doubled tail of the mean of uniforms, by simulation of Laplace's statistic."""
    rng = np.random.default_rng(1)
    record = plain(rng, 12, growth=2.0)
    found = growth(record.window)
    mean = (record.window.present - record.window.counted).mean() / record.window.span
    null = rng.random((200_000, 12)).mean(axis=1)
    assert found.p_value == pytest.approx(2 * min((null <= mean).mean(), (null >= mean).mean()), abs=0.003)
    assert two_sided(np.array(mean), 12) == found.p_value


def test_ages_of_the_maker():
    """The maker of test records has the growth it says."""
    ages = log_linear_ages(np.random.default_rng(1), 20_000, 2.0, 1000.0)
    record = Record.from_dates(2000.0 - ages, present=2000.0, start=1000.0)
    assert growth(record.window).estimate * 1000.0 == pytest.approx(2.0, abs=0.06)
