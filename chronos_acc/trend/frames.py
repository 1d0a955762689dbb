# SPDX-License-Identifier: Apache-2.0
"""Rows to frames: one column a field, snake_case, unrounded, NaN or None where nothing was computed."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict, fields, is_dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    import pandas as pd


def frame(rows: Sequence[Any], kind: type[Any]) -> pd.DataFrame:
    """A frame of dataclass rows; its columns are the fields of ``kind`` even when there are no rows."""
    import pandas as pd

    columns = [f.name for f in fields(kind)]
    return pd.DataFrame([asdict(row) for row in rows], columns=columns)


def plain(value: Any) -> Any:
    """Native Python all the way down: dataclasses to dicts, arrays to lists, NaN and infinity to None."""
    if is_dataclass(value) and not isinstance(value, type):
        return {f.name: plain(getattr(value, f.name)) for f in fields(value)}
    if isinstance(value, dict):
        return {str(k): plain(v) for k, v in value.items()}
    if isinstance(value, (list, tuple)):
        return [plain(v) for v in value]
    if isinstance(value, np.ndarray):
        return [plain(v) for v in value.tolist()]
    if isinstance(value, np.bool_):
        return bool(value)
    if isinstance(value, np.integer):
        return int(value)
    if isinstance(value, (float, np.floating)):
        return float(value) if np.isfinite(value) else None
    return value
