# SPDX-License-Identifier: Apache-2.0
"""The steps of the main job as functions, for scripts and notebooks: what the commands do, with results as dataclasses.

    import chronos_acc as ca

    ca.load("timeline.duckdb", ["museum.csv", "survey.csv"], compiled=2019)
    record = ca.read_record("timeline.duckdb", min_support=2)
    print(ca.analyse(record).verdict)
    ca.check_bias("timeline.duckdb").to_frame("summary")

Heavy libraries are imported inside the functions, so ``import chronos_acc`` is quick.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from .progress import Tell, silent

if TYPE_CHECKING:
    import pandas as pd

    from .bias import Bias
    from .bias.grid import Grid
    from .dating.dating import Reading
    from .intervals import Intervals
    from .record import Record
    from .store.linking import LinkSummary
    from .store.load import Loaded
    from .trend.analysis import Trend

Timeline = str | Path


def read_date(text: str, *, compiled: int | None = None, **settings: Any) -> Reading:
    """How one date text is read. ``settings`` are those of a sheet's [dating] table. Raises DateRefused."""
    from .dating import read
    from .dating.settings import Settings

    return read(text, Settings(compiled=compiled, **settings))


def load(db: Timeline, files: Sequence[Timeline] | Timeline, *, compiled: int | None = None, link: bool = True, tell: Tell = silent) -> list[Loaded]:
    """Read lists into the timeline ``db`` (made if it is not there); one result a list, in order. Raises ListRefused, SheetRefused, TimelineRefused."""
    from .store.load import load as run

    return run(Path(db), [files] if isinstance(files, str | Path) else list(files), compiled=compiled, link=link, tell=tell)


def link(db: Timeline, *, accept: float = 0.5, review: float = 0.1, prefer: str | None = None, pooling: str = "mixture", tell: Tell = silent) -> LinkSummary:
    """Find the entries that are the same milestone and pool their datings; what stood before is replaced, decisions hold."""
    from .merge.entries import LinkOptions
    from .store.linking import relink

    return relink(Path(db), options=LinkOptions(accept=accept, review=review, prefer=prefer, pooling=pooling), tell=tell)


def read_record(
    db: Timeline, *, present: float | None = None, start: float | None = None, sources: Sequence[str] | None = None, min_support: int | None = None,
    category: str | None = None,
) -> Record:  # fmt: skip
    """The milestones an analysis sees. Years are decimal and astronomical. Raises RecordRefused, TimelineRefused, WrongUse."""
    from .store.timeline import record as run

    return run(Path(db), present=present, start=start, sources=sources, min_support=min_support, category=category)


def interval_series(record: Record, *, seed: int = 1, draws: int = 2000, tell: Tell = silent) -> Intervals:
    """The years from each milestone to the next, with 95 % ranges from draws."""
    from .intervals import interval_series as run

    return run(record, seed=seed, draws=draws, tell=tell)


def analyse(record: Record, *, seed: int = 1, draws: int = 2000, next_event: bool = False, tell: Tell = silent) -> Trend:
    """Tests, rate laws, age exponent, regressions, nulls and the verdict. Raises RecordRefused below three milestones."""
    from .trend.analysis import analyse as run

    return run(record, seed=seed, draws=draws, next_event=next_event, tell=tell)


def check_bias(db: Timeline | Record, *, seed: int = 1, draws: int = 2000, checks: Sequence[str] | None = None, tell: Tell = silent) -> Bias:
    """The bias checks. From a timeline all can run; from a Record alone those that need the entries say that they cannot."""
    from .bias import run_checks

    return run_checks(_context(db, seed, draws, tell), names=checks)


def run_grid(db: Timeline | Record, *, choices: Timeline | None = None, seed: int = 1, draws: int = 2000, joint: int = 499, tell: Tell = silent) -> Grid:
    """Every combination of the choices; ``choices`` is a TOML file, else the defaults."""
    from .bias.grid import read_choices
    from .bias.grid import run_grid as run

    return run(_context(db, seed, draws, tell), choices=None if choices is None else read_choices(Path(choices)), joint=joint, tell=tell)


def query(db: Timeline, text: str, settings: Mapping[str, Any] | None = None) -> pd.DataFrame:
    """A named query or one SELECT, read-only. Raises QueryRefused."""
    from .store.query import run

    return run(Path(db), text, {k: str(v) for k, v in (settings or {}).items()})


def _context(db: Timeline | Record, seed: int, draws: int, tell: Tell) -> Any:
    from .bias.check import Context
    from .record import Record
    from .store.decisions import standing
    from .store.timeline import entries

    if isinstance(db, Record):
        return Context(record=db, seed=seed, draws=draws, tell=tell)
    rows, milestone = entries(Path(db))
    return Context(record=read_record(db), seed=seed, draws=draws, entries=rows, milestone=milestone, decisions=tuple(standing(Path(db))), tell=tell)
