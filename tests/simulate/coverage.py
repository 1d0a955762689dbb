# SPDX-License-Identifier: Apache-2.0
"""How often the 95 % intervals of laws and exponents hold the truth: `python -m tests.simulate.coverage [records]`. Prints Markdown
tables.
"""

from __future__ import annotations

import sys

import numpy as np

from chronos_acc.trend.age_exponent import exponents
from chronos_acc.trend.curves import hyperbolic, log_linear, power_law
from chronos_acc.trend.curves.curve import log_ratio_interval
from chronos_acc.trend.rate_laws import CHI2_95, dispersion, robust_critical

from .renewal import SPACINGS, records

SIZES = (10, 30, 100)


def uniforms(n: int, count: int, rng: np.random.Generator) -> tuple[np.ndarray, np.ndarray]:
    """Sorted uniforms and one minus them."""
    u = np.sort(rng.random((count, n)), axis=1)
    return u, 1 - u


def growth(doublings: float, n: int, count: int, rng: np.random.Generator) -> float:
    """Share of profile intervals of growth that hold it."""
    k = doublings * np.log(2)
    x, v = log_linear.quantile(np.full((count, 1), k), *uniforms(n, count, rng))
    _, low, high = log_linear.profile(v.mean(axis=1), x.mean(axis=1), n, CHI2_95)
    return float(((low <= k) & (k <= high)).mean())


def robust_growth(spacing: str, doublings: float, n: int, count: int, rng: np.random.Generator) -> tuple[float, float, float]:
    """Shares of intervals of growth that hold it on renewal records: Poisson, robust, and the wider of the two."""
    k = doublings * np.log(2)
    found, made = np.zeros(3), 0
    for x in records(spacing, n, k, count, rng):
        if len(x) < 5:
            continue
        v = 1 - x
        age, position = v.mean(), x.mean()
        best = log_linear.growth(age, position)
        ratio = float(dispersion(*log_linear.cumulative(np.array([float(best)]), x, v), False, False))
        fall = (
            2 * len(x) * (log_linear.mean_log_density(best, age, position) - log_linear.mean_log_density(np.asarray(k), age, position))
        )
        robust = robust_critical(ratio, len(x), len(x) - 1)
        found += [fall <= CHI2_95, fall <= robust, fall <= max(CHI2_95, robust)]
        made += 1
    return tuple(found / made)


def age_exponent(s: float, n: int, count: int, rng: np.random.Generator, decades: float = 6.0) -> float:
    """Share of profile intervals of the age exponent that hold it: n ages with density a^(-s) over ``decades``, the outermost two
    among them.
    """
    length = decades * np.log(10)
    _, v = log_linear.quantile(np.full((count, 1), -(1 - s) * length), *uniforms(n, count, rng))
    _, low, high = exponents(np.exp(v * length))
    return float(((low <= s) & (s <= high)).mean())


def exponent(b: float, n: int, count: int, rng: np.random.Generator) -> float:
    """Share of profile intervals of the power law's exponent that hold it, start given."""
    x, v = power_law.quantile(np.full((count, 1), b), *uniforms(n, count, rng))
    low, high = log_ratio_interval(n, CHI2_95)
    best = power_law.estimate(x, v)[:, 0]
    return float(((best * low <= b) & (b <= best * high)).mean())


def t_star(sigma: float, n: int, count: int, rng: np.random.Generator) -> tuple[float, float]:
    """Share of profile intervals of t_star that hold it, and share without an upper end; t_star lies ``sigma`` windows after the
    present.
    """
    tau = np.log(sigma)
    x, v = hyperbolic.quantile(np.full((count, 1), tau), *uniforms(n, count, rng))
    low, high = hyperbolic.profile(hyperbolic.estimate(x, v)[:, 0], v, CHI2_95)
    return float(((low <= tau) & (tau <= high)).mean()), float(np.isinf(high).mean())


def main(count: int) -> None:
    """All tables."""
    rng = np.random.default_rng(21)
    head = "| " + " | ".join(f"n = {n}" for n in SIZES) + " |\n|---|---|---|---|"
    print(f"Profile intervals, {count} records each, % that hold the truth\n\n| parameter {head}")
    for d in (0, 1, 2, 4, 8, 50):
        print(f"| growth, {d} doublings | " + " | ".join(f"{100 * growth(d, n, count, rng):.1f}" for n in SIZES) + " |")
    for s in (0.0, 0.5, 1.0, 1.5):
        print(f"| age exponent {s} | " + " | ".join(f"{100 * age_exponent(s, n, count, rng):.1f}" for n in SIZES) + " |")
    for b in (0.5, 1.0, 2.0, 4.0):
        print(f"| power_law exponent {b} | " + " | ".join(f"{100 * exponent(b, n, count, rng):.1f}" for n in SIZES) + " |")
    for sigma in (0.001, 0.02, 0.1, 0.5, 2.0):
        cells = [t_star(sigma, n, count, rng) for n in SIZES]
        print(f"| t_star {sigma} windows ahead (unbounded) | " + " | ".join(f"{100 * a:.1f} ({100 * b:.0f})" for a, b in cells) + " |")
    few = max(count // 3, 100)
    print(f"\nGrowth on renewal records, {few} each, %: Poisson / robust / the wider\n\n| spacing, doublings {head}")
    for spacing in SPACINGS:
        for d in (0, 2):
            cells2 = [robust_growth(spacing, d, n, few, rng) for n in SIZES]
            print(f"| {spacing}, {d} | " + " | ".join(" / ".join(f"{100 * c:.1f}" for c in cell) for cell in cells2) + " |")


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 10_000)
