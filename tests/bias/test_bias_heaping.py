# SPDX-License-Identifier: Apache-2.0
import numpy as np
import pytest

from chronos_acc.bias.heaping import digit_indices, heaping_p, myers, whipple

# Males by single year of age 0 to 99, sheet SINGAGE of the US Census Bureau's Population Analysis Spreadsheets (Arriaga 1994)
SINGAGE = """
80626 95823 104315 115813 100796 105086 97266 116328 75984 89982 95525 56973 78767 65672 53438 85014 47600 64363 42195
42262 73221 30080 34391 29072 20531 66171 24029 44227 24128 23599 82088 16454 22628 17108 12531 57325 17220 28425 16206
17532 65976 11593 15828 13541 8133 44696 11165 18543 12614 12041 55798 9324 10772 10453 6773 28358 9916 13348 8039 7583
42470 5288 5317 6582 3361 17949 3650 5873 3279 3336 27368 1965 2495 2319 1335 12022 1401 1668 1360 1185 9167 424 568 462
282 6206 343 409 333 291 4137 133 169 157 89 2068 68 81 66 57
"""
COUNTS = [int(x) for x in SINGAGE.split()]


def test_whipple_on_the_census_sheet():
    """Printed as 2.33873 in the rendered documentation of a demographic package for this sheet (check_heaping_whipple)."""
    assert len(COUNTS) == 100
    assert whipple(COUNTS) == pytest.approx(2.33873, abs=5e-6)
    assert whipple(COUNTS, digits=(0,)) == pytest.approx(2.601614, abs=5e-7)


def test_myers_on_the_census_sheet():
    """23.62787 on the 0 to 90 scale, the first sum without the last decade (same documentation, check_heaping_myers)."""
    assert myers(COUNTS) == pytest.approx(23.62787, abs=5e-6)


def test_limits():
    """Flat: 100 and 0; only 0 and 5: 500; one digit: 90."""
    flat = np.ones(100)
    assert whipple(flat) == pytest.approx(1.0) and myers(flat) == pytest.approx(0.0, abs=1e-9)
    fives = np.where(np.arange(100) % 5 == 0, 1.0, 0.0)
    assert whipple(fives) == pytest.approx(5.0)
    assert myers(np.where(np.arange(100) % 10 == 3, 1.0, 0.0)) == pytest.approx(90.0)
    assert np.isnan(whipple([])) and np.isnan(myers(np.zeros(100)))


def test_last_digits_of_years():
    rng = np.random.default_rng(1)
    even = rng.integers(1000, 2000, 400).astype(float)
    w, m = digit_indices(even)
    assert 80 < w < 120 and m < 12 and heaping_p(even, rng) > 0.01
    round_years = np.floor(even / 5) * 5
    w, m = digit_indices(round_years)
    assert w == pytest.approx(500.0) and heaping_p(round_years, rng) == pytest.approx(1 / 2000)
    assert digit_indices(np.array([-45.0, -44.0]))[0] == pytest.approx(250.0)  # digits of the number as written
