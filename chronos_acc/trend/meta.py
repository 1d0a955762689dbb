# SPDX-License-Identifier: Apache-2.0
"""Pooling a few studies: random effects with an interval that holds for few of them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.special import chdtrc, stdtr, stdtrit

from ..errors import WrongUse
from .least_squares import line

Floats = npt.NDArray[np.float64]

PREDICT_FROM = 5  # studies from which a prediction interval is given
FUNNEL_FROM = 10  # and from which small-study effects can be tested


@dataclass(frozen=True)
class Pooled:
    """Random-effects mean of k studies: tau2 by Paule and Mandel (1982), interval by Hartung and Knapp (2001) with k - 1 degrees of
    freedom.

    q and q_p: Cochran's test of equal effects; i2 the share of variance between studies (from q, 0 to 1); prediction interval from five
    studies on, funnel_p (Egger et al. 1997) from ten; else None.
    """

    k: int
    mean: float
    std_error: float
    low: float
    high: float
    tau2: float
    q: float
    q_p: float
    i2: float
    prediction_low: float | None
    prediction_high: float | None
    funnel_p: float | None


def paule_mandel(values: Floats, variances: Floats) -> float:
    """Between-study variance at which the weighted sum of squares equals k - 1; zero where it is below that already."""

    def excess(tau2: float) -> float:
        w = 1.0 / (variances + tau2)
        return float((w * (values - np.average(values, weights=w)) ** 2).sum()) - (len(values) - 1)

    if excess(0.0) <= 0:
        return 0.0
    from scipy.optimize import brentq

    high = float(values.var() + variances.max())
    while excess(high) > 0:
        high *= 4
    return float(brentq(excess, 0.0, high, xtol=1e-15 * high, rtol=8.9e-16))


def pooled(values: Floats, std_errors: Floats) -> Pooled:
    """Pool estimates (k,) with standard errors (k,), k at least 2."""
    k = len(values)
    if k < 2:
        raise WrongUse(f"{k} study cannot be pooled; at least two are needed")
    variances = std_errors**2
    fixed = 1.0 / variances
    q = float((fixed * (values - np.average(values, weights=fixed)) ** 2).sum())
    tau2 = paule_mandel(values, variances)
    w = 1.0 / (variances + tau2)
    mean = float(np.average(values, weights=w))
    spread = float((w * (values - mean) ** 2).sum()) / (k - 1)
    error = float(np.sqrt(spread / w.sum()))
    half = float(stdtrit(k - 1, 0.975)) * error
    prediction = None
    if k >= PREDICT_FROM:
        prediction = float(stdtrit(k - 2, 0.975)) * float(np.sqrt(tau2 + error**2))
    return Pooled(
        k,
        mean,
        error,
        mean - half,
        mean + half,
        tau2,
        q,
        float(chdtrc(k - 1, q)),
        max(0.0, 1.0 - (k - 1) / q) if q > 0 else 0.0,
        None if prediction is None else mean - prediction,
        None if prediction is None else mean + prediction,
        _funnel(values, std_errors),
    )


def _funnel(values: Floats, errors: Floats) -> float | None:
    """p of the intercept of standardised effect on precision: estimates that differ with their own size of error."""
    if len(values) < FUNNEL_FROM or np.ptp(errors) == 0:
        return None
    fit = line(1.0 / errors, values / errors)
    error = float(fit.plain()[0])
    return float(2 * stdtr(len(values) - 2, -abs(float(fit.coefficients[0]) / error))) if error > 0 else None
