# SPDX-License-Identifier: Apache-2.0
"""The log-linear rate, a·exp(growth·t) (Cox and Lewis 1966): the rate doubles every ln 2/growth years.

theta is k = growth × window. The likelihood of one record depends on its mean age alone, so that the estimate has the closed form
1/k - 1/(exp(k) - 1) = mean age, and the profile interval is one-dimensional.
"""

from __future__ import annotations

import numpy as np

from ..kernels import growth_of_mean_age
from .curve import Curve, Floats, Interval, Place, Value, bisect


def growth(mean_age: Floats, mean_position: Floats) -> Floats:
    """k for mean ages and mean positions (...), each as exact as it is small."""
    speeding = mean_age <= 0.5
    return np.where(speeding, 1.0, -1.0) * growth_of_mean_age(np.where(speeding, mean_age, mean_position))


def log_scale(k: Floats) -> Floats:
    """ln(|k|/(1 - exp(-|k|))), the log density at the busier end of the window."""
    size = np.abs(k)
    small = size < 1e-2
    safe = np.where(small, 1.0, size)
    return np.where(small, size / 2.0 - size**2 / 24.0 + size**4 / 2880.0, np.log(safe) - np.log(-np.expm1(-safe)))


def mean_log_density(k: Floats, mean_age: Floats, mean_position: Floats) -> Floats:
    """Log-likelihood per event on the unit window: concave in k."""
    return np.asarray(log_scale(k) - np.abs(k) * np.where(k >= 0, mean_age, mean_position))


def profile(mean_age: Floats, mean_position: Floats, n: Floats | int, critical: Floats | float) -> tuple[Floats, Floats, Floats]:
    """Estimate of k and the ends between which twice the log-likelihood falls by less than ``critical``, for many records at once."""
    age, position = np.asarray(mean_age, dtype=float), np.asarray(mean_position, dtype=float)
    best = growth(age, position)
    top = mean_log_density(best, age, position)
    fall = np.broadcast_to(np.asarray(critical, dtype=float) / (2.0 * np.asarray(n, dtype=float)), best.shape)

    def over(k: Floats) -> np.ndarray[tuple[int, ...], np.dtype[np.bool_]]:
        return np.asarray(top - mean_log_density(k, age, position) > fall)

    ends = []
    for side in (-1.0, 1.0):
        reach = np.maximum(1.0, 0.1 * np.abs(best))
        for _ in range(400):
            beyond = over(best + side * reach)
            if beyond.all():
                break
            reach = np.where(beyond, reach, 2.0 * reach)
        ends.append(bisect(over, best, best + side * reach))
    return best, ends[0], ends[1]


def estimate(x: Floats, v: Floats) -> Floats:
    """k (..., 1)."""
    return growth(v.mean(axis=-1), x.mean(axis=-1))[..., None]


def log_density(theta: Floats, x: Floats, v: Floats) -> Floats:
    """Log density at each position."""
    k = theta[..., :1]
    return np.asarray(log_scale(k) - np.abs(k) * np.where(k >= 0, v, x))


def cumulative(theta: Floats, x: Floats, v: Floats) -> tuple[Floats, Floats]:
    """(exp(kx) - 1)/(exp(k) - 1) and its rest, without overflow for either sign."""
    k = theta[..., :1]
    size = np.abs(k)
    near, far = np.where(k >= 0, v, x), np.where(k >= 0, x, v)  # distance from the busier end, and from the other
    flat = size < 1e-12
    safe = np.where(flat, 1.0, size)
    whole = np.expm1(-safe)
    inner = np.where(flat, near, np.expm1(-safe * near) / whole)
    outer = np.where(flat, far, np.exp(-safe * near) * np.expm1(-safe * far) / whole)
    return np.where(k >= 0, outer, inner), np.where(k >= 0, inner, outer)


def quantile(theta: Floats, u: Floats, c: Floats) -> tuple[Floats, Floats]:
    """Positions at cumulated shares."""
    k = theta[..., :1]
    size = np.abs(k)
    flat = size < 1e-12
    safe = np.where(flat, 1.0, size)
    share, other = np.where(k >= 0, c, u), np.where(k >= 0, u, c)
    logs = np.where(share < 0.5, np.log1p(share * np.expm1(-safe)), np.log(other + share * np.exp(-safe)))
    near = np.where(flat, share, -logs / safe)
    near = np.clip(near, 0.0, 1.0)
    return np.where(k >= 0, 1.0 - near, near), np.where(k >= 0, near, 1.0 - near)


def natural(theta: Floats, place: Place) -> dict[str, Value]:
    """Growth per year."""
    return {"growth": float(theta[0]) / place.span}


def interval(theta: Floats, x: Floats, v: Floats, place: Place, critical: float) -> dict[str, Interval]:
    """Profile interval of the growth per year; always bounded."""
    _, low, high = profile(v.mean(axis=-1), x.mean(axis=-1), place.n, critical)
    return {"growth": (float(low) / place.span, float(high) / place.span)}


def same_curve(parameters: dict[str, Value], place: Place) -> str | None:
    """A steady rate half forgotten every doubling time."""
    rate = parameters["growth"]
    if rate is None or rate <= 0:
        return None
    years = f"{np.log(2.0) / rate:.4g} years"
    return f"recall_decay: a steady rate of which half is forgotten every {years} of age (steady × 2^(−age/h), h = doubling time)"


CURVE = Curve(
    name="log_linear",
    parameters=("growth",),
    k=2,
    regular=True,
    formula="a·exp(growth·t)",
    estimate=estimate,
    log_density=log_density,
    cumulative=cumulative,
    quantile=quantile,
    natural=natural,
    interval=interval,
    same_curve=same_curve,
)
