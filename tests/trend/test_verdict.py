# SPDX-License-Identifier: Apache-2.0
"""The verdict's table: every rule, the order of rules, the clauses, the weakest null, and what each sentence must carry."""

from __future__ import annotations

from dataclasses import replace

import pytest

from chronos_acc.trend import words
from chronos_acc.trend.verdict import RULES, Evidence, FormTried, judge

EXPONENTIAL = FormTried("exponential", 120.0, 90.0, 170.0, 0.4, 980.0, 0.0035, 430.0, 300.0, 610.0)
POWER = FormTried("power", 12.0, 4.0, 33.0, 0.3, 980.0, 0.012, 2.1e6, 90_000.0, None)
BASE = Evidence(
    n=40,
    intervals=38,
    span=1000.0,
    p1=0.001,
    p2=0.002,
    direction="speeding",
    doublings=3.2,
    doublings_low=1.4,
    doublings_high=5.1,
    half_life=310.0,
    half_life_low=195.0,
    half_life_high=None,
    power=((1.0, 0.24), (2.0, 0.7), (4.0, 0.999)),
    forms=(EXPONENTIAL, POWER),
    age_exponent=1.6,
    age_exponent_low=1.2,
    age_exponent_high=2.1,
    slope=1.3,
    slope_p=0.01,
)


def test_table_is_complete_and_in_order() -> None:
    assert [r.number for r in RULES] == list(range(8))
    assert [r.code for r in RULES if not r.clause] == ["too_few", "no_trend", "uneven", "slowing", "forgetting", "shape"]
    assert [r.code for r in RULES if r.clause] == ["log_uniform", "completeness"]


@pytest.mark.parametrize("change", [{"n": 7}, {"intervals": 4}, {"n": 0, "intervals": 0, "p1": None, "p2": None}])
def test_rule_0_too_few(change: dict[str, object]) -> None:
    verdict = judge(replace(BASE, smallest=5.4, **change))  # type: ignore[arg-type]
    assert verdict.code == "too_few" and verdict.clauses == ()
    assert "5.4 doublings" in verdict.sentence and "at least 8 and 5" in verdict.sentence
    none = judge(replace(BASE, smallest=None, **change))  # type: ignore[arg-type]
    assert "no growth, however large" in none.sentence


def test_rule_1_no_trend() -> None:
    verdict = judge(replace(BASE, p1=0.05, p2=0.001))
    assert (verdict.code, verdict.weakest_null) == ("no_trend", "steady")
    assert "1.4 to 5.1 doublings over the window remain possible" in verdict.sentence


def test_rule_2_uneven() -> None:
    for p2 in (0.05, 0.7, None):
        verdict = judge(replace(BASE, p2=p2))
        assert (verdict.code, verdict.weakest_null) == ("uneven", "shuffled")
        assert verdict.clauses == ()


def test_rule_3_slowing() -> None:
    verdict = judge(
        replace(BASE, direction="slowing", doublings=-3.0, doublings_low=-5.0, doublings_high=-1.0, half_life=None, forms=(), slope_p=0.9)
    )
    assert (verdict.code, verdict.clauses, verdict.weakest_null) == ("slowing", (), None)
    assert "recent end" in verdict.sentence and "−3.0 doublings" in verdict.sentence


def test_rule_4_forgetting() -> None:
    verdict = judge(BASE)
    assert (verdict.code, verdict.clauses, verdict.weakest_null) == ("forgetting", (), "recall_decay")
    for piece in ("half forgotten every 120 years", "0.35 %", "430 are unlisted", "300 to 610", "cannot say which"):
        assert piece in verdict.sentence
    power = judge(replace(BASE, forms=(replace(EXPONENTIAL, fit_p=0.01), POWER)))
    assert power.code == "forgetting" and "half forgotten at an age of 12 years" in power.sentence
    assert "about 10⁶ are unlisted (95 % 90,000 upwards, unbounded)" in power.sentence
    edge = judge(replace(BASE, forms=(replace(EXPONENTIAL, fit_p=0.05),)))
    assert edge.code == "forgetting"


@pytest.mark.parametrize(
    ("change", "holds"),
    [
        ({"age_exponent_low": 0.99}, True),
        ({"slope_p": 0.05}, True),
        ({"age_exponent_low": 0.5, "age_exponent_high": 0.8}, True),  # partial picking explains it a fortiori
        ({"age_exponent_low": 1.0, "slope_p": 0.049}, False),
        ({"age_exponent_low": None, "slope_p": None}, False),
    ],
)
@pytest.mark.parametrize("fit_p", [0.4, 0.01])
def test_rule_5_log_uniform(change: dict[str, float], holds: bool, fit_p: float) -> None:
    verdict = judge(replace(BASE, forms=(replace(EXPONENTIAL, fit_p=fit_p),), **change))  # type: ignore[arg-type]
    assert verdict.code == ("forgetting" if fit_p > 0.05 else "shape")
    assert ("log_uniform" in verdict.clauses) is holds
    assert ("Picking evenly per decade of age" in verdict.sentence) is holds


def test_rule_6_shape_names_the_forms_tried() -> None:
    verdict = judge(replace(BASE, forms=(replace(EXPONENTIAL, fit_p=0.002), replace(POWER, fit_p=0.012))))
    assert (verdict.code, verdict.clauses, verdict.weakest_null) == ("shape", (), None)
    assert "2^(−age/h) (p = 0.002)" in verdict.sentence and "1/(1 + age/s) (p = 0.012)" in verdict.sentence
    assert judge(replace(BASE, forms=(replace(EXPONENTIAL, fit_p=0.002),), slope_p=0.2)).weakest_null == "log_uniform"


@pytest.mark.parametrize(
    ("change", "holds"),
    [
        ({"lists": 2, "corrected": 2.0, "corrected_low": 0.4, "corrected_high": 3.6}, True),
        ({"lists": 2, "corrected": 2.0, "corrected_low": 0.4, "corrected_high": None}, True),
        ({"lists": 1, "corrected": 2.0, "corrected_low": 0.4, "corrected_high": 3.6}, False),
        ({"lists": 3, "corrected": 2.0, "corrected_low": -0.1, "corrected_high": 3.6}, False),
        ({"lists": 3, "corrected": 2.0, "corrected_low": None, "corrected_high": 3.6}, False),
    ],
)
def test_rule_7_completeness(change: dict[str, float], holds: bool) -> None:
    verdict = judge(replace(BASE, **change))  # type: ignore[arg-type]
    assert ("completeness" in verdict.clauses) is holds
    assert ("lists missed independently" in verdict.sentence) is holds
    for quiet in ({"p1": 0.2}, {"p2": 0.2}, {"direction": "slowing"}):
        assert judge(replace(BASE, **change, **quiet)).clauses == ()  # type: ignore[arg-type]


@pytest.mark.parametrize(
    "evidence",
    [
        BASE,
        replace(BASE, p1=0.3),
        replace(BASE, p2=0.3),
        replace(BASE, direction="slowing"),
        replace(BASE, forms=(replace(EXPONENTIAL, fit_p=0.01),)),
        replace(BASE, n=5, smallest=7.0),
    ],
)
def test_every_sentence_carries_n_growth_half_life_and_power(evidence: Evidence) -> None:
    sentence = judge(evidence).sentence
    assert f"n = {evidence.n}" in sentence
    assert "3.2 doublings over 1,000 years (95 % 1.4 to 5.1)" in sentence
    assert "half forgotten every 310 years (95 % 195 years upwards, unbounded)" in sentence
    assert "laplace shows 1, 2 and 4 doublings in a list of this size in 24 %, 70 % and over 99 % of cases" in sentence
    assert "None" not in sentence and "nan" not in sentence


def test_numbers_in_words() -> None:
    assert [words.years(v) for v in (0.01, 1, 34.2, 480.4, 1234, 13_800, 3.42e6, 1.38e10)] == [
        "3.7 days",
        "1.0 years",
        "34 years",
        "480 years",
        "1,230 years",
        "14 thousand years",
        "3.4 million years",
        "14 billion years",
    ]
    assert words.span(1.1, 7.0) == "1.1 to 7.0 years" and words.span(90, 13_000) == "90 years to 13 thousand years"
    assert words.span(None, None) == "0 upwards, unbounded"
    assert [words.count(v) for v in (0, 12.4, 9_999, 23_456, 2.1e6, 4e12)] == ["0", "12", "9,999", "23,000", "about 10⁶", "about 10¹³"]
    assert [words.percent(v) for v in (0, 1, 0.5, 0.9999, 1e-9, 0.0123)] == ["0 %", "100 %", "50 %", "over 99 %", "under 0.0001 %", "1.2 %"]
    assert [words.digits(v) for v in (0, -0.82, 1234.5, 2.5e8, float("inf"))] == ["0", "−0.82", "1,200", "2.5×10⁸", "unbounded"]
    assert (words.p(0.0001), words.p(0.034), words.p(0.34)) == ("p < 0.001", "p = 0.034", "p = 0.34")
    assert words.listed(["a"]) == "a" and words.listed(["a", "b", "c"]) == "a, b and c" and words.listed([]) == ""


def test_rule_2_says_when_the_trend_lies_in_an_end_that_no_order_moves() -> None:
    far = replace(BASE, p2=0.4, span=1500.0, before=500.0, order="speeding")
    verdict = judge(far)
    assert (verdict.code, verdict.weakest_null) == ("uneven", "shuffled")
    assert "500 years from the given start to the first milestone are empty (p < 0.001" in verdict.sentence
    assert "Without --start" in verdict.sentence
    assert "given start" not in judge(replace(far, before=20.0)).sentence  # as long as a steady rate leaves it
    assert "given start" not in judge(replace(far, before=0.0)).sentence
    recent = judge(replace(far, direction="slowing", order="slowing", before=500.0, after=400.0))
    assert recent.code == "uneven" and "400 years since the last milestone" in recent.sentence and "given start" not in recent.sentence


def test_intervals_that_run_the_other_way_do_not_bear_the_direction_out() -> None:
    other = judge(replace(BASE, order="slowing", span=1500.0, before=600.0))
    assert (other.code, other.clauses, other.weakest_null) == ("uneven", (), "shuffled")
    assert "runs the other way, towards slowing (lewis_robinson p = 0.002)" in other.sentence
    for order in ("speeding", "none", ""):
        assert judge(replace(BASE, order=order)).code == "forgetting"
