# SPDX-License-Identifier: Apache-2.0
"""Results as a notebook shows them: the sentence first, then every table that has rows, escaped, numbers to six digits."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

import chronos_acc
from chronos_acc.bias import Context, run_checks
from chronos_acc.bias.grid.result import Grid
from chronos_acc.bias.result import Bias
from chronos_acc.intervals import Intervals, interval_series
from chronos_acc.notebook import ShowsInNotebook
from chronos_acc.record import Record
from chronos_acc.store.gold import GoldCheck
from chronos_acc.store.linking import LinkSummary
from chronos_acc.store.load import Loaded
from chronos_acc.trend.analysis import Trend, analyse


@pytest.mark.parametrize("kind", [Trend, Bias, Grid, Intervals, GoldCheck, Loaded, LinkSummary])
def test_results_are_of_the_kind_that_shows(kind: type) -> None:
    assert issubclass(kind, ShowsInNotebook)
    assert hasattr(kind, "tables") or hasattr(kind, "to_frame")


def test_analyses_show_sentence_and_tables() -> None:
    rng = np.random.default_rng(1)
    titles = [f"Kiln <{i}> & mill" for i in range(20)]
    record = Record.from_dates(2000 - 900 * rng.random(20) ** 2, present=2000, unit=1.0, titles=titles)
    shown = analyse(record, draws=20, replicates=19, bootstrap=19)._repr_html_()
    assert shown.startswith("<p><strong>") and "<p>rate laws</p>" in shown and "log_linear" in shown
    assert "Kiln &lt;" in shown and "Kiln <" not in shown
    checks = run_checks(Context(record, replicates=19, draws=20), ["recall_decay"])
    assert "growth as published" in checks._repr_html_() and "<table" in checks._repr_html_()
    assert interval_series(record, draws=20)._repr_html_().count("<table") == 1


def test_what_loading_and_linking_did_shows(tmp_path: Path) -> None:
    for name in ("alpha", "beta"):
        (tmp_path / f"{name}.csv").write_text("title,date\nStone bridge,1244\nSalt road,1130\n", encoding="utf-8")
    db = tmp_path / "t.duckdb"
    (first, second) = chronos_acc.load(db, [tmp_path / "alpha.csv", tmp_path / "beta.csv"], compiled=2020)
    assert "alpha" in first._repr_html_() and "beta" in second._repr_html_()
    linked = chronos_acc.link(db)
    assert linked.to_frame()["milestones"].tolist() == [2] and "pairs_scored" in linked._repr_html_()
