# SPDX-License-Identifier: Apache-2.0
"""Dating: heaping of digits by era and list, all dates coarsened to one relative precision, drawn dates, and draws that follow
one list at a time.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from ..mixture import UNIFORM
from ..record import Record
from ..trend.kernels import growth_of_mean_age
from .check import Answer, Check, Context, Row
from .drawn import drawn_growth, drawn_row, window_draws
from .growth import Growth, growth
from .heaping import digit_indices, heaping_p
from .rows import count, number, record_row, row, simulated_row, telling, years

Floats = npt.NDArray[np.float64]
PRECISIONS = (0.02, 0.05, 0.1, 0.2, 0.5)
YEARLY = 1.5  # a dating this many years wide or less is taken as written to the year
FEWEST_DIGITS = 20
MOST_DRAWS = 1000
MOST_CELLS = 2_000_000


def run(context: Context) -> Answer:
    record = context.record
    published = growth(record.window)
    rows = _drawn(context, published) + _coherent(context, published) + _coarse(context, published)
    at = telling(rows, published)
    digits = _digits(context, published)
    notes = () if digits else (f"dating: heaping needs {FEWEST_DIGITS} dates written to the year in one era or list",)
    heaped = [r for r in digits if (r.more["heaping_p"] or 1.0) < 0.01]
    worst = max(heaped, key=lambda r: r.more["myers"], default=None)
    words = "no heaping of digits found" if worst is None else f"digits heap most in {worst.setting} (Whipple {worst.more['whipple']:.0f})"
    summary = f"{words}; rows: {count(rows)}" if digits else f"rows: {count(rows)}"
    if at is not None:
        summary += f"; growth is lowest with {rows[at].setting}: {number(rows[at].estimate)} a year"
    return Answer(tuple(rows + digits), summary, "growth over drawn dates and at the coarsest precision the list supports", notes, at)


def _draws(context: Context) -> int:
    """Fewer draws for large records."""
    return min(context.draws, MOST_DRAWS, max(50, MOST_CELLS // max(len(context.record), 1)))


def _drawn(context: Context, published: Growth) -> list[Row]:
    record = context.record
    if not (record.high > record.low).any() or not context.draws:
        return []
    draws = _draws(context)
    found = drawn_row(
        "dating", "drawn dates", drawn_growth(record.window, window_draws(record, draws, context.seed)), published, kind="drawn"
    )
    return [] if found is None else [found]


def _coherent(context: Context, published: Growth) -> list[Row]:
    """Each draw follows one list: its dating where it names a milestone, else the next list's, in an order drawn anew."""
    record = context.record
    k = len(record.lists)
    if k < 2 or not context.draws:
        return []
    draws = _draws(context)
    rng = np.random.default_rng([context.seed, 7501])
    window = record.window
    alone = np.full((k, draws, len(window.times)), np.nan)
    rows = []
    for j in range(k):
        dates, named = _of_list(record, j, rng.random((draws, len(record))))
        alone[j] = np.where(named, dates, np.nan)[:, window.index]
        best = record.best.copy()
        best[named] = _bests(record, j)[named]
        moved = growth(record.with_dates(best).window)
        rows.append(row("dating", f"dates of {record.lists[j]} where it has them", moved, published, kind="one list"))
    order = np.argsort(rng.random((draws, k)), axis=1)
    out = np.full((draws, len(window.times)), np.nan)
    for place in range(k):
        pick = alone[order[:, place], np.arange(draws)]
        out = np.where(np.isnan(out), pick, out)
    found = drawn_row("dating", "coherent draws, one list at a time", drawn_growth(window, out), published, kind="coherent")
    return rows if found is None else [found, *rows]


def _of_list(record: Record, j: int, u: Floats) -> tuple[Floats, npt.NDArray[np.bool_]]:
    """(draws, m) dates from the datings of one list, and (m,) which milestones it names."""
    from scipy.special import ndtri

    from ..dating.dating import Z975

    dates = np.full(u.shape, np.nan)
    named = np.zeros(len(record), bool)
    for p in np.nonzero(record.source == j)[0]:
        i = record.owner[p]
        named[i] = True
        if record.kind[p] == UNIFORM:
            dates[:, i] = record.low[p] + u[:, i] * (record.high[p] - record.low[p])
        else:
            z = ndtri(np.clip(u[:, i], 1e-12, 1 - 1e-12))
            side = np.where(z < 0, record.mode[p] - record.low[p], record.high[p] - record.mode[p])
            dates[:, i] = record.mode[p] + z * side / Z975
    return np.minimum(dates, np.nextafter(record.present, -np.inf)), named


def _bests(record: Record, j: int) -> Floats:
    best = record.best.copy()
    mine = record.source == j
    best[record.owner[mine]] = record.mode[mine]
    return best


def _coarse(context: Context, published: Growth) -> list[Row]:
    """Every age rounded to one step of log age, the null's alike: precise recent dates and vague old ones no longer differ."""
    window = context.record.window
    if not window.n or not window.span > 0:
        return []
    rng = np.random.default_rng([context.seed, 7502])
    size = max(1, min(context.replicates, 2_000_000 // window.n))
    null_ages = rng.random((size, window.n)) * window.span
    rows = []
    for precision in PRECISIONS:
        found = _coarsened(window.present - window.counted, precision, window.span)
        null = _coarsened(null_ages, precision, window.span)
        rows.append(
            simulated_row(
                "dating",
                f"all dates to {precision:.0%} of age",
                window.n,
                float(found),
                "steady, dated alike",
                null,
                published,
                kind="coarsened",
                precision=precision,
            )
        )
    return rows


def _coarsened(ages: Floats, precision: float, span: float) -> Floats:
    step = np.log1p(precision)
    rounded = np.minimum(np.exp(np.round(np.log(ages) / step) * step), span)
    return np.asarray(growth_of_mean_age(np.clip(rounded.mean(axis=-1) / span, 1e-15, 1 - 1e-15)) / span)


def _digits(context: Context, published: Growth) -> list[Row]:
    """Last digits of years, by list and by thirds of the dates written to the year."""
    record = context.record
    yearly = (record.high - record.low <= YEARLY) & (record.mode <= record.present) & (record.high > record.low)
    if yearly.sum() < FEWEST_DIGITS:
        return []
    value, source = np.floor(record.low[yearly]), record.source[yearly]
    cuts = np.quantile(value, [0.0, 1 / 3, 2 / 3, 1.0])
    eras = [("all dates to the year", -np.inf, np.inf)]
    eras += [
        (f"{years(a)} to {years(b)}", a, b if i == 2 else b - 1) for i, (a, b) in enumerate(zip(cuts[:-1], cuts[1:], strict=True)) if b > a
    ]
    rows = []
    for stream, (name, low, high) in enumerate(eras):
        inside = (value >= low) & (value <= high)
        part = record if stream == 0 else _era(record, low, high + 1)
        rows.append((name, value[inside], part, stream))
    rows += [
        (f"list {x}", value[source == j], record.only(sources=[x]) if len(record.lists) > 1 else record, 100 + j)
        for j, x in enumerate(record.lists)
        if len(record.lists) > 1
    ]
    out = []
    for name, digits, part, stream in rows:
        if len(digits) < FEWEST_DIGITS or part is None:
            continue
        w, m = digit_indices(digits)
        p = heaping_p(digits, np.random.default_rng([context.seed, 7503, stream]), min(context.replicates, 1999))
        out.append(record_row("dating", name, part, published, kind="digits", dates=len(digits), whipple=w, myers=m, heaping_p=p))
    return out


def _era(record: Record, low: float, high: float) -> Record | None:
    window = record.window
    start, present = max(low, window.start), min(high, window.present)
    return record.only(start=start, present=present) if start < present else None


CHECK = Check("dating", "Does the way things are dated make the trend?", "dates with a width, or several lists", run)
