# SPDX-License-Identifier: Apache-2.0
"""The whole analysis as one document: lists, merging, series, trend, bias, grid, methods, cautions, and how it was made."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pandas as pd

from ..record import Record
from . import numbers
from .analysis_pages import bias_tables, grid_tables, trend_tables
from .document import Block, Code, Document, Figure, Heading, Items, Paragraph
from .pages import intervals_page, milestones_page, rejects_page, sources_page
from .references import used
from .tables import Table

if TYPE_CHECKING:
    from ..bias import Bias
    from ..bias.grid import Grid
    from ..intervals import Intervals
    from ..trend.analysis import Trend

CAUTIONS = (
    "A trend in a list is a property of the list as well as of its subject. One list cannot tell a faster pace from forgetting: a steady rate seen through "
    "exponential forgetting is the same law as exponential growth.",
    "Correction for what independent lists missed says nothing about what all of them forgot.",
    "Extrapolated and singular dates are properties of a fitted curve, not forecasts. Nothing here is a basis for safety, investment or hazard decisions; "
    "defer to the responsible authorities and to licensed practice.",
)


@dataclass(frozen=True)
class Material:
    """Everything a report is made from; ``grid`` may be None."""

    title: str
    record: Record
    sources: pd.DataFrame
    rejects: pd.DataFrame
    milestones: pd.DataFrame
    links: pd.DataFrame
    decisions: pd.DataFrame
    intervals: Intervals
    trend: Trend
    bias: Bias
    grid: Grid | None
    commands: tuple[str, ...]
    version: str
    libraries: tuple[tuple[str, str], ...]
    stamp: str
    accept: float = 0.5
    pooling: str = "mixture"


def build(m: Material, *, figures: bool) -> Document:
    """The document. ``figures``: whether the extra for figures is installed; else charts are drawn in characters."""
    trend = m.trend.to_dict()
    blocks: list[Block] = [
        Paragraph("Do the milestones of these lists come faster and faster, and would the making of the lists produce that by itself?"),
        Paragraph(trend["verdict"], strong=True),
        Paragraph(_in_short(m)),
        Heading("The lists"),
        _lists_table(m.sources),
        Items(tuple(_citation(row) for row in m.sources.to_dict("records"))),
        Heading("Merging"),
        Paragraph(_merging(m)),
        *(rejects_page(m.rejects).tables if len(m.rejects) else ()),
        *milestones_page(m.milestones).tables,
        Heading("The series"),
        *intervals_page(m.intervals.to_frame(), m.record).tables,
        *_charts(m, ("interval_age", "support"), figures),
        Heading("Is it speeding up?"),
        *(t for t in trend_tables(m.trend, full=False) if not t.aside),
        *_charts(m, ("cumulative", "lists"), figures),
        Heading("Would the making of the lists produce this?"),
        *bias_tables(m.bias, full=True),
        *_charts(m, ("recall", "completeness"), figures),
    ]
    if m.grid is not None:
        blocks += [Heading("Which choices matter?"), *(t for t in grid_tables(m.grid) if not t.aside), *_charts(m, ("grid",), figures)]
    of_checks = m.bias.to_dict().get("notes", [])
    said = {note.partition(": ")[2] for note in of_checks}
    notes = tuple(dict.fromkeys([*(n for n in trend["notes"] if n not in said), *of_checks]))
    marks = _marks(m)
    blocks += [
        Heading("Remarks"),
        Items(notes) if notes else Paragraph("None."),
        Heading("Methods"),
        Paragraph(_methods(m)),
        Items(tuple(r.text for r in used(marks))),
        Heading("Cautions"),
        Items(CAUTIONS),
        Heading("How this was made"),
        Code("\n".join(m.commands)),
        Table("made", _made(m), "With what, and from what?"),
        Paragraph(f"Made at {m.stamp}."),
    ]
    return Document(m.title, tuple(blocks))


def _lists_table(sources: pd.DataFrame) -> Table:
    """The lists without what the citations below it say."""
    (table,) = sources_page(sources).tables
    said = ("criterion", "citation", "file")
    return replace(table, columns=tuple(c for c in table.columns or () if c.key not in said))


def _in_short(m: Material) -> str:
    record = m.trend.to_dict()["record"]
    summary = m.bias.tables()["summary"]
    standing = summary["stands"].value_counts().to_dict() if len(summary) else {}
    words = ", ".join(f"{standing[k]} {k}" for k in ("yes", "weaker", "too few", "no") if k in standing)
    return (
        f"{record['n']} counted events between {numbers.when(record['start'])} and {numbers.when(record['present'])}, from {len(m.record.lists)} lists. "
        f"Of {len(summary)} bias checks, the trend stands: {words or 'none could run'}."
    )


def _citation(row: dict[str, Any]) -> str:
    parts = [str(row["source"])]
    for key in ("citation", "criterion"):
        if not numbers.is_missing(row.get(key)) and row.get(key):
            parts.append(str(row[key]).rstrip("."))
    return ": ".join(parts[:2]) + (f". Criterion: {parts[2]}" if len(parts) > 2 else "") + "."


def _merging(m: Material) -> str:
    states = m.links["state"].value_counts().to_dict() if len(m.links) else {}
    read, loaded, refused = (int(m.sources[k].sum()) for k in ("rows_read", "rows_loaded", "rows_rejected"))
    return (
        f"{read:,} rows were read, {loaded:,} loaded and {refused:,} refused. {loaded:,} entries make {len(m.milestones):,} milestones; "
        f"{states.get('linked', 0) + states.get('same', 0):,} pairs were joined, {states.get('review', 0):,} wait for review, "
        f"{len(m.decisions):,} were settled by hand."
    )


def _methods(m: Material) -> str:
    trend = m.trend.to_dict()
    made = trend["made"]
    return (
        f"The lists were merged by probabilistic record linkage on title and date (Fellegi and Sunter 1969), joining pairs with a probability of at least "
        f"{m.accept:g}; the datings of one milestone were pooled ({m.pooling.replace('_', ' ')}). Trend was judged by the Laplace test with exact p-values given the number of events, "
        "and by the Lewis–Robinson test with permuted intervals, both two-sided at 5 %; rate laws were fitted by maximum likelihood with profile intervals. "
        "Slopes and R² of log interval on log age were compared with those of whole lists made under null models of the list's making: a steady rate, "
        "shuffled intervals, a steady rate with forgetting, and picking evenly per unit of log age, each with the datings of the observed record. "
        f"Analyses were made with chronos_acc {m.version} (seed {made['seed']}, {made['draws']} draws from the datings)."
    )


def _marks(m: Material) -> set[str]:
    trend = m.trend.to_dict()
    found = {"link", "p_holm", "p_adjusted", "fit_p_clustering", "weight", "aicc", "slope"}
    for table, key in (("tests", "test"), ("rate_laws", "law"), ("regressions", "estimator"), ("nulls", "null")):
        found |= {str(row[key]) for row in trend[table]}
    found |= {name for name, frame in m.bias.tables().items() if len(frame)}
    if "birge" in m.milestones and m.milestones["birge"].notna().any():
        found.add("birge")
    return found


def _made(m: Material) -> pd.DataFrame:
    made = m.trend.to_dict()["made"]
    rows = [("chronos_acc", m.version), *m.libraries, ("seed", str(made["seed"])), ("draws", str(made["draws"])), ("record", m.record.hash)]
    rows += [(f"list {row['source']}", str(row.get("digest", ""))[:16]) for row in m.sources.to_dict("records")]
    return pd.DataFrame(rows, columns=["what", "value"])


def _charts(m: Material, kinds: Sequence[str], figures: bool) -> list[Block]:
    from ..errors import ChronosError
    from .charts import chart, to_terminal

    out: list[Block] = []
    for kind in kinds:
        try:
            data = chart(kind, record=m.record, trend=m.trend, bias=m.bias, grid=m.grid, intervals=m.intervals, seed=m.trend.to_dict()["made"]["seed"])
        except ChronosError as refused:
            out.append(Paragraph(f"No chart of {kind.replace('_', ' ')}: {refused}."))
            continue
        caption = " ".join([data.question, data.reading, *data.notes])
        svg, pdf = (_svg(data), _pdf(data)) if figures else (None, None)
        out.append(Figure(kind, caption, svg, to_terminal(data, width=100, height=26), pdf))
    return out


def _svg(data: Any) -> str:
    import tempfile

    from .charts import to_figure

    with tempfile.TemporaryDirectory() as folder:
        return to_figure(data, Path(folder) / "figure.svg").read_text(encoding="utf-8")


def _pdf(data: Any) -> Any:
    from .charts import to_figure

    return lambda path: to_figure(data, path)
