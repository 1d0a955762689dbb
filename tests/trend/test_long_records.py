# SPDX-License-Identifier: Apache-2.0
"""Records of thousands: every part works in pieces of bounded size and says where it made fewer null records or draws."""

from __future__ import annotations

from time import process_time

import numpy as np
import pytest

from chronos_acc.record import Record
from chronos_acc.trend import null_table as tables
from chronos_acc.trend import studies
from chronos_acc.trend.analysis import analyse
from chronos_acc.trend.nulls import STEADY
from chronos_acc.trend.regressions import regress


def _long(n: int, lists: int = 3) -> Record:
    rng = np.random.default_rng(n)
    dates = np.sort(2000 + 1000 * np.log1p(rng.random(n) * np.expm1(-2)) / 2)
    named = rng.random((n, lists)) < 0.6
    named[:, 0] |= ~named.any(axis=1)
    return Record.from_dates(dates, present=2000, unit=0.5, mentions=named)


def test_seven_hundred_milestones_are_analysed_whole() -> None:
    before = process_time()
    trend = analyse(_long(700), draws=50, replicates=99, bootstrap=19)
    assert process_time() - before < 12
    assert trend.verdict_code in ("forgetting", "shape") and trend.capture.estimable
    assert {r.estimator for r in trend.regressions.rows} == {"ols_hc3", "ols_hac", "median", "glm", "draws"}
    assert all(r["null_median"] is not None for r in trend.to_dict()["regressions"])
    assert any("reverse_arrangements stands among the tests only" in n for n in trend.notes)


def test_null_records_come_in_pieces_and_fewer_of_them() -> None:
    record = _long(5000, lists=1)
    assert tables.records_for(record.window, 1999) == 400 and tables.records_for(_long(1000).window, 1999) == 1999
    assert tables.records_for(_long(20_000, 1).window, 1999) == tables.FEWEST_RECORDS == 199
    sizes = [t.size for t in tables.null_times_in_chunks(record, STEADY, seed=1, replicates=199)]
    assert max(sizes) <= tables.HELD_CELLS and sum(sizes) == 199 * 5000
    found = regress(record.window, record=record, draws=2000, predictors=("log10_age",))
    assert any("400 draws instead of 2,000" in n for n in found.notes) and found.row(estimator="draws") is not None
    assert found.row(estimator="median") is not None


def test_lists_compared_in_pieces_are_those_compared_at_once(monkeypatch: pytest.MonkeyPatch) -> None:
    record = _long(120)
    whole = studies.lists_as_studies(record, seed=1, replicates=99)
    monkeypatch.setattr(studies, "HELD_CELLS", 1000)
    assert studies.lists_as_studies(record, seed=1, replicates=99) == whole and whole.pooled
