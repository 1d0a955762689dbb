# SPDX-License-Identifier: Apache-2.0
"""Lines by other ways than least squares: least absolute deviations, the median of pairwise slopes, and exponential waiting times."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from scipy.special import ndtri

Floats = npt.NDArray[np.float64]


def median_line(x: Floats, y: Floats) -> tuple[float, float]:
    """Intercept and slope of least absolute deviations (quantile regression at one half; Koenker & Bassett 1978), by linear programming."""
    from scipy import sparse
    from scipy.optimize import linprog

    n = len(x)
    centre, scale = float(x.mean()), float(np.abs(x - x.mean()).max())
    z = (x - centre) / scale
    unit = sparse.identity(n, format="csc")
    design = sparse.hstack([sparse.csc_matrix(np.column_stack([np.ones(n), z])), unit, -unit], format="csc")
    cost = np.concatenate([[0.0, 0.0], np.ones(2 * n)])
    found = linprog(cost, A_eq=design, b_eq=y, bounds=[(None, None)] * 2 + [(0, None)] * (2 * n), method="highs-ds")
    intercept, slope = float(found.x[0]), float(found.x[1])
    # the solution passes through two points: take them exactly
    near = np.argsort(np.abs(y - intercept - slope * z), kind="stable")
    apart = near[np.abs(z[near] - z[near[0]]) > 1e-9]
    i, j = near[0], apart[0]
    exact = float((y[j] - y[i]) / (z[j] - z[i]))
    if np.abs(y - y[i] - exact * (z - z[i])).sum() <= np.abs(y - intercept - slope * z).sum() * (1 + 1e-9):
        slope, intercept = exact, float(y[i] - exact * z[i])
    return intercept - slope * centre / scale, slope / scale


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


def exponential_line(x: Floats, interval: Floats) -> tuple[Floats, Floats]:
    """Coefficients (2,) and standard errors (2,) of ln mean interval on x, intervals exponential (a log-link GLM), by Newton steps."""
    design = np.column_stack([np.ones(len(x)), x - x.mean()])
    beta = np.linalg.lstsq(design, np.log(interval) + 0.5772156649015329, rcond=None)[0]

    def value(b: Floats) -> float:
        eta = design @ b
        return float((eta + interval * np.exp(-eta)).sum())

    here = value(beta)
    for _ in range(100):
        ratio = interval * np.exp(-(design @ beta))
        step = np.linalg.solve((design * ratio[:, None]).T @ design, design.T @ (ratio - 1.0))
        size = 1.0
        while value(beta + size * step) > here and size > 1e-10:
            size /= 2
        beta = beta + size * step
        here = value(beta)
        if np.abs(step).max() < 1e-13 * (1 + np.abs(beta).max()):
            break
    covariance = np.linalg.inv(design.T @ design)
    shift = np.array([[1.0, -float(x.mean())], [0.0, 1.0]])
    return shift @ beta, np.sqrt(np.diag(shift @ covariance @ shift.T))
