# SPDX-License-Identifier: Apache-2.0
"""The grid as sorted estimates over its choices: every combination by rank, and below which option stands behind which ranks."""

from __future__ import annotations

import numpy as np

from ...errors import RecordRefused
from .data import Axis, ChartData, Panel, Series, floats, limits
from .kind import Chart, Inputs, missing

Z95 = 1.959963984540054


def build(inputs: Inputs) -> ChartData:
    grid = inputs.grid
    if grid is None:
        raise missing("grid", "grid", "run_grid")
    valid = [i for i, line in enumerate(grid.lines) if line.z is not None and np.isfinite(line.z)]
    lines = sorted((grid.lines[i] for i in valid), key=lambda line: (line.z, _mixed(line.number)))
    if not lines:
        raise RecordRefused("no combination of the grid could be run, so there is nothing to sort; its table `invalid` says why")
    z = floats(line.z for line in lines)
    rank = floats(range(1, len(lines) + 1))
    series = []
    if grid.z_joint is not None and len(grid.z_joint):
        null = np.sort(grid.z_joint[:, valid], axis=1)  # what does not exist sorts last
        null = null[np.isfinite(null).all(axis=1)]
        if len(null) >= 20:
            low, high = np.quantile(null, (0.025, 0.975), axis=0)
            series.append(Series(f"{grid.null} records sorted alike, 95 %", "band", "null", rank, y_low=floats(low), y_high=floats(high)))
    series += [
        Series("5 % two-sided", "rule", "faint", (), (-Z95, Z95)),
        Series("combination", "dots", "data", rank, z, label=tuple(f"combination {line.number}" for line in lines)),
    ]
    own = [i for i, line in enumerate(lines) if line.own]
    if own:
        series.append(Series("your own", "dots", "mark", tuple(rank[i] for i in own), tuple(z[i] for i in own)))
    ends = [v for s in series for v in (*s.y, *s.y_low, *s.y_high)]
    low_z, high_z = limits(ends, margin=0.06)
    names: list[str] = []
    strips: list[Series] = []
    for choice in grid.options:
        used = list(dict.fromkeys(line.options[choice] for line in sorted(lines, key=lambda line: line.number)))
        if len(used) < 2:
            continue
        for option in used:
            if option is None:  # the choice does not arise for this response
                continue
            at = tuple(r for r, line in zip(rank, lines, strict=True) if line.options[choice] == option)
            strips.append(Series("stands behind these ranks", "ticks", "faint", at, (float(len(names)),) * len(at)))
            shown = f"{option:g}" if isinstance(option, float) else option
            names.append(f"{choice.replace('_', ' ')}: {shown}")
    tied = max(z.count(v) for v in (z[0], z[-1], float(np.median(z))))
    notes = [grid.sentence, *grid.notes]
    if tied > len(z) / 20:
        notes.append(f"{tied} combinations share one z, the end of what their null records can show; their order is mixed on purpose")
    panels = [Panel(Axis("z against a steady rate", "", low_z, high_z), tuple(series))]
    if names:
        panels.append(Panel(Axis("options", "", -0.5, len(names) - 0.5, "names", names=tuple(names)), tuple(strips)))
    return ChartData(
        "grid",
        CHART.question,
        Axis("combination", "rank from least to greatest z", 0.5, len(lines) + 0.5),
        tuple(panels),
        "A choice whose options gather at one end moves the answer. Lists and thresholds change the question; the others are arbitrary.",
        tuple(notes),
    )


def _mixed(number: int) -> int:
    """A place among ties that goes with no option: the finaliser of SplitMix64 (Steele, Lea and Flood 2014)."""
    word = 2**64 - 1
    h = number * 0x9E3779B97F4A7C15 & word
    h = (h ^ h >> 30) * 0xBF58476D1CE4E5B9 & word
    h = (h ^ h >> 27) * 0x94D049BB133111EB & word
    return h ^ h >> 31


CHART = Chart("grid", "How much does the answer depend on choices nobody can defend alone?", "the result of a grid", build)
