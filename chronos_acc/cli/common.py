# SPDX-License-Identifier: Apache-2.0
"""What several commands do alike: find the timeline, build the record, say where it is."""

from __future__ import annotations

import argparse
import os
from pathlib import Path
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from ..bias.check import Context
    from ..record import Record
    from .output import Output


def timeline(options: argparse.Namespace) -> Path:
    """--db, else CHRONOS_ACC_DB, else timeline.duckdb in this folder."""
    return Path(options.db or os.environ.get("CHRONOS_ACC_DB") or "timeline.duckdb")


def chosen_record(options: argparse.Namespace, out: Output | None = None) -> Record:
    """The record that the shared options choose; its remarks go to ``out``, unless the result carries them itself."""
    from ..store.timeline import record

    found = record(timeline(options), present=options.present, start=options.start, sources=options.sources, min_support=options.min_support,
                   category=options.category)  # fmt: skip
    if out is not None:
        for note in found.notes:
            out.remark(note)
    return found


def chosen_context(options: argparse.Namespace, record: Record, out: Output, exposure: Any = None) -> Context:
    """What the bias checks and the grid are given: the record, the entries behind it, and the decisions that hold."""
    from ..bias.check import Context
    from ..store.decisions import standing
    from ..store.timeline import entries

    rows, milestone = entries(timeline(options))
    return Context(record=record, seed=options.seed, draws=options.draws, entries=rows, milestone=milestone, exposure=exposure, decisions=tuple(standing(timeline(options))),
                   tell=out.tell)  # fmt: skip


def command_line(name: str, options: argparse.Namespace) -> str:
    """The command that would make this result again, for ``made``."""
    words = ["chronos-acc", name]
    for key in ("present", "start", "sources", "min_support", "category", "seed", "draws"):
        value = getattr(options, key)
        if value is not None:
            text = ",".join(value) if isinstance(value, list) else f"{value!r}" if isinstance(value, float) else str(value)
            words += [f"--{key.replace('_', '-')}", text if text and all(c.isalnum() or c in "-_.,+" for c in text) else "'" + text.replace("'", "'\\''") + "'"]
    return " ".join(words)
