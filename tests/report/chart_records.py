# SPDX-License-Identifier: Apache-2.0
"""Records that the chart tests draw."""

from __future__ import annotations

import numpy as np

from chronos_acc.record import Record


def several_lists(seed: int = 3, n: int = 60, span: float = 3000.0, present: float = 2020.0) -> Record:
    """n milestones of a steady past over ``span`` years that three lists forget; two lists are named independently."""
    rng = np.random.default_rng([seed, 1])
    ages = np.sort(rng.random(20 * n) * span)
    named = rng.random((len(ages), 3)) < np.array([0.9, 0.8, 0.4]) * 2.0 ** (-ages[:, None] / 500.0)
    keep = np.nonzero(named.any(axis=1))[0][:: max(1, int(named.any(axis=1).sum()) // n)]
    return Record.from_dates(
        present - ages[keep], present=present, unit=1.0, mentions=named[keep], lists=["annals", "museum", "school"],
        titles=[f"event {i}" for i in range(len(keep))],
    )  # fmt: skip


def log_uniform(seed: int = 5, n: int = 30, oldest: float = 2e9, youngest: float = 5.0, present: float = 2020.0) -> Record:
    """n milestones picked evenly per log age."""
    rng = np.random.default_rng([seed, 2])
    ages = np.exp(rng.uniform(np.log(youngest), np.log(oldest), n))
    return Record.from_dates(present - ages, present=present, unit=0.02 * ages)
