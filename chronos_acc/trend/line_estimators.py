# SPDX-License-Identifier: Apache-2.0
"""Lines by other ways than least squares: least absolute deviations, the median of pairwise slopes, and exponential waiting times."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from scipy.special import ndtri

from .line_batches import exponential_slopes, median_lines

Floats = npt.NDArray[np.float64]


def median_line(x: Floats, y: Floats) -> tuple[float, float]:
    """Intercept and slope of least absolute deviations (quantile regression at one half; Koenker & Bassett 1978); the middle slope where
    several are best."""
    slope, intercept, _ = median_lines(x[None], y[None])
    return float(intercept[0]), float(slope[0])


def theil_sen_line(x: Floats, y: Floats) -> tuple[float, float, float, float]:
    """Slope, intercept (through the medians), and 95 % ends: the median of all pairwise slopes (Theil 1950), with Sen's interval (1968),
    ties allowed for."""
    i, j = np.triu_indices(len(x), 1)
    apart = x[i] != x[j]
    slopes = np.sort((y[j] - y[i])[apart] / (x[j] - x[i])[apart])
    slope = float(np.median(slopes))
    n, pairs = len(x), len(slopes)

    def ties(values: Floats) -> float:
        _, counts = np.unique(values, return_counts=True)
        return float((counts * (counts - 1.0) * (2.0 * counts + 5.0)).sum())

    variance = (n * (n - 1.0) * (2.0 * n + 5.0) - ties(x) - ties(y)) / 18.0
    z = float(ndtri(0.025))
    low = max(round((pairs + z * np.sqrt(variance)) / 2.0) - 1, 0)
    high = min(round((pairs - z * np.sqrt(variance)) / 2.0), pairs - 1)
    return slope, float(np.median(y) - slope * np.median(x)), float(slopes[low]), float(slopes[high])


def exponential_line(x: Floats, y: Floats) -> tuple[Floats, Floats]:
    """Coefficients (2,) and standard errors (2,) of ln mean t on x, y = ln t, t exponential: a log-link model of waiting times."""
    mean = float(x.mean())
    slope = float(exponential_slopes(x[None], y[None])[0])
    left = y - slope * (x - mean)
    top = float(left.max())
    centre = top + float(np.log(np.exp(left - top).mean()))
    sxx = float(((x - mean) ** 2).sum())
    errors = np.sqrt([1.0 / len(x) + mean**2 / sxx, 1.0 / sxx])
    return np.array([centre - slope * mean, slope]), np.asarray(errors)
