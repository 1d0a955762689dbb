# SPDX-License-Identifier: Apache-2.0
"""What a chart is before it is drawn: numbers with labels, axes with units. Both renderers take it, and so can any other program."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any, Literal

from ...errors import WrongUse

if TYPE_CHECKING:
    import pandas as pd

Scale = Literal["linear", "log", "names"]
Mark = Literal["dots", "line", "steps", "band", "rule", "ticks"]
Role = Literal["data", "open", "null", "law", "mark", "faint"]
Style = Literal["number", "age", "length", "year", "share"]

MARKS: tuple[Mark, ...] = ("dots", "line", "steps", "band", "rule", "ticks")


@dataclass(frozen=True)
class Axis:
    """One axis: what it shows, in which unit, and from where to where.

    ``low`` and ``high`` are the limits in the axis's unit, low < high; ``backward`` axes run from high to low (ages, so that time runs to
    the right). On a "names" axis the values are 0, 1, 2 … and ``names`` are their labels, from the top or left.
    ``style`` says how a tick is written.
    """

    label: str
    unit: str
    low: float
    high: float
    scale: Scale = "linear"
    backward: bool = False
    style: Style = "number"
    names: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        if not (math.isfinite(self.low) and math.isfinite(self.high) and self.low < self.high):
            raise WrongUse(f"axis {self.label!r} runs from {self.low!r} to {self.high!r}; it needs two finite limits, the lower first")
        if self.scale == "log" and self.low <= 0:
            raise WrongUse(f"axis {self.label!r} is logarithmic and starts at {self.low!r}; it must start above zero")

    @property
    def title(self) -> str:
        """Label and unit as they stand beside the axis."""
        return f"{self.label} ({self.unit})" if self.unit else self.label

    def place(self, value: float) -> float:
        """Where a value lies, 0 at the left or bottom and 1 at the right or top; NaN where the axis cannot show it."""
        if value is None or not math.isfinite(value) or (self.scale == "log" and value <= 0):
            return math.nan
        if self.scale == "log":
            share = math.log(value / self.low) / math.log(self.high / self.low)
        else:
            share = (value - self.low) / (self.high - self.low)
        return 1 - share if self.backward else share


@dataclass(frozen=True)
class Series:
    """Points that belong together (p of them), in the units of the axes.

    ``mark`` dots (with bars where bounds are given), line, steps, band (between y_low and y_high along x), rule (a line across the panel at
    each x, or at each y where x is empty) and ticks (short upright strokes). ``role``: data, open, null, law, mark, faint: how much
    weight it has. Bounds are empty or as long as x; NaN where there is none. ``label`` names single points, empty or as long as x.
    """

    name: str
    mark: Mark
    role: Role
    x: tuple[float, ...]
    y: tuple[float, ...] = ()
    x_low: tuple[float, ...] = ()
    x_high: tuple[float, ...] = ()
    y_low: tuple[float, ...] = ()
    y_high: tuple[float, ...] = ()
    label: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        p = len(self.x) or len(self.y)
        for name in ("x", "y", "x_low", "x_high", "y_low", "y_high", "label"):
            values = getattr(self, name)
            if len(values) not in (0, p):
                raise WrongUse(f"series {self.name!r} has {p} points but {len(values)} values of {name}")

    def __len__(self) -> int:
        return len(self.x) or len(self.y)


@dataclass(frozen=True)
class Panel:
    """A plot area with its own y axis; panels stand above one another on the chart's x axis. ``share`` is its part of the height."""

    y: Axis
    series: tuple[Series, ...]
    share: float = 1.0


@dataclass(frozen=True)
class ChartData:
    """A chart in numbers: the question it answers, its axes and series, one sentence on how to read it, remarks."""

    kind: str
    question: str
    x: Axis
    panels: tuple[Panel, ...]
    reading: str = ""
    notes: tuple[str, ...] = field(default=())

    @property
    def series(self) -> tuple[Series, ...]:
        """All series of all panels."""
        return tuple(s for panel in self.panels for s in panel.series)

    def to_frame(self) -> pd.DataFrame:
        """One row a point: panel, series, mark, role, x, y, x_low, x_high, y_low, y_high, label; unrounded, NaN where there is no value."""
        import pandas as pd

        rows: list[dict[str, Any]] = []
        for panel in self.panels:
            for s in panel.series:
                for i in range(len(s)):
                    row: dict[str, Any] = {"panel": panel.y.label, "series": s.name, "mark": s.mark, "role": s.role}
                    for name in ("x", "y", "x_low", "x_high", "y_low", "y_high"):
                        values = getattr(s, name)
                        row[name] = values[i] if values else math.nan
                    rows.append({**row, "label": s.label[i] if s.label else ""})
        columns = ["panel", "series", "mark", "role", "x", "y", "x_low", "x_high", "y_low", "y_high", "label"]
        return pd.DataFrame(rows, columns=columns)

    def to_dict(self) -> dict[str, Any]:
        """The chart as plain data for JSON; a value that does not exist is None."""

        def clean(values: Sequence[float]) -> list[float | None]:
            return [v if math.isfinite(v) else None for v in values]

        def axis(a: Axis) -> dict[str, Any]:
            out = {"label": a.label, "unit": a.unit, "scale": a.scale, "low": a.low, "high": a.high, "backward": a.backward}
            return {**out, "names": list(a.names)} if a.names else out

        def series(s: Series) -> dict[str, Any]:
            out: dict[str, Any] = {"name": s.name, "mark": s.mark, "role": s.role}
            for name in ("x", "y", "x_low", "x_high", "y_low", "y_high"):
                if getattr(s, name):
                    out[name] = clean(getattr(s, name))
            return {**out, "label": list(s.label)} if s.label else out

        panels = [{"y": axis(p.y), "series": [series(s) for s in p.series]} for p in self.panels]
        return {
            "kind": self.kind, "question": self.question, "x": axis(self.x), "panels": panels, "reading": self.reading,
            "notes": list(self.notes),
        }  # fmt: skip


def floats(values: Iterable[Any]) -> tuple[float, ...]:
    """Plain floats; what does not exist becomes NaN."""
    return tuple(math.nan if v is None else float(v) for v in values)


def limits(values: Iterable[float], scale: Scale = "linear", margin: float = 0.04, floor: float | None = None) -> tuple[float, float]:
    """Limits that hold all finite values (above zero on a log axis) with a margin on both sides; ``floor`` fixes the lower one."""
    seen = [v for v in values if math.isfinite(v) and (scale != "log" or v > 0)]
    if not seen:
        return (1.0, 10.0) if scale == "log" else (0.0, 1.0)
    low, high = min(seen), max(seen)
    if scale == "log":
        if low == high:
            low, high = low / 2, high * 2
        room = (high / low) ** margin
        low, high = low / room, high * room
    else:
        room = (high - low) * margin or abs(high) * margin or 0.5
        low, high = low - room, high + room
    return (low if floor is None else floor), high
