# SPDX-License-Identifier: Apache-2.0
"""Completeness from overlap: published examples, a second likelihood, and coverage of the corrected growth."""

from __future__ import annotations

from dataclasses import replace
from itertools import product

import numpy as np
import pytest
from scipy import integrate, optimize

from chronos_acc.errors import WrongUse
from chronos_acc.record import Record
from chronos_acc.trend.analysis import analyse
from chronos_acc.trend.capture import corrected_growth, grouped
from chronos_acc.trend.overlap import Sightings, fit, simulate
from chronos_acc.trend.overlap_bins import chao, chapman, coverage_bins, log_linear_models, petersen, supported

# hepatitis A, lists P, Q, E (Chao et al. 2001, Stat. Med. 20:3123-3157)
HEPATITIS = {"111": 28, "110": 21, "101": 17, "100": 69, "011": 18, "010": 55, "001": 63}


def _lists(seed: int, *, growth: float = 0.0, beta: float = 2.0, size: int = 150, alpha: tuple[float, ...] = (1.0, 0.5, 0.2)) -> Record:
    """``size`` true events in 1,000 years growing by e^growth, named by independent lists whose logit falls by beta over the window."""
    rng = np.random.default_rng(seed)
    u = rng.random(size)
    x = u if growth == 0 else np.log1p(u * np.expm1(growth)) / growth
    p = 1 / (1 + np.exp(-(np.array(alpha) - beta * (1 - x)[:, None])))
    named = rng.random(p.shape) < p
    seen = named.any(axis=1)
    return Record.from_dates(1000 + 1000 * x[seen], present=2000, start=1000, mentions=named[seen])


def test_two_lists() -> None:
    # a teaching example (turtles), a worked example (nests), Cannon & Roe 1982; Chapman 1951, Seber 1982
    assert petersen(23, 28, 9) == pytest.approx(71.56, abs=0.005)
    assert petersen(142, 137, 95) == pytest.approx(204.779, abs=5e-4)
    assert petersen(400, 400, 40) == 4000
    turtles = chapman(23, 28, 9)
    assert (turtles.total, turtles.variance) == pytest.approx((68.6, 168.3055), abs=5e-5)
    nests = chapman(142, 137, 95)
    assert (nests.total, np.sqrt(nests.variance)) == pytest.approx((204.5625, 6.6012), abs=5e-5)
    assert chapman(10, 15, 5).total == pytest.approx(28.3333, abs=5e-5)
    assert turtles.low > 23 + 28 - 9 and turtles.high > turtles.total
    with pytest.raises(WrongUse, match="shared"):
        chapman(3, 5, 4)


def test_chao_on_cottontails() -> None:
    # Edwards & Eberhardt 1967, Chao 1987 (from memory): 76 animals, 18 occasions, 135 in truth; variance and last value recomputed
    plain = chao(76, 43, 16, bias_corrected=False)
    assert (plain.total, plain.variance) == pytest.approx((133.78, 577.02), abs=0.005)
    assert chao(76, 43, 16, 18, bias_corrected=False).total == pytest.approx(130.57, abs=0.005)
    assert chao(76, 43, 16).total == pytest.approx(129.12, abs=0.005)
    assert plain.low < 135 < plain.high
    none_twice = chao(10, 10, 0, 3)
    assert none_twice.total == pytest.approx(10 + 2 / 3 * 45) and none_twice.high > none_twice.total
    assert chao(5, 0, 5, 2).total == 5


def test_log_linear_models_on_hepatitis() -> None:
    # recomputed; 388 and 1313 agree with the paper's table from memory
    named = np.array([[c == "1" for c in key] for key, count in HEPATITIS.items() for _ in range(count)])
    assert named.sum(axis=0).tolist() == [135, 122, 126] and len(named) == 271
    assert petersen(135, 122, 49) == pytest.approx(336.12, abs=0.005)
    assert petersen(135, 126, 45) == pytest.approx(378.00, abs=0.005)
    assert petersen(122, 126, 46) == pytest.approx(334.17, abs=0.005)
    models = log_linear_models(named)
    assert [m.total for m in models] == pytest.approx([388.48, 416.00, 393.31, 413.18, 463.50, 526.71, 451.71, 1312.76], abs=0.006)
    assert [m.deviance for m in models] == pytest.approx([24.357, 21.144, 24.247, 21.331, 19.422, 13.203, 19.904, 0.0], abs=6e-4)
    assert [m.pairs for m in supported(models)] == [((0, 1), (0, 2), (1, 2))]
    assert models[0].interval.low < models[0].total < models[0].interval.high


def test_log_linear_against_a_glm() -> None:
    import statsmodels.api as sm

    rng = np.random.default_rng(1)
    named = rng.random((300, 4)) < 0.45
    named = named[named.any(axis=1)]
    cells = np.array([c for c in product([0, 1], repeat=4) if any(c)])
    counts = np.array([(named == c.astype(bool)).all(axis=1).sum() for c in cells])
    mine = {m.pairs: m for m in log_linear_models(named)}
    for pairs in ((), ((0, 3),), ((0, 1), (2, 3))):
        design = np.column_stack([np.ones(len(cells)), cells, *[cells[:, i] * cells[:, j] for i, j in pairs]])
        other = sm.GLM(counts, design, family=sm.families.Poisson()).fit()
        assert mine[pairs].total == pytest.approx(len(named) + np.exp(other.params[0]), rel=1e-6)
        assert mine[pairs].deviance == pytest.approx(other.deviance, rel=1e-6, abs=1e-6)


def test_bins_hold_ten_shared_milestones() -> None:
    record = _lists(1, size=300)
    ages = 2000 - record.best
    bins = coverage_bins(ages, record.mentions)
    assert len(bins) == int((record.mentions.sum(axis=1) >= 2).sum()) // 10
    assert all(b.shared >= 10 for b in bins)
    assert sum(b.named for b in bins) == len(record)
    assert all(a.age_to == b.age_from for a, b in zip(bins[:-1], bins[1:], strict=True))
    for b in bins:
        assert b.completeness_low <= b.completeness <= b.completeness_high <= 1
        assert b.total_low <= b.total <= b.total_high
    assert coverage_bins(ages[:5], record.mentions[:5]) == ()
    two = coverage_bins(ages, record.mentions[:, :2] | ~record.mentions[:, :2].any(axis=1)[:, None])
    assert {b.method for b in two} == {"chapman"}


def test_joint_likelihood_against_a_second_implementation() -> None:
    record = _lists(3, growth=1.0)
    capture = corrected_growth(record)
    assert capture.estimable and capture.fit is not None
    x = (record.window.counted - 1000) / 1000
    named = record.mentions[record.window.index]
    floor = float((1 - x).min())
    for row in capture.rows:

        def a_star(x: np.ndarray | float, scale: str = row.scale) -> np.ndarray:
            a = 1 - np.asarray(x)
            return a if scale == "age" else np.log1p(a / floor) / np.log1p(1 / floor)

        def minus(theta: np.ndarray) -> float:
            g, alpha, beta = theta[0], theta[1:-1], theta[-1]
            eta = alpha - beta * a_star(x)[:, None]
            p = 1 / (1 + np.exp(-eta))

            def inside(s: float) -> float:
                q = 1 / (1 + np.exp(-(alpha - beta * float(a_star(s)))))
                return float(np.exp(g * s) * (1 - np.prod(1 - q)))

            area = integrate.quad(inside, 0, 1, epsabs=1e-10, limit=200)[0]
            return -float((g * x).sum() + np.where(named, np.log(p), np.log(1 - p)).sum() - len(x) * np.log(area))

        found = optimize.minimize(
            minus, [0.5, 0.5, 0.5, 0.5, 1.0], method="Nelder-Mead", options={"xatol": 1e-5, "fatol": 1e-8, "maxfev": 4000}
        )
        assert row.log_likelihood == pytest.approx(-found.fun, abs=1e-3)
        assert row.growth * 1000 == pytest.approx(found.x[0], abs=5e-3)


def test_headline_is_the_scale_of_lower_aic() -> None:
    capture = corrected_growth(_lists(3))
    best = min(capture.rows, key=lambda r: r.aic)
    assert best.headline and capture.scale == best.scale and capture.growth == best.growth
    assert {r.scale for r in capture.rows} == {"age", "log_age"}
    assert any("independently" in n for n in capture.notes)


def test_corrected_growth_covers_where_the_uncorrected_does_not() -> None:
    """Steady truth, lists that forget independently: small version of the study in tests/simulate."""
    good = plain = estimable = 0
    for s in range(10):
        capture = corrected_growth(_lists(500 + s, beta=3.0, size=250, alpha=(1.5, 1.0, 0.5)))
        if not capture.estimable:
            continue
        estimable += 1
        good += (capture.low is None or capture.low <= 0) and (capture.high is None or capture.high >= 0)
        assert capture.uncorrected_low is not None
        plain += capture.uncorrected_low <= 0
    assert estimable == 10
    assert good >= 8 and plain <= 4


def test_lists_with_a_common_ancestor_count_as_one() -> None:
    record = _lists(4)
    family = replace(record, group=np.array([0, 0, 2]))
    names, named = grouped(family)
    assert names == ("list 1 + list 2", "list 3")
    assert np.array_equal(named[:, 0], record.mentions[:, :2].any(axis=1))
    assert corrected_growth(family).lists == names
    assert corrected_growth(family).shared == int((named.sum(axis=1) == 2).sum())
    alone = corrected_growth(replace(record, group=np.zeros(3, dtype=np.int64)))
    assert not alone.estimable and "one list" in alone.notes[0] and alone.growth is None and not alone.survives


def test_too_little_overlap_says_so() -> None:
    rng = np.random.default_rng(1)
    named = np.zeros((40, 2), bool)
    named[np.arange(40), rng.integers(0, 2, 40)] = True
    named[:9] = True
    capture = corrected_growth(Record.from_dates(np.sort(rng.uniform(1000, 2000, 40)), present=2000, start=1000, mentions=named))
    assert not capture.estimable and "9 milestones are shared" in capture.notes[0]


def test_milestones_chosen_for_their_overlap_say_nothing_of_what_was_missed() -> None:
    # a steady rate, forgotten alike by three lists: at support two and more the forgetting must not come back as growth that survives
    for seed in range(3):
        record = _lists(seed, beta=4.0, size=300, alpha=(1.5, 1.5, 1.5))
        whole, chosen = corrected_growth(record), corrected_growth(record.only(min_support=2))
        assert whole.estimable and not whole.survives
        assert not chosen.estimable and not chosen.survives
        assert "chosen for their overlap" in chosen.notes[0]
        assert "completeness" not in analyse(record.only(min_support=2), seed=1, draws=0, replicates=99).verdict_clauses


def test_a_list_that_names_everything_is_no_obstacle() -> None:
    record = _lists(6)
    everything = record.mentions.copy()
    everything[:, 0] = True
    capture = corrected_growth(replace(record, mentions=everything))
    assert capture.estimable and capture.growth is not None and np.isfinite(capture.growth)
    assert capture.shares[0].share > 0.98


def test_completeness_and_simulation_agree_with_the_model() -> None:
    record = _lists(7, size=400)
    capture = corrected_growth(record)
    assert capture.fit is not None and capture.steady is not None
    for share in capture.shares:
        p = capture.fit.probabilities(np.array([share.age]))[0]
        assert share.share == pytest.approx(1 - np.prod(1 - p), rel=1e-9)
        assert share.low <= share.share <= share.high
    assert capture.steady.growth == 0.0
    ages, named = simulate(capture.steady, 100, rng=np.random.default_rng(1), size=300)
    assert named.any(axis=-1).all() and (np.diff(ages, axis=1) <= 0).all()
    assert ages.mean() == pytest.approx(2000 - record.best.mean(), rel=0.08)
    assert named.mean(axis=(0, 1)) == pytest.approx(record.mentions.mean(axis=0), abs=0.04)


def test_window_with_everything_in_its_last_instant() -> None:
    rng = np.random.default_rng(8)
    named = rng.random((80, 3)) < 0.6
    named[:, 0] |= ~named.any(axis=1)
    record = Record.from_dates(2000 - rng.uniform(1, 1e6, 80), present=2000, start=2000 - 1e10, mentions=named)
    sightings = Sightings.of(2000 - record.window.counted, named[record.window.index], 1e10, 1.0)
    found = fit(sightings, "log_age", interval=False)
    assert found is not None and np.isfinite(found.log_likelihood) and found.growth > 0
