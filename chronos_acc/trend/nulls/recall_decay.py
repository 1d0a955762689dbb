# SPDX-License-Identifier: Apache-2.0
"""A steady rate of which compilers remember less the older it is: listed with probability 2^(-age/h), or 1/(1 + age/s)."""

from __future__ import annotations

from functools import partial

import numpy as np
import numpy.typing as npt

from ...errors import WrongUse
from ...record import Window
from ..null_model import Null, kept_ends

Floats = npt.NDArray[np.float64]

QUESTION = "Would a steady rate, partly forgotten with age, give this?"


def _exponential(window: Window, rng: np.random.Generator, size: int, *, half_life: float) -> Floats:
    v = rng.random((size, window.n))
    rate = np.log(2) / half_life
    return _placed(window, -np.log1p(v * np.expm1(-rate * window.span)) / rate)


def _power(window: Window, rng: np.random.Generator, size: int, *, scale: float) -> Floats:
    v = rng.random((size, window.n))
    return _placed(window, scale * np.expm1(v * np.log1p(window.span / scale)))


def _placed(window: Window, ages: Floats) -> Floats:
    ages = np.minimum(ages, window.span)
    ages.sort(axis=1)
    size = len(ages)
    opening = np.full((size, window.opening), window.start)
    closing = np.full((size, window.closing), window.present)
    return np.concatenate([opening, window.present - ages[:, ::-1], closing], axis=1)


def recall_decay(*, half_life: float | None = None, scale: float | None = None, fitted: bool = False) -> Null:
    """The null of forgetting with a half-life (exponential) or a scale (power), in years, exactly one of them; ``fitted`` where the record
    gave it."""
    if (half_life is None) == (scale is None):
        raise WrongUse("recall_decay takes a half_life or a scale, in years")
    how = "fitted" if fitted else "given"
    if half_life is not None:
        if not (half_life > 0 and np.isfinite(half_life)):
            raise WrongUse(f"a half-life of {half_life:g} years is not above zero")
        make, setting = partial(_exponential, half_life=half_life), f"half-life {half_life:.4g} years, {how}"
    else:
        if scale is None or not (scale > 0 and np.isfinite(scale)):
            raise WrongUse(f"a scale of {scale} years is not above zero")
        make, setting = partial(_power, scale=scale), f"1/(1 + age/{scale:.4g} years), {how}"
    return Null("recall_decay", QUESTION, make, kept_ends, setting=setting, fitted=fitted)
