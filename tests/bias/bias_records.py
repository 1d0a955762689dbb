# SPDX-License-Identifier: Apache-2.0
"""Records with a known truth, made for the tests of the checks."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from chronos_acc.record import Record

Floats = npt.NDArray[np.float64]


def log_linear_ages(rng: np.random.Generator, n: int, growth: float, span: float) -> Floats:
    """Ages of n events whose rate grows by ``growth`` (times window) over the window."""
    x = rng.random(n)
    return span * (1.0 - (np.log1p(x * np.expm1(growth)) / growth if growth else x))


def listed(
    rng: np.random.Generator,
    *,
    truth: int,
    span: float = 1000.0,
    growth: float = 0.0,
    half_life: float | None = None,
    lists: int = 4,
    chance: float = 0.5,
    unit: float = 1.0,
) -> Record:
    """Lists that name each of ``truth`` milestones independently with a chance halved every ``half_life`` years of age."""
    ages = log_linear_ages(rng, truth, growth, span)
    p = chance * (np.exp2(-ages / half_life) if half_life else np.ones(truth))
    named = rng.random((truth, lists)) < p[:, None]
    seen = named.any(axis=1)
    return Record.from_dates(2000.0 - ages[seen], present=2000.0, start=2000.0 - span, mentions=named[seen], unit=unit)


def plain(rng: np.random.Generator, n: int, growth: float = 0.0, span: float = 1000.0, start: bool = True) -> Record:
    """One list of n milestones."""
    return Record.from_dates(
        2000.0 - log_linear_ages(rng, n, growth, span), present=2000.0, start=2000.0 - span if start else None, unit=1.0
    )
