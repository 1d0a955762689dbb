# SPDX-License-Identifier: Apache-2.0
"""A chart as a figure for print: PNG, SVG or PDF by the file's ending. Needs the extra "figures" (matplotlib).

Same data, same bytes: no dates in the files, and the ids of an SVG are hashed with a fixed salt. No global state of the plotting
library is touched.
"""

from __future__ import annotations

import math
import os
import textwrap
from pathlib import Path
from typing import Any

from ...errors import WrongUse
from ..plain import plain
from . import palette
from .data import Axis, ChartData, Panel, Series
from .ticks import ticks

WIDTH, HEIGHT = 6.7, 4.3  # inches: a text column of 170 mm
CROWD = 250  # points from which marks become small
ENDINGS = ("png", "svg", "pdf")
_STYLE = {
    "font.family": "DejaVu Sans", "font.size": 8.5, "axes.titlesize": 10, "axes.labelsize": 8.5, "axes.edgecolor": palette.QUIET,
    "axes.labelcolor": palette.INK, "xtick.color": palette.QUIET, "ytick.color": palette.QUIET, "xtick.labelcolor": palette.INK,
    "ytick.labelcolor": palette.INK, "text.color": palette.INK, "axes.linewidth": 0.8, "svg.hashsalt": "chronos-acc",
    "svg.fonttype": "path", "pdf.fonttype": 42, "hatch.linewidth": 0.5, "path.simplify": True, "axes.unicode_minus": True,
}  # fmt: skip
_NOT_OURS = ("backend", "backend_fallback", "interactive", "toolbar")  # of a person's session; figures are drawn without them
_METADATA: dict[str, dict[str, Any]] = {
    "png": {"Software": "chronos-acc"},
    "svg": {"Date": None, "Creator": "chronos-acc"},
    "pdf": {"CreationDate": None, "ModDate": None, "Creator": "chronos-acc", "Producer": "chronos-acc"},
}


def to_figure(data: ChartData, path: str | os.PathLike[str]) -> Path:
    """Draw the chart into a file whose ending is png (300 dots an inch), svg or pdf; 170 mm wide. Returns the path.

    Raises WrongUse for another ending, where matplotlib is missing, and where the file cannot be written.
    """
    target = Path(path)
    ending = target.suffix.lower().lstrip(".")
    if ending not in ENDINGS:
        given = repr(target.suffix) if target.suffix else "without one"
        raise WrongUse(f"a figure is written as png, svg or pdf by the file's ending, not {given}: {target.name}")
    try:
        import matplotlib
        from matplotlib.figure import Figure
    except ImportError:
        raise WrongUse('figures need matplotlib: pip install "chronos-acc[figures]", or draw the chart in the terminal') from None
    defaults: dict[Any, Any] = {k: v for k, v in matplotlib.rcParamsDefault.items() if k not in _NOT_OURS}
    with matplotlib.rc_context(defaults | _STYLE):
        figure = Figure(figsize=(WIDTH, _height(data)), dpi=300, layout="constrained", facecolor=palette.PAPER)
        _compose(figure, data)
        try:
            figure.savefig(target, format=ending, metadata=_METADATA[ending])
        except OSError as error:
            raise WrongUse(f"the figure {target} cannot be written: {error.strerror or error}; choose another place") from None
    return target


def _height(data: ChartData) -> float:
    """Names need room: a fifth of an inch each."""
    named = sum(len(p.y.names) for p in data.panels)
    plain_panels = any(not p.y.names for p in data.panels)
    return max(HEIGHT if plain_panels else 2.4, (HEIGHT * 0.8 if plain_panels else 1.3) + 0.2 * named)


def _compose(figure: Any, data: ChartData) -> None:
    shares = [max(p.share, 0.1) for p in data.panels]
    if any(p.y.names for p in data.panels):
        shares = [0.2 * len(p.y.names) + 0.15 if p.y.names else 2.6 * p.share for p in data.panels]
    axes = figure.subplots(len(data.panels), 1, sharex=True, squeeze=False, gridspec_kw={"height_ratios": shares})[:, 0]
    handles: dict[str, Any] = {}
    for ax, panel in zip(axes, data.panels, strict=True):
        _frame(ax, data.x, panel.y)
        _panel(ax, data.x, panel, handles)
        if panel.y.names and len(data.panels) > 1:
            ax.set_title(_text(panel.y.title), loc="left", fontsize=7.8, color=palette.QUIET, pad=3)
    for ax in axes[:-1]:
        ax.spines["bottom"].set_visible(False)
        ax.tick_params(axis="x", length=0)
    figure.suptitle("\n".join(textwrap.wrap(_text(data.question), 84)), x=0.012, ha="left", fontsize=10, fontweight="bold")
    _labels(axes[-1].xaxis, data.x, 11)
    axes[-1].set_xlabel(_text(data.x.title))
    if handles:
        columns = 2 if max(map(len, handles)) > 26 or len(handles) > 3 else len(handles)
        place = {"loc": "outside lower left", "ncols": columns, "frameon": False, "fontsize": 7.8, "handlelength": 2.6}
        figure.legend(handles.values(), handles.keys(), **place)


def _frame(ax: Any, x: Axis, y: Axis) -> None:
    for side in ("top", "right"):
        ax.spines[side].set_visible(False)
    ax.set_xscale("log" if x.scale == "log" else "linear")
    ax.set_yscale("log" if y.scale == "log" else "linear")
    ax.set_xlim((x.high, x.low) if x.backward else (x.low, x.high))
    ax.set_ylim((y.high, y.low) if y.backward or y.names else (y.low, y.high))
    ax.minorticks_off()
    ax.tick_params(length=3, width=0.8)
    if y.names:
        ax.set_yticks(range(len(y.names)), [_text(n) for n in y.names])
        ax.tick_params(axis="y", length=0)
        ax.spines["left"].set_visible(False)
        for k in range(len(y.names)):
            ax.axhline(k, color=palette.BANDS[0], lw=0.5, zorder=0)
    else:
        _labels(ax.yaxis, y, 7)
        ax.set_ylabel(_text(y.title))


def _labels(axis: Any, described: Axis, most: int) -> None:
    marks = ticks(described, most)
    axis.set_ticks([v for v, _ in marks], labels=[_text(t) for _, t in marks])


def _panel(ax: Any, x: Axis, panel: Panel, handles: dict[str, Any]) -> None:
    bands = laws = dots = 0
    for s in panel.series:
        if s.mark == "band":
            handle = ax.fill_between(
                s.x, s.y_low, s.y_high, facecolor=palette.BANDS[bands % 2], alpha=0.75, linewidth=0.6,
                edgecolor=palette.QUIET if bands % 2 else "none", hatch=palette.HATCHES[bands % 2] or None, zorder=1 + bands % 2 * 0.1,
            )  # fmt: skip
            bands += 1
        elif s.mark in ("line", "steps"):
            law = s.role == "law"
            handle = ax.plot(
                s.x, s.y, drawstyle="steps-post" if s.mark == "steps" else "default", color=palette.LAWS[laws % 4] if law else _colour(s),
                lw={"law": 1.3, "faint": 0.7}.get(s.role, 1.6), linestyle=palette.STROKES[laws % 4] if law else "solid",
                zorder=3 + (not law) * 0.5,
            )[0]  # fmt: skip
            laws += law
        elif s.mark == "rule":
            handle = _rule(ax, s)
        elif s.mark == "ticks":
            _bars(ax, s)
            tall = 11 if panel.y.names else 7
            many = x.scale == "linear" and x.high - x.low > CROWD
            style = {"ms": 8, "mew": 0.5, "alpha": 0.45, "zorder": 4} if many else {"ms": tall, "mew": 0.9, "zorder": 4}
            handle = ax.plot(s.x, s.y, linestyle="none", marker="|", color=_colour(s), clip_on=False, **style)[0]
        else:
            _bars(ax, s)
            hollow = s.role == "open"
            size = 5.5 if hollow or s.role == "mark" else 1.6 if len(s) > CROWD else 3.8
            edge = 1.3 if hollow else 0.0 if size < 2 else 0.4
            handle = ax.plot(
                s.x, s.y, linestyle="none", marker="D" if s.role in ("open", "mark") else palette.MARKS[dots % 4], ms=size,
                mfc=palette.PAPER if hollow else _colour(s), mec=_colour(s) if hollow else palette.PAPER, mew=edge,
                zorder=6 if hollow else 5,
            )[0]  # fmt: skip
            dots += s.role == "data"
        if s.name and len(s):
            handles.setdefault(_text(s.name), handle)


def _colour(s: Series) -> str:
    return {"open": palette.SIGNAL, "mark": palette.SIGNAL, "faint": palette.QUIET, "null": palette.QUIET}.get(s.role, palette.INK)


def _bars(ax: Any, s: Series) -> None:
    loud = s.role == "mark"
    style = {"color": palette.SIGNAL if loud else palette.QUIET, "lw": 1.2 if loud else 0.7, "zorder": 2.5, "alpha": 0.8}
    if s.x_low:
        pairs = [(y, a, b) for y, a, b in zip(s.y, s.x_low, s.x_high, strict=True) if math.isfinite(a) and math.isfinite(b)]
        ax.hlines([p[0] for p in pairs], [p[1] for p in pairs], [p[2] for p in pairs], **style)
    if s.y_low:
        pairs = [(x, a, b) for x, a, b in zip(s.x, s.y_low, s.y_high, strict=True) if math.isfinite(a) and math.isfinite(b)]
        ax.vlines([p[0] for p in pairs], [p[1] for p in pairs], [p[2] for p in pairs], **style)


def _rule(ax: Any, s: Series) -> Any:
    handle = None
    for i in range(len(s)):
        draw, value = (ax.axvline, s.x[i]) if s.x else (ax.axhline, s.y[i])
        handle = draw(value, color=_colour(s), lw=0.9, linestyle=(0, (1, 2)) if s.role == "faint" else (0, (4, 2.5)), zorder=2)
    return handle


def _text(text: str) -> str:
    """A dollar sign would start a formula."""
    return plain(text).replace("$", r"\$")
