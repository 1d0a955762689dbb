# SPDX-License-Identifier: Apache-2.0
"""The whole of trend: the document, its numbers, degenerate records, and verdicts on records whose making is known."""

from __future__ import annotations

import json
import math
import re
from collections import Counter
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from chronos_acc.errors import RecordRefused
from chronos_acc.record import Record, after_note
from chronos_acc.trend.analysis import Trend, analyse, order_of
from chronos_acc.trend.trend_tests import run_tests
from chronos_acc.trend.verdict import Evidence, judge


def _quick(record: Record, seed: int = 1) -> Trend:
    return analyse(record, seed=seed, draws=50, replicates=199, bootstrap=99)


def _decay(seed: int, n: int, half_life: float, span: float = 1000.0) -> Record:
    rng = np.random.default_rng(seed)
    k = math.log(2) * span / half_life
    return Record.from_dates(2000 + span * np.log1p(rng.random(n) * np.expm1(-k)) / k, present=2000)


@pytest.fixture(scope="module")
def several() -> Trend:
    rng = np.random.default_rng(1)
    record = _decay(1, 90, 200)
    named = rng.random((90, 3)) < 0.6
    named[:, 0] |= ~named.any(axis=1)
    order = np.argsort(record.best)
    return _quick(Record.from_dates(record.best[order], present=2000, start=1000, unit=0.5, mentions=named))


KEYS = (
    "record",
    "tests",
    "rate_laws",
    "age_exponent",
    "regressions",
    "nulls",
    "lists",
    "verdict",
    "verdict_code",
    "verdict_clauses",
    "weakest_null",
    "notes",
    "made",
)


def test_document_has_the_agreed_names(several: Trend) -> None:
    document = several.to_dict()
    assert set(KEYS) <= set(document)
    again = json.loads(json.dumps(document, allow_nan=False))
    assert again == document  # native Python throughout
    assert {
        "milestones",
        "n",
        "intervals",
        "joined",
        "start",
        "start_from",
        "present",
        "present_from",
        "outside",
        "tied_with_start",
        "finest_unit",
    } <= set(document["record"])
    assert {"test", "statistic", "z", "direction", "p_value", "p_exact", "p_adjusted"} <= set(document["tests"][0])
    law = {r["law"]: r for r in document["rate_laws"]}
    assert set(law) == {"steady", "log_linear", "power_law", "hyperbolic", "step"}
    assert law["log_linear"]["parameters"]["growth"] > 0 and law["log_linear"]["low"]["growth"] is not None
    assert document["age_exponent"][0]["era"] == "whole record"
    row = document["regressions"][0]
    assert (row["response"], row["predictor"], row["estimator"]) == ("log10_interval", "log10_age", "ols_hc3")
    assert {(r["null"], r["statistic"]) for r in document["nulls"]} >= {
        (null, statistic)
        for null in ("steady", "shuffled", "log_uniform", "recall_decay")
        for statistic in ("slope", "r_squared", "laplace")
    }
    assert [r["list"] for r in document["lists"]] == ["list 1", "list 2", "list 3"]
    assert document["made"]["seed"] == 1 and document["made"]["record"] == several.record.hash and document["made"]["version"]


def test_tables_are_faithful(several: Trend) -> None:
    tables = several.tables()
    for name in ("record", "tests", "rate_laws", "age_exponent", "regressions", "nulls", "lists", "forgetting", "completeness", "headline"):
        assert len(tables[name]), name
        assert all(re.fullmatch(r"[a-z][a-z0-9_]*", str(c)) for c in tables[name].columns), name
    assert several.to_frame()["test"].tolist()[0] == "laplace"
    main = tables["regressions"].iloc[0]
    null = several.nulls.row("log_uniform", "slope")
    assert null is not None and main["null"] == "log_uniform" and main["null_median"] == null.median and main["p_value"] == null.p_value


def test_same_seed_same_bytes() -> None:
    record = _decay(3, 25, 300)
    first, second = _quick(record), _quick(record)
    assert json.dumps(first.to_dict()) == json.dumps(second.to_dict())
    assert first.verdict == second.verdict


def test_every_number_of_the_sentence_is_in_the_headline(several: Trend) -> None:
    head = several.headline()
    e = several.evidence
    assert head["doublings"] == pytest.approx(several.laws.row("log_linear").parameters["growth"] * 1000 / math.log(2))
    assert head["half_life"] == several.tipping.form("exponential").estimate
    assert head["power_2"] == dict(e.power)[2.0]
    assert head["p_laplace"] == several.tests.row("laplace").p_exact
    assert f"n = {several.window.n}" in several.verdict


def test_growth_that_the_lists_tell_apart_from_forgetting(several: Trend) -> None:
    # lists that name events whatever their age: what they missed cannot have made the growth
    assert several.verdict_code == "forgetting" and "completeness" in several.verdict_clauses
    assert several.capture.low is not None and several.capture.low > 0


def test_log_uniform_list_of_sixty_over_nine_decades_carries_the_clause() -> None:
    carried = 0
    for s in range(6):
        rng = np.random.default_rng(s)
        trend = _quick(Record.from_dates(2000 - 10 ** rng.uniform(0, 9, 60), present=2000))
        assert trend.verdict_code in ("forgetting", "shape")
        carried += "log_uniform" in trend.verdict_clauses
    assert carried >= 5


def test_steady_list_dated_to_the_year_is_not_called_speeding() -> None:
    codes = []
    for s in range(14):
        rng = np.random.default_rng(100 + s)
        record = Record.from_dates(np.floor(rng.uniform(1900, 2000, 100)) + 0.5, present=2000, unit=1.0)
        codes.append(analyse(record, draws=0, replicates=99, bootstrap=19).verdict_code)
    assert sum(c in ("forgetting", "shape") for c in codes) <= 1
    assert codes.count("no_trend") >= 12


def test_clustered_but_steady_is_uneven() -> None:
    """Clusters make Laplace's test reject; the same intervals in another order do too."""
    found = []
    for s in range(12):
        rng = np.random.default_rng(s)
        gaps = np.where(rng.random(60) < 0.85, rng.exponential(1, 60), rng.exponential(60, 60))
        times = np.cumsum(gaps)
        found.append(analyse(Record.from_dates(times, present=times[-1] + 1), draws=0, replicates=99, bootstrap=19))
    rejected = [t for t in found if (t.evidence.p1 or 1) < 0.05]
    assert len(rejected) >= 3
    assert sum(t.verdict_code == "uneven" for t in rejected) >= len(rejected) - 1
    assert all(t.weakest_null == "shuffled" for t in rejected if t.verdict_code == "uneven")


def test_slowing_and_shape() -> None:
    rng = np.random.default_rng(2)
    slowing = _quick(Record.from_dates(1000 + 1000 * rng.random(60) ** 3, present=2000, start=1000))
    assert slowing.verdict_code == "slowing" and "recent end" in slowing.verdict
    ages = 10 ** (rng.random(100) ** 2.2 * 6)  # steeper than any picking per log age
    steep = _quick(Record.from_dates(2000 - np.concatenate([ages, rng.uniform(1, 3, 40)]), present=2000))
    assert steep.verdict_code in ("shape", "forgetting")
    assert steep.evidence.age_exponent is not None and steep.evidence.age_exponent > 1


@pytest.mark.parametrize("n", [3, 4, 6])
def test_few_milestones_are_too_few(n: int) -> None:
    trend = _quick(Record.from_dates(np.linspace(1000, 1990, n), present=2000))
    assert trend.verdict_code == "too_few"
    json.dumps(trend.to_dict(), allow_nan=False)
    trend.tables()
    assert "Too few to tell" in trend.verdict


def test_refusals() -> None:
    for dates in ([], [1900.0], [1900.0, 1950.0]):
        with pytest.raises(RecordRefused, match="at least 3"):
            _quick(Record.from_dates(dates, present=2000))
    with pytest.raises(RecordRefused, match="later --present"):
        _quick(Record.from_dates([1900.0] * 5, present=1900))
    with pytest.raises(RecordRefused, match="outside"):
        _quick(Record.from_dates([1900.0, 1950, 1970, 1990], present=1960))


def test_all_at_one_date_has_a_defined_answer() -> None:
    trend = _quick(Record.from_dates([1900.5] * 5, present=2000, unit=1))
    assert trend.verdict_code == "too_few" and trend.window.n == 0
    json.dumps(trend.to_dict(), allow_nan=False)
    trend.tables()


def test_ten_billion_years_with_all_events_in_the_last_million() -> None:
    rng = np.random.default_rng(4)
    trend = _quick(Record.from_dates(2000 - rng.uniform(1, 1e6, 40), present=2000, start=2000 - 1e10, unit=1.0))
    json.dumps(trend.to_dict(), allow_nan=False)
    assert trend.evidence.doublings is not None and trend.evidence.doublings > 1e4


def test_fifty_days() -> None:
    rng = np.random.default_rng(5)
    trend = _quick(Record.from_dates(2000 + np.sort(rng.uniform(0, 50 / 365, 40)), present=2000 + 50 / 365, unit=1 / 365))
    assert trend.verdict_code in ("no_trend", "uneven")
    assert "days" in trend.verdict or "years" in trend.verdict


def test_change_of_unit_changes_no_verdict() -> None:
    record = _decay(6, 40, 250)
    other = Record.from_dates((record.best - 2000) * 1e6, present=0)
    a, b = _quick(record), _quick(other)
    assert (a.verdict_code, a.verdict_clauses) == (b.verdict_code, b.verdict_clauses)
    assert a.evidence.doublings == pytest.approx(b.evidence.doublings, rel=1e-9)
    assert a.evidence.p1 == b.evidence.p1 and a.evidence.p2 == b.evidence.p2


def test_given_forgetting_next_and_exposure() -> None:
    record = _decay(7, 40, 250)
    trend = analyse(record, draws=0, replicates=99, bootstrap=19, half_life=250.0, scale=50.0, next_event=True)
    settings = {r.setting for r in trend.nulls.rows if r.null == "recall_decay"}
    assert {"half-life 250 years, given", "1/(1 + age/50 years), given"} <= settings
    document = trend.to_dict()
    assert document["next"] and "track_record" in document
    json.dumps(document, allow_nan=False)
    years = np.arange(1000.0, 2001.0)
    exposed = analyse(record, draws=0, replicates=99, bootstrap=19, exposure=(years, np.exp2((years - 2000) / 250)))
    # growth of the exposure itself is taken out: what doubles with it is steady per unit
    assert exposed.evidence.doublings is not None and trend.evidence.doublings is not None
    assert abs(exposed.evidence.doublings) < abs(trend.evidence.doublings)


def test_notes_name_what_was_left_out() -> None:
    record = Record.from_dates([900.0, 1000, 1100, 1200, 1300, 1300, 1500, 2000, 2050], present=2000, start=1000)
    notes = " ".join(_quick(record).notes)
    assert "1 milestone lies after the present 2000 (given) and is left out; --present 2051 takes it in" in notes
    assert "1 milestone before the start" in notes
    assert "closes the window" in notes and "instant of the start" in notes and "zero length" in notes


def test_one_sentence_names_what_lies_after_the_present() -> None:
    dates = [1000.0, 1100, 1200, 1300, 1400, 1500, 1990.5, 2010.25, 2030.75]
    record = Record.from_dates(dates, present=2000)
    noted = replace(record, notes=(after_note(record) or "",))  # as a timeline hands it over
    years = np.arange(900.0, 2101.0)
    for given, present, value in (
        (record, 2000, 2031),
        (noted, 2000, 2031),
        (noted.only(present=1900), 1900, 2031),  # the sentence follows the present
        (noted.only(present=2020), 2020, 2031),
    ):
        for exposure in (None, (years, np.exp2((years - 2000) / 300))):
            notes = [n for n in analyse(given, draws=0, replicates=19, bootstrap=19, exposure=exposure).notes if "after the present" in n]
            assert len(notes) == 1 and f"after the present {present} " in notes[0] and f"--present {value} takes" in notes[0], notes
    inside = noted.only(present=2031)
    assert not any("after the present" in n for n in analyse(inside, draws=0, replicates=19, bootstrap=19).notes)
    assert inside.window.after == 0


def _codes(ages: Callable[[np.random.Generator], np.ndarray], before: float, records: int = 20) -> Counter[str]:
    """Verdicts by the two tests alone, on records of 40 in 1,000 years whose start lies ``before`` years before."""
    found: Counter[str] = Counter()
    for s in range(records):
        window = Record.from_dates(2000 - ages(np.random.default_rng([s, 9])), present=2000, start=1000 - before).window
        tests = run_tests(window, seed=1, replicates=199)
        laplace, lewis = tests.row("laplace"), tests.row("lewis_robinson")
        e = Evidence(
            window.n, window.n - 1, window.span, laplace.p_exact, lewis.p_exact, laplace.direction, order=order_of(window),
            before=float(window.times[0] - window.start),
        )  # fmt: skip
        found[judge(e).code] += 1
        if judge(e).code == "uneven" and before >= 500:
            assert "from the given start to the first milestone are empty" in judge(e).sentence
    return found


def test_a_start_far_before_the_first_milestone() -> None:
    """The interval from a given start to the first milestone is never permuted: a steady record in a window that begins far too early is
    uneven, growth stays growth, and what slows down is not called speeding."""

    def growing(rng: np.random.Generator) -> np.ndarray:
        return np.asarray(-1000 / 4 * np.log1p(rng.random(40) * np.expm1(-4.0)))

    steady = {before: _codes(lambda rng: 1000 * rng.random(40), before) for before in (0.0, 500.0, 9000.0)}
    assert steady[0.0]["no_trend"] >= 17
    assert steady[500.0]["uneven"] >= 17 and steady[9000.0]["uneven"] >= 17
    for before in (0.0, 9000.0):
        found = _codes(growing, before)
        assert found["shape"] + found["forgetting"] >= 18
    slowing = _codes(lambda rng: 1000 - growing(rng), 9000.0)
    assert slowing["uneven"] == 20


def test_a_lone_first_milestone_and_coarse_dates_are_said():
    from chronos_acc.record import Record
    from chronos_acc.trend.analysis import analyse

    lone = Record.from_dates([-45e6, 1000, 1200, 1300, 1390, 1450, 1500, 1550, 1600, 1640], present=1700, unit=1)
    assert any("--start 999" in note for note in analyse(lone, draws=0, replicates=99, bootstrap=19).notes)
    coarse = Record.from_dates([1900.5] * 5 + [1910.5] * 5 + [1920.5] * 5 + [1930.5] * 5, present=1940, unit=10)
    assert any("half of the intervals are zero" in note for note in analyse(coarse, draws=0, replicates=99, bootstrap=19).notes)
