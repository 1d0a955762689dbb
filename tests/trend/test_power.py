# SPDX-License-Identifier: Apache-2.0
"""Power: known figures, size at no growth, and the smallest growth that shows."""

from __future__ import annotations

import numpy as np
import pytest

from chronos_acc.errors import WrongUse
from chronos_acc.trend.power import laplace_power, power, smallest_shown


@pytest.mark.parametrize(("n", "expected"), [(10, (0.10, 0.24, 0.66)), (30, (0.19, 0.58, 0.99)), (100, (0.52, 0.98, 1.00))])
def test_power_of_laplace(n: int, expected: tuple[float, ...]) -> None:
    assert [laplace_power(n, d) for d in (1.0, 2.0, 4.0)] == pytest.approx(expected, abs=0.03)


def test_every_test_has_its_size_without_growth_and_more_power_with_more() -> None:
    result = power(20, doublings=(0.0, 2.0, 5.0), replicates=1500)
    table = {(r.test, r.doublings): r for r in result.rows}
    tests = ("laplace", "mil_hdbk_189", "anderson_darling", "reverse_arrangements", "lewis_robinson")
    for test in tests:
        assert table[test, 0.0].power == pytest.approx(0.05, abs=0.02)
        assert table[test, 0.0].power < table[test, 2.0].power < table[test, 5.0].power
        assert table[test, 2.0].low < table[test, 2.0].power < table[test, 2.0].high
    assert table["verdict", 2.0].power <= table["laplace", 2.0].power
    assert list(result.to_frame().columns) == ["test", "doublings", "n", "power", "low", "high"]


def test_slowing_is_found_like_speeding() -> None:
    rows = {(r.test, r.doublings): r.power for r in power(30, doublings=(-3.0, 3.0), replicates=800).rows}
    assert rows["laplace", -3.0] == pytest.approx(rows["laplace", 3.0], abs=0.06)


def test_same_seed_same_numbers_and_small_lists() -> None:
    assert power(5, replicates=50) == power(5, replicates=50)
    assert {r.test for r in power(1, replicates=50).rows} == {"laplace", "mil_hdbk_189", "anderson_darling"}
    with pytest.raises(WrongUse, match="at least 1"):
        power(0)


def test_smallest_growth_that_shows() -> None:
    assert smallest_shown(0) is None
    values = [smallest_shown(n) for n in (4, 7, 20, 50)]
    assert all(v is not None for v in values)
    assert np.all(np.diff(np.array(values, dtype=float)) < 0)
    assert laplace_power(7, float(values[1] or 0.0)) == pytest.approx(0.8, abs=0.03)
