# SPDX-License-Identifier: Apache-2.0
"""How often each test calls a trend where there is none: `python -m tests.simulate.size [records]`. Prints Markdown tables; nominal
5 %.
"""

from __future__ import annotations

import sys

import numpy as np

from chronos_acc.record import Record
from chronos_acc.trend import kernels
from chronos_acc.trend.curves import CURVES, hyperbolic, step
from chronos_acc.trend.exact_laws import reversal_law
from chronos_acc.trend.positions import positions
from chronos_acc.trend.rate_laws import _fit_p, fit_curve, null_step_ratios
from chronos_acc.trend.trend_tests import STEADY, UPPER_TAIL, _steady_statistics, run_tests, steady_null

from .renewal import SPACINGS, records

SIZES = (10, 30, 100)


def monte_carlo_p(values: np.ndarray, null: np.ndarray, upper_tail: bool) -> np.ndarray:
    """p of many records against one set of null draws."""
    ordered = np.sort(null)
    above = 1 + len(null) - np.searchsorted(ordered, values, side="left")
    if upper_tail:
        return above / (len(null) + 1)
    below = 1 + np.searchsorted(ordered, values, side="right")
    return np.minimum(1.0, 2.0 * np.minimum(above, below) / (len(null) + 1))


def two_sided_reversal_p(r: int) -> np.ndarray:
    """Exact two-sided p of 0, 1, ... reversals among r intervals."""
    law = reversal_law(r)
    return np.minimum(1.0, 2.0 * np.minimum(np.cumsum(law), np.cumsum(law[::-1])[::-1]))


def steady_sizes(n: int, count: int, rng: np.random.Generator, replicates: int = 1999) -> dict[str, float]:
    """Shares rejected at 5 % among steady records of n events: the steady family against its cached null, and exact reversals."""
    u = np.sort(rng.random((count, n)), axis=1)
    statistics, null = _steady_statistics(u, 1 - u), steady_null(n, 1, replicates)
    out = {
        name: float((monte_carlo_p(statistics[:, i], null[:, i], name in UPPER_TAIL) < 0.05).mean()) for i, name in enumerate(STEADY)
    }
    counts = kernels.reversals(np.diff(u, axis=1)).astype(int)
    out["reverse_arrangements"] = float((two_sided_reversal_p(n - 1)[counts] < 0.05).mean())
    return out


def lewis_robinson_size(spacing: str, n: int, count: int, rng: np.random.Generator, replicates: int = 399) -> tuple[float, float]:
    """Shares rejected by permutation and by the asymptotic p among trend-free records of a given spacing, n events expected."""
    rejected, asymptotic, made = 0, 0, 0
    for x in records(spacing, n, 0.0, count, rng):
        if len(x) < 5:
            continue
        gaps = np.diff(x)
        order = np.argsort(rng.random((replicates, len(gaps))), axis=1)
        null = (x[0] * len(x) + np.cumsum(gaps[order], axis=1).sum(axis=1)) / len(x)
        value = x.mean()
        p = 2 * min(1 + (null >= value - 1e-12).sum(), 1 + (null <= value + 1e-12).sum()) / (replicates + 1)
        rejected += p < 0.05
        asymptotic += abs(kernels.laplace(x) / kernels.variation(gaps)) > 1.959964
        made += 1
    return rejected / made, asymptotic / made


def any_rejection(n: int, count: int, rng: np.random.Generator) -> tuple[float, float]:
    """Shares of steady records in which any adjusted p is below 5 %: step-down, and Holm."""
    found = np.zeros(2)
    for _ in range(count):
        rows = run_tests(Record.from_dates(rng.random(n), start=0, present=1).window, seed=1, replicates=399).rows
        found += [min(r.p_adjusted for r in rows) < 0.05, min(r.p_holm for r in rows) < 0.05]
    return float(found[0] / count), float(found[1] / count)


def dated_to_the_year(count: int, rng: np.random.Generator) -> dict[str, float]:
    """100 events in 100 years dated to the year: shares called speeding by reversals, ties counting nothing, and counting half."""
    years = np.floor(np.sort(rng.random((count, 100)), axis=1) * 100)
    gaps = np.diff(years, axis=1)
    out = {}
    for name, ties in (("strict", 0.0), ("half", 0.5)):
        counted = kernels.reversals(gaps, ties)
        if name == "strict":
            out[name] = float((np.cumsum(reversal_law(99))[counted.astype(int)] < 0.025).mean())
        else:
            order = np.argsort(rng.random((199, 99)), axis=1)
            p = [
                (1 + (kernels.reversals(row[order], ties) <= value).sum()) / 200
                for row, value in zip(gaps[:150], counted[:150], strict=True)
            ]
            out[name] = float((np.array(p) < 0.025).mean())
    return out


THETA = {"steady": (), "log_linear": (2.77,), "power_law": (2.0,), "hyperbolic": (-2.5,), "step": (0.5, 0.3)}


def fit_sizes(n: int, count: int, rng: np.random.Generator, replicates: int = 199) -> dict[str, tuple[float, float] | None]:
    """Shares of records simulated under each law in which its own fit is refused: by shape, by clustering."""
    out: dict[str, tuple[float, float] | None] = {}
    for i, curve in enumerate(CURVES):
        if curve.name == "step" and n < 20:
            out[curve.name] = None
            continue
        found = np.zeros(2)
        theta = np.array(THETA[curve.name])
        for j in range(count):
            u = np.sort(rng.random(n))
            _, v = curve.quantile(theta, u, 1 - u)
            events = positions(Record.from_dates(1 - v, start=0, present=1).window)
            fit = fit_curve(curve, events)
            assert fit is not None
            shape, clustering = _fit_p(fit, events, j, replicates, i)
            found += [shape < 0.05, clustering < 0.05]
        out[curve.name] = (found[0] / count, found[1] / count)
    return out


def ratio_sizes(n: int, count: int, rng: np.random.Generator) -> tuple[float, float, float, float | None]:
    """Steady records: share in which the boundary ratio refuses steady for hyperbolic, its 95 % point, the 95 % point of the step's
    ratio, the step's size.
    """
    u = np.sort(rng.random((count, n)), axis=1)
    tau = hyperbolic.estimate(u, 1 - u)[..., 0]
    ratio = 2 * n * hyperbolic.mean_log_density(tau, 1 - u)
    if n < 20:
        return float((ratio > 2.7055).mean()), float(np.quantile(ratio, 0.95)), float("nan"), None
    steps = 2 * step.likelihood_gain(step.estimate(u, 1 - u), n)
    p = monte_carlo_p(steps, null_step_ratios(n, 1, 1999), True)
    return float((ratio > 2.7055).mean()), float(np.quantile(ratio, 0.95)), float(np.quantile(steps, 0.95)), float((p < 0.05).mean())


def percent(value: float | None) -> str:
    """A share as a person reads it."""
    return "–" if value is None else f"{100 * value:.1f}"


def table(title: str, first: str, rows: dict[str, list[str]], columns: tuple[str, ...] = tuple(f"n = {n}" for n in SIZES)) -> None:
    """One Markdown table."""
    print(f"\n{title}\n\n| {first} | " + " | ".join(columns) + " |\n|" + "---|" * (len(columns) + 1))
    for name, cells in rows.items():
        print(f"| {name} | " + " | ".join(cells) + " |")


def main(count: int) -> None:
    """All tables."""
    rng = np.random.default_rng(20)
    sizes = [steady_sizes(n, count, rng) for n in SIZES]
    table(f"Steady records, {count} each, % rejected at 5 %, exact p", "test", {t: [percent(s[t]) for s in sizes] for t in sizes[0]})
    few = max(count // 5, 100)
    renewal = {}
    for spacing in SPACINGS:
        pairs = [lewis_robinson_size(spacing, n, few if n < 100 else few // 2, rng) for n in SIZES]
        renewal[spacing] = [f"{percent(a)} ({percent(b)})" for a, b in pairs]
    table(f"lewis_robinson on trend-free records, {few} each, % rejected: by permutation (asymptotic)", "spacing", renewal)
    levels = {}
    for r in (4, 5, 6, 7, 8, 9, 10, 12, 15, 20, 30):
        levels[str(r)] = [percent(float(reversal_law(r)[two_sided_reversal_p(r) < 0.05].sum()))]
    table("reverse_arrangements, exact two-sided level at 5 % by number of untied intervals", "intervals", levels, ("level",))
    few = max(count // 20, 50)
    any_of = [any_rejection(n, few, rng) for n in SIZES]
    adjusted = {name: [percent(c[i]) for c in any_of] for i, name in enumerate(("step-down min-p", "Holm"))}
    table(f"Any of the five tests below 5 % after adjustment, steady records, {few} each", "adjustment", adjusted)
    tied = dated_to_the_year(few, rng)
    called = {f"ties {name}": [percent(tied[name])] for name in ("strict", "half")}
    table("100 events in 100 years dated to the year, % called speeding by reversals", "counting", called, ("n = 100",))
    fits = [fit_sizes(n, few, rng) for n in SIZES]
    shown = {c.name: [" / ".join(percent(p) for p in pair) if (pair := f[c.name]) else "–" for f in fits] for c in CURVES}
    table(f"Fit refused under the law itself, {few} records each, %: shape / clustering", "law", shown)
    ratios = {}
    for n in SIZES:
        share, point, step_point, step_share = ratio_sizes(n, count, rng)
        ratios[str(n)] = [percent(share), f"{point:.2f}", "–" if step_share is None else f"{step_point:.2f}", percent(step_share)]
    columns = ("hyperbolic refuses steady, %", "its 95 % point", "step's 95 % point", "step refuses steady, %")
    table("Steady records: likelihood ratios", "n", ratios, columns)


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 20_000)
