# SPDX-License-Identifier: Apache-2.0
"""Runs: grid and report leave a line, so that a printed figure can be made again."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

from .. import __version__
from .ledger import now, open_for_writing


def record_run(
    db: str | Path,
    *,
    command: str,
    seed: int | None = None,
    draws: int | None = None,
    record: str | None = None,
    result: Mapping[str, Any] | None = None,
) -> int:
    """Store a run: command line, seed, number of draws, hash of the record, main results. Returns its id."""
    text = None if result is None else json.dumps(_plain(result), ensure_ascii=False, allow_nan=False)
    with open_for_writing(db, create=False) as ledger, ledger.transaction():
        number = ledger.new_ids("run")
        ledger.run(
            "INSERT INTO ledger.run VALUES (?, ?, ?, ?, ?, ?, ?, ?)", [number, now(), command, __version__, seed, draws, record, text]
        )
    return number


def _plain(value: Any) -> Any:
    """What JSON can hold: no NaN, no numpy."""
    if isinstance(value, Mapping):
        return {str(k): _plain(v) for k, v in value.items()}
    if isinstance(value, str | bool | int | None):
        return value
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if hasattr(value, "to_dict"):  # a frame
        return _plain(value.to_dict("records")) if hasattr(value, "columns") else _plain(value.to_dict())
    if hasattr(value, "tolist"):
        return _plain(value.tolist())
    if isinstance(value, Sequence | set | frozenset):
        return [_plain(v) for v in value]
    return str(value)
