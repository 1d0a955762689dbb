# SPDX-License-Identifier: Apache-2.0
"""The Python steps give what the commands give."""

from __future__ import annotations

from chronos_acc import steps
from chronos_acc.progress import silent
from chronos_acc.store import decisions


def test_decisions_reach_the_checks_from_python_too(tmp_path):
    (tmp_path / "a.csv").write_text("title,date\nSalt road over the pass,1210\nBell tower,1502\nMill,1600\n")
    (tmp_path / "b.csv").write_text("title,date\nSilver mine at the ford,1211\nBridge,1503\nKiln,1700\n")
    db = tmp_path / "t.duckdb"
    steps.load(db, [tmp_path / "a.csv", tmp_path / "b.csv"], compiled=2020)
    assert steps._context(db, 1, 10, silent).decisions == ()
    decisions.decide(db, 1, 4, "same", who="tester")
    steps.link(db)
    (found,) = steps._context(db, 1, 10, silent).decisions
    assert (found.a, found.b, found.verdict) == (1, 4, "same")
