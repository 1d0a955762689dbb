# SPDX-License-Identifier: Apache-2.0
"""What a notation makes of a text before the list's limits and compile year are applied."""

from __future__ import annotations

from math import inf
from typing import Literal, NamedTuple

from ..errors import DateRefused
from .dating import Dating, Reading, Shape
from .settings import DEFAULTS, Settings
from .units import ASSUMED_YEAR, MATTERS_BELOW

Kind = Literal["year", "age", "day", "month", "season", "decade", "century", "period", "part", "circa", "set", "error", "range", "limit"]

FARTHEST = 1e15
"""Beyond this many years float64 cannot part neighbouring years."""


class Span(NamedTuple):
    """Bounds of a text in decimal years, open ends as ±inf, and what composites need to know of it.

    ``low`` and ``high`` are the bounds as the end of a range, where a number is taken as written; ``last`` is one unit of the last
    significant digit in years (0: not a number); ``scale`` the years of one written unit and ``back`` whether it counts back (for
    plus-minus and > <); ``assumed`` says that an age was counted from an assumed year; ``uses`` names the settings the bounds rest on.
    """

    kind: Kind
    earliest: float
    best: float
    latest: float
    words: str
    low: float
    high: float
    shape: Shape = "uniform"
    last: float = 0.0
    scale: float = 1.0
    back: bool = False
    assumed: bool = False
    uses: tuple[str, ...] = ()
    remarks: tuple[str, ...] = ()


def flat(kind: Kind, earliest: float, latest: float, words: str, uses: tuple[str, ...] = (), remarks: tuple[str, ...] = ()) -> Span:
    """A uniform span whose bounds are also its bounds as the end of a range."""
    return Span(kind, earliest, middle(earliest, latest), latest, words, earliest, latest, uses=uses, remarks=remarks)


def middle(earliest: float, latest: float) -> float:
    """The middle of two bounds; the bound that is finite when the other is not, exact when they are equal."""
    if earliest == -inf:
        return latest
    if latest == inf:
        return earliest
    return earliest + (latest - earliest) / 2


def close(span: Span, settings: Settings) -> tuple[Span, list[str]]:
    """Open ends closed by the list's limits, else the compile year's end at the young end, else ``reach``; refused otherwise."""
    earliest, latest, remarks = span.earliest, span.latest, list(span.remarks)
    if earliest == -inf:
        if settings.earliest_limit is not None:
            earliest, by = settings.earliest_limit, "earliest_limit"
        elif settings.reach is not None and latest != inf:
            earliest, by = latest - settings.reach, "reach"
        else:
            raise DateRefused("has no early end; set earliest_limit (or reach) in the list's sheet, or give the earliest year")
        remarks.append(f"the open early end was closed at {earliest:.12g} by {by}")
    if latest == inf:
        end = None if settings.compiled is None else settings.compiled + 1.0
        if settings.latest_limit is not None:
            latest, by = settings.latest_limit, "latest_limit"
        elif settings.reach is not None and (end is None or earliest + settings.reach < end):
            latest, by = earliest + settings.reach, "reach"
        elif end is not None:
            latest, by = end, "the compile year"
        else:
            raise DateRefused(
                "has no late end; give the compile year, set latest_limit (or reach) in the list's sheet, or give the latest year"
            )
        remarks.append(f"the open late end was closed at {latest:.12g} by {by}")
    if earliest >= latest:
        raise DateRefused(
            f"would end at {latest:.12g} and begin at {earliest:.12g}, by the limits of the list; check the limits and the compile year"
        )
    return span._replace(earliest=earliest, best=middle(earliest, latest), latest=latest), remarks


def finish(span: Span, notation: str, settings: Settings) -> Reading:
    """The reading of a span: ends closed, the compile year heeded. Raises DateRefused with a reason that follows the text."""
    remarks: list[str] | tuple[str, ...] = span.remarks
    if span.earliest == -inf or span.latest == inf:
        span, remarks = close(span, settings)
    _, earliest, best, latest, words, _, _, shape = span[:8]
    if not -FARTHEST <= earliest <= latest <= FARTHEST:
        raise DateRefused(f"lies beyond {FARTHEST:.0e} years, where single years cannot be told apart; give a nearer date")
    if span.assumed:
        if (latest - earliest) / 2 < MATTERS_BELOW:
            raise DateRefused(
                "counts back from the year the list was compiled, which is not given; give it (compiled), or count from 1950 (BP) "
                "or 2000 (b2k)"
            )
        notation += f", from {ASSUMED_YEAR:.0f}"
        remarks = [
            *remarks,
            f"counted from {ASSUMED_YEAR:.0f}, since the compile year is not given "
            f"and half the width is {MATTERS_BELOW:,.0f} years or more",
        ]
    if settings.compiled is not None:
        end = settings.compiled + 1.0
        if best > end or (earliest >= end and latest > end):
            raise DateRefused(
                f"lies after the end of {settings.compiled}, the year the list was compiled; check the date and the compile year"
            )
        if latest > end:
            latest, best = end, best if shape == "normal" else middle(earliest, end)
            remarks = [*remarks, f"the late bound was cut at the end of the compile year {settings.compiled}"]
    uses = span.uses
    if uses:
        uses = tuple(dict.fromkeys(name for name in uses if name not in settings.given and getattr(settings, name) == DEFAULTS[name]))
    return Reading(Dating(earliest, best, latest, shape), notation, words, uses, tuple(remarks))
