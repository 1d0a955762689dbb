# SPDX-License-Identifier: Apache-2.0
"""Charts: first numbers with labels and units (ChartData), then drawn in a terminal or as a figure for print. One small file a kind.

    data = chart("interval_age", record=record)
    print(to_terminal(data, width=100, height=28))
    to_figure(data, "interval_age.pdf")
"""

from __future__ import annotations

import difflib
from typing import TYPE_CHECKING

from ...errors import WrongUse
from . import completeness, cumulative, grid, interval_age, lists, recall, support
from .data import Axis, ChartData, Panel, Series
from .figure import ENDINGS, to_figure
from .kind import Chart, Inputs
from .terminal import to_terminal

if TYPE_CHECKING:
    from ...bias import Bias
    from ...bias.grid import Grid
    from ...intervals import Intervals
    from ...record import Record
    from ...trend.analysis import Trend

CHARTS: tuple[Chart, ...] = (
    interval_age.CHART, cumulative.CHART, recall.CHART, completeness.CHART, lists.CHART, grid.CHART, support.CHART,
)  # fmt: skip

__all__ = ["CHARTS", "ENDINGS", "Axis", "Chart", "ChartData", "Inputs", "Panel", "Series", "chart", "to_figure", "to_terminal"]


def chart(
    kind: str,
    *,
    record: Record,
    trend: Trend | None = None,
    bias: Bias | None = None,
    grid: Grid | None = None,
    intervals: Intervals | None = None,
    seed: int = 1,
    draws: int = 2000,
) -> ChartData:
    """The numbers of one kind of chart for a record.

    ``trend``, ``bias``, ``grid`` and ``intervals`` are results for the same record, where they are at hand; a kind computes what it
    lacks with ``seed`` and ``draws`` if that takes a second or two, and else says what to give. Ages and intervals in years.
    Raises WrongUse for an unknown kind or a missing result, RecordRefused where the record is too small.
    """
    for member in CHARTS:
        if member.name == kind:
            return member.build(Inputs(record, trend, bias, grid, intervals, seed, draws))
    near = difflib.get_close_matches(kind, [c.name for c in CHARTS], 1)
    hint = f"; did you mean {near[0]!r}?" if near else ""
    raise WrongUse(f"there is no chart {kind!r}{hint} The kinds are {', '.join(c.name for c in CHARTS)}")
