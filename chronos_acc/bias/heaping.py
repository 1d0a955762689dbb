# SPDX-License-Identifier: Apache-2.0
"""Heaping of digits: Whipple's index and Myers' blended index (UN 1955, Manual II; Myers 1940), for ages of people and for years alike."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]


def whipple(counts: npt.ArrayLike, *, lowest: int = 23, highest: int = 62, digits: tuple[int, ...] = (0, 5)) -> float:
    """Share of values ending in ``digits`` over that expected of even digits; 1 without heaping, 10/len(digits) where all end so.

    counts[x] is how often the value x stands. The published index is 100 times this. NaN where nothing lies between the limits.
    """
    c = np.asarray(counts, dtype=float)
    value = np.arange(len(c))
    inside = (value >= lowest) & (value <= highest)
    total = c[inside].sum()
    hit = c[inside & np.isin(value % 10, digits)].sum()
    return float(hit / total * 10 / len(digits)) if total > 0 else float("nan")


def myers(counts: npt.ArrayLike, *, lowest: int = 10, highest: int = 89) -> float:
    """Half the sum of deviations from 10 % of the blended digit shares, 0 to 90; the first sum leaves out the last decade.

    counts[x] is how often the value x stands; lowest to highest must be whole decades. NaN where nothing lies there.
    """
    c = np.asarray(counts, dtype=float)
    digit = np.arange(10)
    decades = np.arange(lowest, highest + 1, 10)
    table = np.array([[c[d + i] if d + i < len(c) else 0.0 for i in digit] for d in decades])
    first, second = table[:-1].sum(axis=0), table[1:].sum(axis=0)
    blended = first * (digit + 1) + second * (9 - digit)
    total = blended.sum()
    return float(np.abs(100 * blended / total - 10).sum() / 2) if total > 0 else float("nan")


def digit_counts(values: Floats) -> Floats:
    """(10,) how often each last digit stands among whole numbers."""
    return np.bincount(np.floor(np.abs(values)).astype(np.int64) % 10, minlength=10).astype(float)


def digit_indices(values: Floats) -> tuple[float, float]:
    """Whipple (digits 0 and 5, in hundredths) and Myers-type dissimilarity (half the sum of deviations from 10 %) of last digits.

    Years of milestones have no common bottom age from which counts would fall, so digits are counted as they stand and nothing is blended.
    """
    counts = digit_counts(values)
    total = counts.sum()
    if not total:
        return float("nan"), float("nan")
    share = counts / total
    return float((share[0] + share[5]) * 500.0), float(np.abs(100.0 * share - 10.0).sum() / 2)


def heaping_p(values: Floats, rng: np.random.Generator, size: int = 1999) -> float:
    """Upper tail of the chi-square of last digits against even digits, by simulation."""
    n = len(values)
    if not n:
        return float("nan")
    observed = ((digit_counts(values) - n / 10) ** 2).sum()
    null = ((rng.multinomial(n, np.full(10, 0.1), size=size) - n / 10) ** 2).sum(axis=1)
    return float((1 + (null >= observed - 1e-9).sum()) / (size + 1))
